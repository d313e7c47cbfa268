"""The same player and renderer without a clock: `render` and `replay`."""

from __future__ import annotations

import hashlib
from collections import deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import Future, ThreadPoolExecutor
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from beamctl.engine.renderer import Renderer
from beamctl.errors import ShowError
from beamctl.files.reader import load_show
from beamctl.host.journal import read_journal
from beamctl.host.loading import digests, prepare_sounds
from beamctl.host.warming import warm
from beamctl.show.events import Confirm, Go, Ready
from beamctl.show.player import Player
from beamctl.show.records import Record
from beamctl.show.show import Show

Progress = Callable[[str, int, int], None]
Write = Callable[[NDArray[np.float32]], None]

BLOCK = 4096
BLOCKS_BEHIND = 8


def play_through(show: Show, gos: Iterable[tuple[int, str]], until: int) -> Iterator[Record]:
    """Records of a show with GOs (sample, cue) given in advance, armed at sample 0.

    The output is open from the first sample on; ShowError when a GO is refused.
    """
    player = Player(show)
    yield from player.sink("sink-open", 0)
    yield from player.handle(Ready("render"), 0)
    yield from player.handle(Confirm("render"), 0)
    for sample, ref in sorted(gos):
        yield from player.advance(sample)
        for record in player.handle(Go("render", ref), sample):
            if record.what == "refused":
                raise ShowError(
                    f"--go {ref}@{sample}smp refused, {record.args['reason']}",
                    str(record.args["text"]),
                )
            yield record
    yield from player.advance(until)


def render(
    show: Show, records: Iterable[Record], samples: int, write: Write, progress: Progress
) -> str:
    """Render `samples` of every channel through `write`; returns the SHA-256 of all of it."""
    sounds = prepare_sounds(show, progress)
    progress("compiled code", 0, 1)
    warm(show)
    renderer = Renderer(show, sounds)
    for record in records:
        renderer.put(record)
    digest = hashlib.sha256()

    def keep(block: NDArray[np.float32]) -> None:
        digest.update(block.data)
        write(block)

    # one thread renders while the other writes, a few blocks behind
    with ThreadPoolExecutor(max_workers=1) as keeper:
        waiting: deque[Future[None]] = deque()
        while renderer.position < samples:
            block = np.zeros((min(BLOCK, samples - renderer.position), show.channels), np.float32)
            renderer.render(block)
            waiting.append(keeper.submit(keep, block))
            if len(waiting) > BLOCKS_BEHIND:
                waiting.popleft().result()
            progress("rendering", renderer.position, samples)
        for block_kept in waiting:
            block_kept.result()
    return digest.hexdigest()


def left(samples: int, digest: str) -> Record:
    """The record that closes a journal."""
    return Record(samples, "left", args={"sha256": digest})


def recall(path: Path) -> tuple[Show, list[Record]]:
    """The show that a journal was made from, and its records up to `left`.

    ShowError when the show has changed since, or the journal was cut before its end.
    """
    header, kept = read_journal(path)
    show = load_show(Path(header.folder))
    now = digests(show)
    changed = sorted(n for n in now | header.digests if now.get(n) != header.digests.get(n))
    if changed:
        raise ShowError(
            f"{header.folder}: {', '.join(changed)} changed since {path.name}",
            "put the files back as they were to hear what was sent",
        )
    records = list(kept)
    if not records or records[-1].what != "left":
        raise ShowError(f"{path}: ends before its `left` line", "the host was cut off")
    return show, records
