"""Keeps what native libraries print away from the screen."""

from __future__ import annotations

import os
import sys
from pathlib import Path


def send_native_chatter_to(log: Path) -> None:
    """Point file descriptors 1 and 2 of this process at `log`, for good."""
    target = os.open(log, os.O_WRONLY | os.O_CREAT | os.O_APPEND, 0o600)
    for stream in (sys.stdout, sys.stderr):
        stream.flush()
    os.dup2(target, 1)
    os.dup2(target, 2)
    os.close(target)
