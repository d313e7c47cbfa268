"""How a report says times, bands and levels."""

from __future__ import annotations

from datetime import tzinfo

from beamctl.report.evening import Evening, Moment


def plain(text: object) -> str:
    """Text on one line, with nothing in it that could steer a terminal."""
    return "".join(c if c.isprintable() else "?" for c in str(text))


def band(band_hz: float) -> str:
    """A nominal frequency: "31.5 kHz"."""
    return f"{band_hz / 1000.0:g} kHz"


def seat_in(block: str, seat: str) -> str:
    """A seat without its block's name."""
    return plain(seat.removeprefix(f"{block} "))


def place(block: str, seat: str) -> str:
    """A seat with its block's name."""
    return f"{plain(block)} {seat_in(block, seat)}"


def level(level_db: float | None) -> str:
    """A level in dB to the hundredth; "quiet" where nothing was heard."""
    return "quiet" if level_db is None else f"{level_db:.2f} dB"


def length(seconds: float) -> str:
    """A length of time: "12.4 s", "5 min", "2 h 3 min 5 s"."""
    if round(seconds, 1) < 60.0:
        return f"{round(seconds, 1):g} s"
    minutes, left = divmod(round(seconds), 60)
    parts = ((minutes // 60, "h"), (minutes % 60, "min"), (left, "s"))
    return " ".join(f"{number} {unit}" for number, unit in parts if number)


class Times:
    """Moments of one evening in the venue's time zone, or from the start of a render."""

    def __init__(self, evening: Evening, zone: tzinfo) -> None:
        self.live = evening.first.utc is not None
        self._zone = zone
        self._dated = self.date(evening.first) != self.date(evening.last)

    def date(self, at: Moment) -> str:
        """The day, "2026-12-01"; "" for a render."""
        return "" if at.utc is None else f"{at.utc.astimezone(self._zone):%Y-%m-%d}"

    def stamp(self, at: Moment) -> str:
        """Date, time to the millisecond and offset from UTC, by ISO 8601; "" for a render."""
        if at.utc is None:
            return ""
        return at.utc.astimezone(self._zone).isoformat(timespec="milliseconds")

    def offset(self, at: Moment) -> str:
        """The zone's difference from UTC, "UTC+01:00"."""
        return "" if at.utc is None else f"UTC{at.utc.astimezone(self._zone).isoformat()[-6:]}"

    def clock(self, at: Moment) -> str:
        """Time of day to a tenth of a second, with the day when the evening has more than one."""
        if at.utc is None:
            minutes, seconds = divmod(int(at.second * 10.0), 600)
            return f"{minutes // 60}:{minutes % 60:02d}:{seconds / 10.0:04.1f}"
        local = at.utc.astimezone(self._zone)
        day = f"{local:%m-%d} " if self._dated else ""
        return f"{day}{local:%H:%M:%S}.{local.microsecond // 100_000}"
