"""The command line: the only place that chooses desk, host or a tool without a clock."""

from __future__ import annotations

import json
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from dataclasses import asdict
from pathlib import Path
from typing import Any

import click

from beamctl import __version__
from beamctl.caution import CAUTION_LINE
from beamctl.errors import BeamctlError, DeviceError, ShowError
from beamctl.files.reader import load_show, read_show
from beamctl.show.records import Record

HOST_STARTS_S = 20.0
SHOW = click.argument("show", type=click.Path(path_type=Path))


class Tidy(click.Group):
    """Turns every error of our own tree into its two lines and its exit code."""

    def invoke(self, ctx: click.Context) -> Any:
        """Run the command; a traceback never reaches the screen."""
        try:
            return super().invoke(ctx)
        except BeamctlError as error:
            click.echo(f"beamctl: {error}", err=True)
            ctx.exit(error.exit_code)


@click.group(cls=Tidy, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__)
def main() -> None:
    """Programme and run steerable ultrasonic sound beams.

    A show is a folder: sheet.toml (cues), rig.toml (panels), house.toml (room), guard.toml (caps),
    wire.toml (network) and sounds/. Try the one that ships:

    \b
      beamctl inspect scenes/night-tram
      beamctl desk scenes/night-tram
      beamctl render scenes/night-tram --go 1@0.5 --for 6 -o tram.wav

    Exit codes: 0 done, 1 warnings or a failed check, 2 errors in the show, 4 the machine,
    6 a sink that does not offer what the rig needs.
    """


@main.command()
@SHOW
@click.option("--sink", default="null", help="null, file:PATH, or a device of `beamctl sinks`.")
@click.option("--journal", type=click.Path(path_type=Path), help="Where to keep the journal.")
@click.option("--plain", is_flag=True, help="Plain ASCII, no block glyphs.")
def desk(show: Path, sink: str, journal: Path | None, plain: bool) -> None:
    """Open the desk on SHOW; starts a host, or joins the one that runs this show.

    Leaving the desk never changes a sample. A host that this desk started ends with it, unless the
    output is OPEN or HUSHED: then it runs on, and `beamctl desk` joins it again.
    """
    from beamctl.desk.app import run_desk
    from beamctl.host.link import Link

    load_show(show)
    link = Link(show)
    host = None if _answers(link) else _start_host(show, sink, journal, link)
    code = run_desk(link, plain)
    if host is not None and _answers(link):
        output = link.snapshot().output
        if output in ("OPEN", "HUSHED"):
            click.echo(f"The output is {output} and the host runs on.")
            click.echo(f"  beamctl desk {show}   joins it;   beamctl host {show} --stop   ends it")
        else:
            link.stop_host()
            host.wait(HOST_STARTS_S)
    link.close()
    if host is not None and host.poll() not in (None, 0):
        raise _said_by_host(host.returncode)
    sys.exit(code)


@main.command()
@SHOW
@click.option("--sink", default="null", help="null, file:PATH, or a device of `beamctl sinks`.")
@click.option("--journal", type=click.Path(path_type=Path), help="Where to keep the journal.")
@click.option("--stop", is_flag=True, help="End the host that runs SHOW, by a 20 ms ramp.")
def host(show: Path, sink: str, journal: Path | None, stop: bool) -> None:
    """Run SHOW without a desk, until Ctrl-C or --stop."""
    from beamctl.host.hosting import Host
    from beamctl.host.link import Link

    if stop:
        link = Link(show)
        if not _answers(link):
            raise DeviceError(f"no host runs {show}", "nothing to end")
        link.stop_host()
        until = time.monotonic() + HOST_STARTS_S
        while _answers(link) and time.monotonic() < until:
            time.sleep(0.05)
        return
    running = Host(show, sink, journal)
    for number in (signal.SIGINT, signal.SIGTERM):
        signal.signal(number, lambda *_: running.stop())
    click.echo(f"host of {show} on sink {sink}; journal {running.journal.path}")
    sys.exit(running.run())


@main.command()
@SHOW
@click.option("--json", "as_json", is_flag=True, help="Machine-readable.")
def inspect(show: Path, as_json: bool) -> None:
    """List every error and warning in SHOW. Exit 0 clean, 1 warnings, 2 errors."""
    found, problems = read_show(show)
    if as_json:
        click.echo(json.dumps([asdict(p) for p in problems], indent=2))
    else:
        for problem in problems:
            click.echo(f"{problem.severity}: {problem}")
        if found is not None:
            sheet, rig = found.sheet, found.rig
            click.echo(
                f"{sheet.title}: {len(sheet.cue)} cues, {len(sheet.beam)} beams, "
                f"{len(rig.panel)} panels, {found.channels} feeds at {rig.rate_hz} Hz"
            )
            click.echo(CAUTION_LINE)
    severities = {problem.severity for problem in problems}
    sys.exit(2 if "error" in severities else 1 if severities else 0)


def _moment(text: str, rate_hz: int) -> int:
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


