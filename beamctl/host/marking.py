"""The operator's way through the feeds of a panel: what sounds, and what each key says of it.

Every feed sounds alone for half a second and then together with the reference for half a second,
over and over, until a key marks it: a level that falls when the reference comes in is a reversed
feed. So a look takes a second, and 64 feeds leave 0.4 s each for the hand within 90 s.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable, Sequence

from beamctl.desk.keyguard import REPEAT_GAP_S
from beamctl.guard.wiring import Reading
from beamctl.host.stepping import Stepper
from beamctl.host.typed import Keys

ALONE_S = 0.5
TOGETHER_S = 0.5
EARLIEST_S = 0.7  # the reference must have been heard; and a held key first repeats before this
KEYS_TEXT = """\
  p, Space or Enter  pass: heard in its place, and louder with the reference
  s  silent       r  reversed: softer with the reference       w  weak
  e  elsewhere: loudest at another feed's place, whose number you type
  d  type its levels in dB, read off a meter; the marks follow from them
  b  back one feed
  0, q, Ctrl-C, Insert or F12  SILENCE, and the end of the check"""

PASS = ("p", " ", "\n", "\r")
MARKS = (*PASS, "s", "r", "w", "e", "d")


class Marking:
    """One panel's feeds, by the rig's numbers, until every one is marked.

    The reference is the first of `from_centre` that passes; those are heard first.
    """

    def __init__(
        self,
        stepper: Stepper,
        keys: Keys,
        from_centre: Sequence[int],
        channels: int,
        say: Callable[[str], object],
    ) -> None:
        """`channels`: the rig's highest feed; `say` shows text as it is, without a new line."""
        self._stepper, self._keys, self._say = stepper, keys, say
        self._candidates, self._channels = from_centre, channels
        self._last_key_s = -math.inf
        self.reference: int | None = None
        self.readings: dict[int, Reading] = {}  # in the order of marking

    def run(self) -> list[Reading]:
        """The readings in the order of feeds; Silenced when the operator ends it."""
        while (feed := self._next()) is not None:
            count = f"{len(self.readings) + 1}/{len(self._candidates)}"
            self._say(f"\r\x1b[K{count:>7}  feed {feed:>3}  ")
            reading = self._listen(feed)
            if reading is None:
                self._back()
                continue
            self.readings[feed] = reading
            if self.reference is None and reading.heard_at == feed and not reading.ear:
                self.reference = feed
            self._say(f"{word_of(reading)}\n")
        self._stepper.sound(())
        return [self.readings[feed] for feed in sorted(self.readings)]

    def _next(self) -> int | None:
        order = self._candidates if self.reference is None else sorted(self._candidates)
        return next((feed for feed in order if feed not in self.readings), None)

    def _back(self) -> None:
        if self.readings:
            feed, _ = self.readings.popitem()
            if feed == self.reference:
                self.reference = None

    def _listen(self, feed: int) -> Reading | None:
        """Sound a feed until it is marked; None to go back."""
        began_s = time.monotonic()
        while True:
            key = self._key(feed, began_s)
            if key == "b":
                return None
            if key in PASS:
                return Reading(feed, feed)
            if key == "s":
                return Reading(feed, None)
            if key == "w":
                return Reading(feed, feed, ear="weak")
            if key == "r" and self.reference is not None:
                return Reading(feed, feed, ear="reversed")
            if key == "r":
                self._say("(no reference yet) ")
            elif (reading := self._typed(feed, key)) is not None:
                return reading
            began_s = time.monotonic()

    def _key(self, feed: int, began_s: float) -> str:
        """The next key that counts, the feed sounding by turns alone and with the reference."""
        while True:
            now_s = time.monotonic()
            into_s = (now_s - began_s) % (ALONE_S + TOGETHER_S)
            alone = into_s < ALONE_S or self.reference is None
            feeds = {feed} if alone else {feed, self.reference}
            self._stepper.sound([f - 1 for f in feeds if f is not None])
            turn_s = ALONE_S if into_s < ALONE_S else ALONE_S + TOGETHER_S
            key = self._keys.next(turn_s - into_s)
            if self._stepper.trouble is not None:
                raise self._stepper.trouble
            if key is None:
                continue
            now_s = time.monotonic()
            held = now_s - self._last_key_s < REPEAT_GAP_S
            self._last_key_s = now_s
            if key.lower() in (*MARKS, "b") and not held and now_s - began_s >= EARLIEST_S:
                return key.lower()

    def _typed(self, feed: int, key: str) -> Reading | None:
        """What is typed about a feed, in silence; None when it makes no sense."""
        self._stepper.sound(())
        if key == "e":
            self._say("loudest at the place of feed: ")
            text = self._keys.line(self._say)
            if text.isascii() and text.isdigit() and 1 <= int(text) <= self._channels:
                return Reading(feed, int(text))
            self._say(f" (expected a feed from 1 to {self._channels}) ")
            return None
        self._say("alone, dB: ")
        alone_db = number(self._keys.line(self._say))
        together_db = None
        if alone_db is not None and self.reference not in (None, feed):
            self._say(" with the reference, dB: ")
            together_db = number(self._keys.line(self._say))
            if together_db is None:
                alone_db = None
        if alone_db is None:
            self._say(" (expected a number of decibels) ")
            return None
        self._say(" ")
        return Reading(feed, feed, alone_db, together_db)


def number(text: str) -> float | None:
    """A level as it was typed; None when it is none."""
    try:
        value = float(text)
    except ValueError:
        return None
    return value if abs(value) <= 200.0 else None


def word_of(reading: Reading) -> str:
    """A mark in a word."""
    if reading.heard_at is None:
        return "silent"
    if reading.heard_at != reading.feed:
        return f"heard at {reading.heard_at}"
    if reading.level_db is not None:
        return "measured"
    return reading.ear or "pass"
