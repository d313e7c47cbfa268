"""Native chatter goes to the log, the screen to the terminal, and all is put back."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

SCRIPT = """
import os, sys
from pathlib import Path
from beamctl.desk.stderr import chatter_to_log
try:
    with chatter_to_log(Path(sys.argv[1])):
        os.write(2, b"native chatter\\n")
        print("python chatter", file=sys.stderr)
        sys.__stderr__.write("the screen\\n")
        sys.__stderr__.flush()
        if sys.argv[2] == "fail":
            raise RuntimeError
except RuntimeError:
    pass
os.write(2, b"afterwards\\n")
sys.__stderr__.write("and python\\n")
"""


def run(log: Path, how: str) -> str:
    """What a fresh interpreter leaves on its standard error."""
    command = [sys.executable, "-c", SCRIPT, str(log), how]
    done = subprocess.run(command, capture_output=True, text=True, timeout=30, check=True)
    return done.stderr


@pytest.mark.parametrize("how", ["well", "fail"])
def test_chatter_is_kept_off_the_screen(tmp_path: Path, how: str) -> None:
    log = tmp_path / "new" / "desk.log"
    assert run(log, how) == "the screen\nafterwards\nand python\n"
    assert log.read_text() == "native chatter\npython chatter\n"


def test_a_log_that_cannot_be_written_does_not_stop_the_desk(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("in the way")
    assert run(tmp_path / "file" / "desk.log", "well") == "the screen\nafterwards\nand python\n"
