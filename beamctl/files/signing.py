"""The venue's signature: the seal of what it signs for, and its place at the end of guard.toml.

The seal is a SHA-256 over names and contents of guard.toml without its [signed] table, rig.toml,
house.toml, and every cell list and measurement that rig.toml names. Comments count. A [signed]
table in another form than `sign` writes is part of the text, and so never fits its own digest.
There is no secret in it: it tells an edit from what was signed, not one person from another.
"""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Mapping
from contextlib import suppress
from hashlib import sha256
from pathlib import Path

import tomlkit

from beamctl.errors import ShowError
from beamctl.files.folder import MISSING, Unreadable, read_bytes, read_text
from beamctl.files.saving import write
from beamctl.show.checks import GUARD, HOUSE, RIG
from beamctl.show.rig import Rig

MOST_LETTERS = 200
_LINE = r' = "(?:[^"\\\r\n]|\\.)*"(?:\r?\n|\Z)'
_SIGNED = re.compile(rf"^\[signed\]\r?\nby{_LINE}on{_LINE}digest{_LINE}", re.MULTILINE)


def seal_of_parts(guard_text: str, rig: Rig, digests: Mapping[str, str]) -> str:
    """The seal, in hex, of files that were read; `digests` are SHA-256 in hex by name.

    A file without a digest counts as missing; so does guard.toml with an empty text.
    """
    own = sha256(_unsigned(guard_text).rstrip("\r\n").encode()).hexdigest()
    named = {f for panel in rig.panel.values() for f in (panel.cells, panel.measured) if f}
    rest = [(name, digests.get(name, "")) for name in sorted(named | {RIG, HOUSE})]
    return sha256(json.dumps([(GUARD, own), *rest]).encode()).hexdigest()


def seal_of(folder: Path) -> str:
    """The seal of a show folder as it is now; ShowError when its rig cannot be read."""
    digests: dict[str, str] = {}
    guard_text = ""
    try:
        rig_text, digests[RIG] = read_text(folder, RIG)
        rig = Rig.model_validate(tomllib.loads(rig_text))
    except (Unreadable, ValueError, RecursionError) as error:  # of TOML and of the model too
        raise ShowError(f"{folder / RIG} cannot be sealed", "`beamctl inspect` says why") from error
    with suppress(Unreadable):
        guard_text, _ = read_text(folder, GUARD)
    for name in {HOUSE, *(f for p in rig.panel.values() for f in (p.cells, p.measured) if f)}:
        with suppress(Unreadable):
            _, digests[name] = read_text(folder, name)
    return seal_of_parts(guard_text, rig, digests)


def sign(folder: Path, by: str, on: str, seal: str) -> None:
    """Write who signs the state with the digest `seal`, and on what day (ISO 8601).

    Nothing else of guard.toml changes. ShowError when the folder has another seal by now, or when
    the name or the file will not do; DeviceError when the disk refuses.
    """
    if not (by.strip() and by.isprintable() and len(by) <= MOST_LETTERS):
        raise ShowError(f"{by!r} is no name to sign with", f"1 to {MOST_LETTERS} letters")
    if seal_of(folder) != seal:
        raise ShowError(f"{folder} was edited while it was being signed", "look again, then sign")
    path = folder / GUARD
    try:
        before = read_bytes(folder, GUARD).decode()
    except Unreadable as error:
        what = "is missing" if str(error) == MISSING else str(error)
        raise ShowError(f"{path} {what}", "write one: format = 1") from None
    write({path: signed_text(before, by.strip(), on, seal).encode()}, do="nothing was signed")


def signed_text(text: str, by: str, on: str, seal: str) -> str:
    """The text of guard.toml with its one [signed] table last; the rest byte for byte as it was."""
    text = _unsigned(text)
    if "signed" in tomllib.loads(text.removeprefix("\ufeff")):
        what = f"{GUARD}: [signed] was changed by hand"
        raise ShowError(what, "delete that table, then sign again")
    if not text.endswith(("\n\n", "\n\r\n")):
        text += "\n" if text.endswith("\n") else "\n\n"
    return text + tomlkit.dumps({"signed": {"by": by, "on": on, "digest": seal}})


def _unsigned(text: str) -> str:
    return _SIGNED.sub("", text, count=1)
