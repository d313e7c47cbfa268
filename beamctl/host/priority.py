"""Real-time priority for what must never be late: asked for, and told as it was answered."""

from __future__ import annotations

import contextlib
import os
from collections.abc import Iterator

RENDER_PRIORITY = 20  # above everything ordinary, below a sound server (common practice)
GUARD_PRIORITY = 15  # it renews the lease
HOST_PRIORITY = 10  # it answers for the show; all its threads, or one would wait for another
RING_MS_REAL_TIME = 12.0
RING_MS_ORDINARY = 32.0


def ask_for_real_time(priority: int) -> str:
    """Raise the calling thread to first-in first-out scheduling; "real-time 20", or "ordinary".

    Threads and processes that it starts later inherit that. BEAMCTL_PRIORITY=ordinary does not ask.
    """
    if os.environ.get("BEAMCTL_PRIORITY") == "ordinary" or not hasattr(os, "sched_setscheduler"):
        return "ordinary"
    try:
        os.sched_setscheduler(0, os.SCHED_FIFO, os.sched_param(priority))
    except OSError:
        return "ordinary"
    return f"real-time {priority}"


def be_ordinary() -> None:
    """Back to ordinary scheduling, for what may take long."""
    if hasattr(os, "sched_setscheduler"):
        with contextlib.suppress(OSError):
            os.sched_setscheduler(0, os.SCHED_OTHER, os.sched_param(0))


@contextlib.contextmanager
def ordinarily() -> Iterator[None]:
    """What the calling thread starts in this block has ordinary scheduling from its first moment.

    A process that loads itself in real time would keep those of its own priority waiting.
    """
    if not hasattr(os, "sched_setscheduler"):
        yield
        return
    policy, parameters = os.sched_getscheduler(0), os.sched_getparam(0)
    be_ordinary()
    try:
        yield
    finally:
        with contextlib.suppress(OSError):
            os.sched_setscheduler(0, policy, parameters)


def ring_ms_for(asked_ms: float | None, priority: str) -> float:
    """The rig's own figure, or what suits the priority that was granted."""
    if asked_ms is not None:
        return asked_ms
    return RING_MS_ORDINARY if priority == "ordinary" else RING_MS_REAL_TIME
