"""Places of their own for every process that a test starts."""

from __future__ import annotations

import tempfile
from collections.abc import Iterator
from pathlib import Path

import pytest


@pytest.fixture(autouse=True)
def own_places(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[None]:
    """Sockets, journals and logs go to folders of this test; compiled code stays shared.

    The name of a socket has room for about a hundred characters, hence the short folder for it.
    """
    with tempfile.TemporaryDirectory(prefix="bc") as runtime:
        monkeypatch.setenv("BEAMCTL_RUNTIME", runtime)
        monkeypatch.setenv("BEAMCTL_STATE", str(tmp_path / "state"))
        monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "xdg"))
        yield
