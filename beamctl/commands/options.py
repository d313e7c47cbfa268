"""What several commands have in common: arguments, moments, and the bar of long work."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from pathlib import Path

import click

from beamctl.errors import ShowError

SHOW = click.argument("show", type=click.Path(path_type=Path))
SINK = click.option(
    "--sink", default="null", help="null, file:PATH, or a device of `beamctl sinks`."
)
JOURNAL = click.option(
    "--journal", type=click.Path(path_type=Path), help="Where to keep the journal."
)
JSON = click.option("--json", "as_json", is_flag=True, help="Machine-readable.")


def moment(text: str, rate_hz: int) -> int:
    """Seconds ("3.5") or samples ("672000smp") as a sample number."""
    try:
        if text.endswith("smp"):
            sample = int(text.removesuffix("smp"))
        else:
            sample = round(float(text) * rate_hz)
    except (ValueError, OverflowError):
        raise ShowError(f"{text!r} is no time", "write 3.5 (seconds) or 672000smp") from None
    if sample < 0:
        raise ShowError(f"{text!r} is before the start", "write 0 or more")
    return sample


class Bar:
    """A progress bar on standard error; its value is a callable (what, done, of)."""

    def __init__(self, shown: bool) -> None:
        self._shown = shown and sys.stderr.isatty()
        self._last = 0.0

    def __enter__(self) -> Callable[[str, int, int], None]:
        return self._tell

    def __exit__(self, *_: object) -> None:
        if self._shown:
            click.echo("\r\x1b[K", nl=False, err=True)

    def _tell(self, what: str, done: int, of: int) -> None:
        now = time.monotonic()
        if not self._shown or (now - self._last < 0.1 and done):
            return
        self._last = now
        filled = round(30 * done / max(of, 1))
        click.echo(
            f"\r\x1b[K{'=' * filled:30s} {what} {100 * done // max(of, 1)} %", nl=False, err=True
        )
