"""A new show for `beamctl desk`: four questions, and a folder that works.

It is tried out in a folder that is thrown away; the real one is written when all of it is known.
"""

from __future__ import annotations

import io
import math
import os
import re
import sys
from collections.abc import Callable
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TypeVar

import click
import soundfile as sf

from beamctl.commands.options import Bar
from beamctl.errors import DeviceError, ShowError
from beamctl.files import newshow
from beamctl.files.newshow import Answers, Question, texts
from beamctl.files.reader import load_show, read_show
from beamctl.files.saving import write
from beamctl.files.sounds import SOUNDS

LOUDEST_DB = -24.0  # trim of the one cue, or less where a cap asks for it
LOWEST_DB = -90.0
LEFT_DB = 6.0  # under the cap, at the seat that is nearest to it
T = TypeVar("T")


def is_new(folder: Path) -> bool:
    """True for a folder that is missing or empty."""
    try:
        return next(folder.iterdir(), None) is None
    except FileNotFoundError:
        return True
    except OSError:
        return False


def begin_show(folder: Path) -> None:
    """Ask four questions and write a show; ShowError where there is nobody to ask.

    DeviceError when the disk refuses. Whoever breaks it off leaves nothing behind.
    """
    if not sys.stdin.isatty():
        what = "an empty folder" if folder.exists() else "there is no such folder"
        do = f"in a terminal, `beamctl desk {folder}` asks four questions and writes a show there"
        raise ShowError(f"{folder}: {what}", do)
    click.echo(f"A new show in {folder}. Enter takes the answer in brackets.")
    try:
        with TemporaryDirectory(prefix="beamctl-") as scratch:
            _write(Path(scratch), {})
            answers = _ask(Path(scratch), folder.absolute().name)
            trim_db = _trim_db(Path(scratch), answers)
    except click.Abort:
        click.echo("\nbeamctl: nothing was written", err=True)
        sys.exit(1)
    _write(folder, texts(answers, trim_db))


def _ask(scratch: Path, name: str) -> Answers:
    """The answers to all questions; the last two again until the panel can point at the seats."""
    named = re.sub("[-_]+", " ", name).strip().capitalize() or "New show"
    title = _prompt("Title", named, newshow.read_title)
    panel = _figures(newshow.PANEL)
    while True:
        answers = Answers(title, panel, _figures(newshow.HANG), _figures(newshow.SEATS))
        problems = read_show(scratch, texts(answers, LOUDEST_DB))[1]
        wrong = next((problem.what for problem in problems if problem.severity == "error"), "")
        if not wrong:
            return answers
        click.echo(f"Error: the panel cannot point at the seats: {wrong}")


def _figures(question: Question) -> tuple[float, ...]:
    return _prompt(question.asks, question.example, question.read)


def _prompt(asks: str, default: str, read: Callable[[str], T]) -> T:
    """One answer; what is wrong with it is said at once, and it is asked for again."""

    def checked(text: str) -> T:
        try:
            return read(text)
        except ValueError as error:
            raise click.UsageError(str(error)) from None

    answer: T = click.prompt(asks, default=default, value_proc=checked)
    return answer


def _trim_db(scratch: Path, answers: Answers) -> float:
    """The trim that leaves every seat well under its cap."""
    from beamctl.host.barring import cue_levels

    trim_db = LOUDEST_DB
    with Bar(True) as progress:
        while trim_db > LOWEST_DB:
            show = load_show(scratch, texts(answers, trim_db))
            levels = cue_levels(show, progress).values()
            left_db = min((level.margin_db for level in levels), default=LEFT_DB)
            if left_db >= LEFT_DB:
                break
            trim_db = max(LOWEST_DB, float(math.floor(trim_db + left_db - LEFT_DB)))
    return trim_db


def _write(folder: Path, files: dict[str, str]) -> None:
    """The sound and the texts into a folder, which is made."""
    sound = io.BytesIO()
    sf.write(sound, newshow.knock(), newshow.RATE_HZ, format="FLAC", subtype="PCM_16")
    try:
        (folder / SOUNDS).mkdir(parents=True, exist_ok=True)
    except OSError as error:
        reason = os.strerror(error.errno or 0).lower()
        raise DeviceError(f"{folder} cannot be written: {reason}") from error
    whole = {folder / name: text.encode() for name, text in files.items()}
    write({folder / SOUNDS / newshow.SOUND: sound.getvalue(), **whole})
