"""A wall clock for processes that a test starts, which the test sets; monotonic time goes on."""

from __future__ import annotations

import os
import subprocess
from pathlib import Path

import numpy as np
from support.running import need


class WallClock:
    """Built by the C compiler that is there; a test is skipped, or under CI fails, without one."""

    def __init__(self, folder: Path) -> None:
        need("cc")
        library, ahead = folder / "wallclock.so", folder / "ahead"
        source = Path(__file__).with_name("wallclock.c")
        subprocess.run(["cc", "-O2", "-shared", "-fPIC", source, "-o", library], check=True)
        ahead.write_bytes(bytes(8))
        self._ahead_s = np.memmap(ahead, np.int64, "r+", shape=(1,))
        self.env = os.environ | {"LD_PRELOAD": str(library), "WALLCLOCK_AHEAD": str(ahead)}

    def jump(self, seconds: int) -> None:
        """Set it on, or back, all at once."""
        self._ahead_s[0] += seconds
