"""`beamctl report`: what a venue files after a show."""

from __future__ import annotations

import sys
from datetime import UTC
from pathlib import Path

import click

from beamctl.errors import DeviceError, ShowError
from beamctl.report.evening import Evening
from beamctl.report.words import Times

CHARTS = (".png", ".svg")


@click.command()
@click.argument("log", type=click.Path(path_type=Path))
@click.option(
    *("-o", "--output"),
    required=True,
    type=click.Path(path_type=Path),
    help="FILE.txt, or a NAME for NAME.txt, NAME.csv and NAME.svg.",
)
@click.option("--csv", type=click.Path(path_type=Path), help="Every reading of every seat block.")
@click.option("--chart", type=click.Path(path_type=Path), help="Levels as FILE.png or FILE.svg.")
@click.option("--force", is_flag=True, help="Write over files that exist.")
def report(log: Path, output: Path, csv: Path | None, chart: Path | None, force: bool) -> None:
    """Write what a venue files of the show whose journal is LOG.

    Caps and who signed them, level and dose of every seat block, all that was held, tripped or
    refused, every GO, versions and checksums. What was found is printed too.

    Exit 0 written, 1 written of a journal that is cut off, damaged or not closed.
    """
    from beamctl.report.findings import findings
    from beamctl.report.text import found_lines
    from beamctl.report.text import report as text_of

    text, csv, chart = _names(output, csv, chart)
    _check([path for path in (text, csv, chart) if path is not None], log, force)
    evening = _read(log)
    zone = evening.heading.began.astimezone().tzinfo or UTC
    times = Times(evening, zone)
    _write(text, text_of(evening, times).encode(), force)
    if csv is not None:
        from beamctl.report.rows import rows

        _write(csv, rows(evening, times).encode(), force)
    if chart is not None:
        from beamctl.report.chart import chart as picture

        _write(chart, picture(evening, times, zone, chart.suffix[1:].lower()), force)
    for line in found_lines(findings(evening, times)):
        click.echo(line)
    click.echo(", ".join(str(path) for path in (text, csv, chart) if path is not None))
    sys.exit(1 if evening.problems or not evening.closed else 0)


def _names(
    output: Path, csv: Path | None, chart: Path | None
) -> tuple[Path, Path | None, Path | None]:
    """Where text, table and picture go."""
    if chart is not None and chart.suffix.lower() not in CHARTS:
        raise ShowError(f"--chart {chart}: no kind of picture", "name it .png or .svg")
    kind = output.suffix.lower()
    if kind in (*CHARTS, ".csv"):
        option = "--csv" if kind == ".csv" else "--chart"
        raise ShowError(f"-o {output}: -o is the text", f"write -o NAME.txt {option} {output}")
    if kind == ".txt":
        return output, csv, chart
    stem = output.parent / output.name
    text, table, picture = (stem.with_name(stem.name + s) for s in (".txt", ".csv", ".svg"))
    return text, csv or table, chart or picture


def _check(paths: list[Path], log: Path, force: bool) -> None:
    """Refuse before anything is written."""
    for number, path in enumerate(paths):
        if path.resolve() == log.resolve() or path in paths[:number]:
            raise ShowError(f"{path} is named twice", "give every file a name of its own")
        if path.exists() and not force:
            raise DeviceError(f"{path} exists", "name another, or write over it with --force")


def _read(log: Path) -> Evening:
    """An evening from its journal, up to where it can be read."""
    from beamctl.host.journal import read_journal
    from beamctl.report.gather import gather, heading

    _, kept = read_journal(log)
    try:
        data = log.read_bytes()
        head = heading(data.partition(b"\n")[0])
    except (ValueError, LookupError, TypeError, AttributeError) as error:
        raise ShowError(
            f"{log}: its first line tells too little", "name a journal of `beamctl host`"
        ) from error
    records, problems = [], []
    try:
        for record in kept:
            records.append(record)
    except ShowError as error:
        problems.append(f"{error.what}: all after that is NOT in this report")
    if not data.endswith(b"\n"):
        problems.append("it ends in the middle of a line; all before that is here")
    return gather(head, records, problems)


def _write(path: Path, data: bytes, force: bool) -> None:
    try:
        with path.open("wb" if force else "xb") as file:
            file.write(data)
    except OSError as error:
        raise DeviceError(f"{path}: {error.strerror}", "name another place with -o") from error