@main.command()
@SHOW
@click.option("--go", "gos", multiple=True, metavar="REF@S", help="Fire cue REF at S; repeatable.")
@click.option("--for", "length", required=True, metavar="S", help="How long to render.")
@click.option(
    "-o", "--output", required=True, type=click.Path(path_type=Path), help="The RF64 file."
)
@click.option("--journal", type=click.Path(path_type=Path), help="Keep the records too.")
@click.option("--json", "as_json", is_flag=True, help="Machine-readable summary.")
def render(
    show: Path,
    gos: tuple[str, ...],
    length: str,
    output: Path,
    journal: Path | None,
    as_json: bool,
) -> None:
    """Render every feed of SHOW to an RF64 file, faster than real time.

    S is seconds, 3.5, or samples, 672000smp. The same player and renderer as live, without a clock:
    the file holds, sample for sample, what the sink would have been given. No exposure watchdog is
    in this version: it is what the sheet asks for, within the ratings of the rig.
    """
    from beamctl.host import offline
    from beamctl.host.journal import Journal
    from beamctl.sinks.rf64 import Rf64Writer

    found = load_show(show)
    rate_hz = found.rig.rate_hz
    samples = _moment(length, rate_hz)
    if journal is not None and journal.exists():
        raise DeviceError(f"journal {journal} exists", "name another with --journal")
    asked = []
    for go in gos:
        ref, at, moment = go.rpartition("@")
        if not at:
            raise ShowError(f"--go {go}: no time", "write --go REF@S, such as --go 12.5@3.5")
        asked.append((_moment(moment, rate_hz), ref))
    records = list(offline.play_through(found, asked, samples))
    writer = Rf64Writer(output, rate_hz, found.channels)
    started = time.monotonic()
    try:
        with _bar(not as_json) as progress:
            digest = offline.render(found, records, samples, writer.write, progress)
    except BaseException:
        writer.abandon()
        raise
    writer.close()
    if journal is not None:
        kept = Journal(journal, found, f"file:{output}")
        kept.write([Record(0, "stream"), *records, offline.left(samples, digest)])
        kept.close()
    seconds = samples / rate_hz
    spent = time.monotonic() - started
    summary = {"samples": samples, "channels": found.channels, "sha256": digest}
    if as_json:
        click.echo(json.dumps(summary | {"seconds": seconds, "took_s": spent}))
    else:
        click.echo(
            f"{output}: {found.channels} feeds, {seconds:g} s in {spent:.1f} s "
            f"({seconds / spent:.1f} x real time), sha256 {digest[:16]}"
        )


@main.command()
@click.argument("log", type=click.Path(path_type=Path))
@click.option("-o", "--output", type=click.Path(path_type=Path), help="Write the feeds as RF64.")
def replay(log: Path, output: Path | None) -> None:
    """Render the journal LOG again and compare with what left then. Exit 1 when it differs."""
    from beamctl.host import offline
    from beamctl.sinks.rf64 import Rf64Writer

    found, streams = offline.recall(log)
    writer = Rf64Writer(output, found.rig.rate_hz, found.channels) if output else None
    write = writer.write if writer else _discard
    try:
        with _bar(True) as progress:
            outcomes = offline.replay(found, streams, write, progress)
    except BaseException:
        if writer:
            writer.abandon()
        raise
    if writer:
        writer.close()
    said = {True: "the same samples", False: "DIFFERENT SAMPLES", None: "cut off, not compared"}
    for outcome in outcomes:
        click.echo(
            f"{log.name}: from sample {outcome.start}, {outcome.samples} samples: "
            f"{said[outcome.same]}, sha256 {outcome.digest}"
        )
    sys.exit(1 if any(outcome.same is False for outcome in outcomes) else 0)


@main.command()
@click.option("--json", "as_json", is_flag=True, help="Machine-readable.")
def sinks(as_json: bool) -> None:
    """List output devices with their channels and rates."""
    from beamctl.sinks.portaudio import list_sinks

    found = list_sinks()
    if as_json:
        click.echo(json.dumps([asdict(sink) for sink in found], indent=2))
        return
    click.echo("null: no device, in real time\nfile:PATH: an RF64 file, in real time")
    for sink in found:
        click.echo(
            f"{sink.host_api}: {sink.name}: {sink.channels} channels, "
            f"{sink.default_rate_hz:g} Hz by default"
        )


def _discard(block: object) -> None:
    """Where feeds go that only their digest is wanted of."""


class _bar:
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


def _answers(link: Any) -> bool:
    """True when a host is there."""
    try:
        link.snapshot()
    except (OSError, EOFError):
        return False
    return True


def _start_host(show: Path, sink: str, journal: Path | None, link: Any) -> subprocess.Popen[bytes]:
    """Start a host of its own session, so that closing this terminal does not end it."""
    from beamctl.host.places import state_folder

    command = [sys.executable, "-m", "beamctl", "host", str(show), "--sink", sink]
    if journal is not None:
        command += ["--journal", str(journal)]
    log = state_folder() / "host.log"
    with log.open("wb") as out:
        process = subprocess.Popen(
            command, stdin=subprocess.DEVNULL, stdout=out, stderr=out, start_new_session=True
        )
    until = time.monotonic() + HOST_STARTS_S
    while not _answers(link):
        if process.poll() is not None or time.monotonic() > until:
            raise _said_by_host(process.poll())
        time.sleep(0.05)
    return process


def _said_by_host(code: int | None) -> DeviceError:
    """What a host that ended by itself left in its log."""
    from beamctl.host.places import state_folder

    log = state_folder() / "host.log"
    code = code if code and code > 0 else DeviceError.exit_code  # below 0: killed by a signal
    said = [line for line in log.read_text(errors="replace").splitlines() if line.strip()]
    told = [i for i, line in enumerate(said) if line.startswith("beamctl: ")]
    if not told:
        return DeviceError("the host ended and said nothing", f"its log is {log}", code)
    what = said[told[-1]].removeprefix("beamctl: ")
    return DeviceError(what, " ".join(line.strip() for line in said[told[-1] + 1 :]), code)
