"""Keeps what native libraries write to file descriptor 2 off the screen.

ALSA, JACK and PortAudio write there directly, and would draw over the desk; Textual's driver writes
the screen itself to `sys.__stderr__`, so that one is given the terminal under a new number.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path


@contextmanager
def chatter_to_log(log: Path) -> Iterator[None]:
    """Send descriptor 2 to the end of file `log` for as long as the block runs."""
    before = sys.__stderr__
    sys.stderr.flush()
    terminal = os.dup(2)
    try:
        target = _open(log)
        os.dup2(target, 2)
        os.close(target)
        with open(terminal, "w", encoding="utf-8", errors="replace", closefd=False) as screen:
            sys.__stderr__ = screen  # type: ignore[misc]
            yield
    finally:
        sys.__stderr__ = before  # type: ignore[misc]
        sys.stderr.flush()
        os.dup2(terminal, 2)
        os.close(terminal)


def _open(log: Path) -> int:
    """A descriptor for `log`, or for nowhere when it cannot be written: the desk must still run."""
    flags = os.O_WRONLY | os.O_CREAT | os.O_APPEND
    try:
        log.parent.mkdir(parents=True, exist_ok=True)
        return os.open(log, flags, 0o600)
    except OSError:
        return os.open(os.devnull, os.O_WRONLY)
