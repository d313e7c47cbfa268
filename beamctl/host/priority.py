"""Real-time priority for the thread that renders: asked for, and told as it was answered."""

from __future__ import annotations

import os

PRIORITY = 20  # above everything ordinary, below a sound server's own threads (common practice)
RING_MS_REAL_TIME = 12.0
RING_MS_ORDINARY = 32.0


def ask_for_real_time() -> str:
    """Raise the calling thread to first-in first-out scheduling; "real-time 20", or "ordinary"."""
    if not hasattr(os, "sched_setscheduler"):
        return "ordinary"
    try:
        os.sched_setscheduler(0, os.SCHED_FIFO, os.sched_param(PRIORITY))
    except OSError:
        return "ordinary"
    return f"real-time {PRIORITY}"


def ring_ms_for(asked_ms: float | None, priority: str) -> float:
    """The rig's own figure, or what suits the priority that was granted."""
    if asked_ms is not None:
        return asked_ms
    return RING_MS_ORDINARY if priority == "ordinary" else RING_MS_REAL_TIME
