"""Saving: what the folder holds after it, after a power cut at any moment, and when it is refused.

The cut is at every call that changes the disk, and takes with it whatever was not synced by then.
"""

from __future__ import annotations

import os
import stat
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from hashlib import sha256
from pathlib import Path
from typing import Any

import pytest

from beamctl.errors import DeviceError, ShowError
from beamctl.files.saving import save

OLD = {"sheet.toml": "old sheet\r\n", "rig.toml": "old rig\n", "wire.toml": "wire\n"}
NEW = {"sheet.toml": "new sheet\r\n", "rig.toml": "new rig\n", "guard.toml": "begun é\n"}
DIGESTS = {name: sha256(text.encode()).hexdigest() for name, text in OLD.items()}


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A folder with the old texts."""
    return fill(tmp_path / "show")


def fill(folder: Path) -> Path:
    folder.mkdir()
    for name, text in OLD.items():
        (folder / name).write_bytes(text.encode())
    return folder


def held(folder: Path) -> dict[str, str]:
    """Every file of a folder and its text."""
    return {path.name: path.read_bytes().decode() for path in sorted(folder.iterdir())}


def test_what_changed_is_written_and_its_predecessor_stays(folder: Path) -> None:
    times = (folder / "wire.toml").stat().st_mtime_ns
    save(folder, {**OLD, **NEW}, DIGESTS)
    kept = {f"{name}~": OLD[name] for name in ("sheet.toml", "rig.toml")}
    assert held(folder) == {**OLD, **NEW, **kept}
    assert (folder / "wire.toml").stat().st_mtime_ns == times
    save(folder, {"sheet.toml": "newer"}, None)
    assert held(folder) == {
        **OLD,
        **NEW,
        **kept,
        "sheet.toml": "newer",
        "sheet.toml~": "new sheet\r\n",
    }


def test_nothing_new_is_nothing_written(folder: Path) -> None:
    before = folder.stat().st_mtime_ns
    save(folder, OLD, DIGESTS)
    assert (folder.stat().st_mtime_ns, held(folder)) == (before, OLD)


def test_mode_and_link_stay(folder: Path) -> None:
    (folder / "sheet.toml").chmod(0o640)
    (folder / "rig.toml").rename(folder / "here.toml")
    (folder / "rig.toml").symlink_to("here.toml")
    save(folder, NEW, DIGESTS)
    assert stat.S_IMODE((folder / "sheet.toml").stat().st_mode) == 0o640
    assert stat.S_IMODE((folder / "sheet.toml~").stat().st_mode) == 0o640
    assert (folder / "rig.toml").is_symlink()
    assert held(folder)["here.toml"] == "new rig\n"


@pytest.mark.parametrize("name", ["sheet.toml", "wire.toml", "guard.toml"])
def test_what_somebody_else_wrote_is_not_written_over(folder: Path, name: str) -> None:
    (folder / name).write_text("of somebody else")
    before = held(folder)
    with pytest.raises(ShowError) as caught:
        save(folder, {**OLD, **NEW}, DIGESTS)
    assert caught.value.what.startswith(f"{folder / name} was changed by somebody else")
    assert "move it to another name" in caught.value.do
    assert held(folder) == before
    (folder / name).rename(folder / "mine.toml")
    save(folder, {**OLD, **NEW}, DIGESTS)
    assert held(folder)[name] == {**OLD, **NEW}[name]


def test_what_a_cut_left_behind_is_swept(folder: Path) -> None:
    (folder / ".sheet.toml-0badf00d.part").write_text("half a she")
    (folder / ".sheet.toml-notes").write_text("mine")
    save(folder, NEW)
    assert [name for name in held(folder) if name[0] == "."] == [".sheet.toml-notes"]


class PowerCut(BaseException):
    """The machine has stopped: nothing more happens."""


class Disk:
    """Counts the calls that change the disk, and refuses all from number `last` on."""

    def __init__(self, last: int, fault: Callable[[], BaseException]) -> None:
        self.last, self.fault = last, fault
        self.calls, self.dead = 0, False
        self.synced: set[int] = set()

    @contextmanager
    def at_work(self) -> Iterator[None]:
        with pytest.MonkeyPatch.context() as patch:
            for owner, name in ((os, "fsync"), (Path, "replace"), (Path, "open"), (Path, "unlink")):
                patch.setattr(owner, name, self._counted(name, getattr(owner, name)))
            yield

    def _counted(self, name: str, call: Callable[..., Any]) -> Callable[..., Any]:
        def counted(*arguments: Any, **options: Any) -> Any:
            self.calls += name in ("fsync", "replace") or "xb" in arguments
            if self.calls >= self.last and (self.dead or name != "unlink"):
                self.dead = self.fault is PowerCut
                raise self.fault()
            done = call(*arguments, **options)
            if name == "fsync":
                self.synced.add(os.fstat(arguments[0]).st_ino)
            return done

        return counted

    def lose(self, folder: Path) -> None:
        """What was written and never synced is empty after the cut."""
        for path in folder.iterdir():
            if path.stat().st_ino not in self.synced:
                os.truncate(path, 0)


def calls_of_a_save(tmp_path: Path) -> int:
    disk = Disk(10**9, PowerCut)
    with disk.at_work():
        save(fill(tmp_path / "counted"), NEW, DIGESTS)
    return disk.calls


def test_a_power_cut_at_any_moment_leaves_each_file_old_or_new(tmp_path: Path) -> None:
    count = calls_of_a_save(tmp_path)
    assert count > 15  # five texts written and synced, five renamed, the folder synced
    seen = set()
    for last in range(1, count + 1):
        folder = fill(tmp_path / f"cut-{last}")
        disk = Disk(last, PowerCut)
        disk.synced = {path.stat().st_ino for path in folder.iterdir()}
        with disk.at_work(), pytest.raises(PowerCut):
            save(folder, NEW, DIGESTS)
        disk.lose(folder)
        found = held(folder)
        for name in {**OLD, **NEW}:
            assert found.get(name) in {OLD.get(name), NEW.get(name)}
            assert found.get(f"{name}~", OLD.get(name)) == OLD.get(name)
        seen.add(tuple(found.get(name) for name in NEW))
        save(folder, {**OLD, **NEW}, {n: sha256(t.encode()).hexdigest() for n, t in found.items()})
        assert {name: held(folder)[name] for name in NEW} == NEW
        assert [name for name in held(folder) if name[0] == "."] == []
    assert len(seen) == 4  # none new, the first, the first two, all


def test_a_disk_that_refuses_at_any_moment_leaves_nothing_behind(tmp_path: Path) -> None:
    for last in range(1, calls_of_a_save(tmp_path) + 1):
        folder = fill(tmp_path / f"full-{last}")
        disk = Disk(last, lambda: OSError(28, "No space left on device"))
        with disk.at_work(), pytest.raises(DeviceError, match="cannot be written: no space left"):
            save(folder, NEW, DIGESTS)
        found = held(folder)
        assert all(found.get(name) in {OLD.get(name), NEW.get(name)} for name in NEW)
        assert [name for name in found if name[0] == "."] == []
