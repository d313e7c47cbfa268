"""Which presses count: a held key is one press, and a paste is none.

Terminals report no key release, and a held key looks like many presses: the first repeat comes
250 to 660 ms after the press, the others some 30 ms apart (common practice of keyboards).
"""

from __future__ import annotations

from collections import deque

GUARD_S = 0.7
REPEAT_GAP_S = 0.12

PASTE_KEYS = 3  # more than this many ...
PASTE_S = 0.020  # ... within this time were not typed
SETTLE_S = 0.006  # a pasted run reaches the program in one piece, so this shows it


class RepeatGuard:
    """Lets a press through once; its repeats keep the guard up for as long as they come."""

    def __init__(self) -> None:
        self._until_s = float("-inf")

    def lets(self, at_s: float) -> bool:
        """True when the press at `at_s` is one of its own."""
        fresh = at_s >= self._until_s
        self._until_s = at_s + GUARD_S if fresh else max(self._until_s, at_s + REPEAT_GAP_S)
        return fresh


class PasteGuard:
    """Numbers the presses, and voids those that came too fast to be typed."""

    def __init__(self) -> None:
        self._recent_s: deque[float] = deque(maxlen=PASTE_KEYS + 1)
        self._press = 0
        self._void_to = 0

    def count(self, at_s: float) -> int:
        """Number of the press at `at_s`; ask `holds` about it after SETTLE_S."""
        self._press += 1
        self._recent_s.append(at_s)
        full = len(self._recent_s) == PASTE_KEYS + 1
        if full and at_s - self._recent_s[0] < PASTE_S:
            self._void_to = self._press
        return self._press

    def holds(self, press: int) -> bool:
        """True when no paste has swallowed press number `press`."""
        return press > self._void_to
