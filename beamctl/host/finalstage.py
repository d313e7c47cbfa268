"""The host's side of the final stage: lives for it, asks it to open, and hears what it did."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterable
from typing import Any

from beamctl.engine import layout as at
from beamctl.engine.drift import Drift
from beamctl.engine.outlet import Event
from beamctl.host.keeper import Keeper
from beamctl.show.player import Player
from beamctl.show.records import Record

LEASE_S = 0.15
OPENS_S = 0.3

TOLD = {
    "granted": "grant",
    "opened": "gate",
    "hushed": "gate",
    "lease-over": "gate",
    "host-over": "gate",
    "short": "short",
    "dry": "dry",
}


class FinalStage:
    """Of one engine after another; what it did goes to `write`, what people must know to `notice`.

    `lease_over` is called with the sample at which the guard's lease ran out while it was open.
    """

    def __init__(
        self,
        keeper: Keeper,
        player: Player,
        write: Callable[[Iterable[Record]], None],
        notice: Callable[[str], None],
        lease_over: Callable[[int], None],
    ) -> None:
        self._keeper, self._player = keeper, player
        self._write, self._notice, self._lease_over = write, notice, lease_over
        self.drift = Drift(player.rate_hz)
        self._asked: int | None = None  # the frame by which it must have opened

    def begin(self) -> None:
        """Another engine opened its sink."""
        self.drift, self._asked = Drift(self._player.rate_hz), None

    def gate(self, record: Record) -> None:
        """Ask for what a `gate` record says: to open by its ramp, or to shut."""
        if (outlet := self._keeper.outlet) is None:
            return
        if record.args["open"]:
            outlet.ask_open(int(record.args["n"]))
            self._asked = outlet.count(at.READ) + round(OPENS_S * self._player.rate_hz)
        else:
            self.hush()

    def hush(self) -> None:
        """Shut it at once."""
        self._asked = None
        if (outlet := self._keeper.outlet) is not None:
            outlet.hush()

    def live(self) -> None:
        """Answer for what sounds: a host that stalls lets it end."""
        if (outlet := self._keeper.outlet) is None:
            return
        read = outlet.count(at.READ)
        outlet.host_lives(read + round(LEASE_S * self._player.rate_hz))
        self.drift.note(time.monotonic_ns(), outlet.count(at.LAST_READ))
        late = self._asked is not None and read > self._asked
        if late and self._player.output == "OPEN":  # no lease was there to open on
            self._asked = None
            self._write(self._player.sink("host-over", outlet.count(at.WRITTEN)))
            self._notice("asked to open, the way out stayed shut; * then Enter asks again")

    def tell(self) -> None:
        """Put into the journal what it did, and act on what nobody asked for."""
        outlet = self._keeper.outlet
        for event in outlet.events() if outlet is not None else ():
            self._write([self._record(event)])
            if TOLD.get(event.name) == "gate":
                self._asked = None
            if event.name == "host-over" and self._player.output == "OPEN":
                self._write(self._player.sink("host-over", event.sample))
                self._notice("the host stalled, and the output was hushed; * then Enter restores")
            if event.name == "lease-over" and self._player.output == "OPEN":
                self._lease_over(event.sample)

    def _record(self, event: Event) -> Record:
        what = TOLD.get(event.name, "fault")
        args: dict[str, Any]
        if what == "grant":
            assert self._keeper.outlet is not None
            args = {"ceilings": self._keeper.outlet.granted(event.value)}
        elif what == "gate":
            opened = int(event.name == "opened")
            args = {"open": opened, "n": event.value, "why": event.name}
        elif what == "fault":
            args = {event.name: event.value}
            self._notice(f"{event.name} on feed {event.value}")
        else:
            args = {"seen" if what == "short" else "n": event.value}
        return Record(event.sample, what, args=args)
