"""The same player, renderer and final stage without a clock: `render` and `replay`."""

from __future__ import annotations

import hashlib
from collections import deque
from collections.abc import Callable, Iterable, Iterator, Mapping
from concurrent.futures import Future, ThreadPoolExecutor
from dataclasses import dataclass, field
from itertools import groupby
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from beamctl.engine.chain import Chain
from beamctl.errors import ShowError
from beamctl.host.journal import Played, read_journal
from beamctl.host.loading import Hashes, Sounds, prepare_sounds
from beamctl.host.stepped import Stepped, ring_n
from beamctl.host.warming import warm
from beamctl.show.events import Confirm, Go, Ready, Vouch
from beamctl.show.player import Player
from beamctl.show.records import Record
from beamctl.show.show import Show

Progress = Callable[[str, int, int], None]
Write = Callable[[NDArray[np.float32]], None]

BLOCK = 4096
BLOCKS_BEHIND = 8


def play_through(
    show: Show,
    gos: Iterable[tuple[int, str]],
    until: int,
    barred: Mapping[str, str] | None = None,
    vouched: str = "",
) -> Iterator[Record]:
    """Records of a show with GOs (sample, cue) given in advance, armed at sample 0.

    The output is open from the first sample on; ShowError when a GO is refused: of a cue that is
    `barred`, or in a house without seats that nobody has `vouched` for.
    """
    player = Player(show, barred=barred or {})
    yield from player.sink("sink-open", 0)
    if vouched:
        yield from player.handle(Vouch("render", vouched), 0)
    yield from player.handle(Ready("render"), 0)
    for record in player.handle(Confirm("render"), 0):
        if record.what == "refused":
            raise ShowError(str(record.args["text"]), "name who answers for it: --vouch NAME")
        yield record
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
    show: Show,
    records: Iterable[Record],
    samples: int,
    write: Write,
    progress: Progress,
    guard: Stepped | None = None,
) -> str:
    """Render `samples` of every channel through `write`; returns the SHA-256 of all of it.

    With a guard in step the file holds what would have left, without one what was asked for.
    """
    sounds = prepare_sounds(show, progress)
    progress("compiled code", 0, 1)
    warm(show)
    stream = Stream(show, 0, list(records))
    return _play(sounds, stream, samples, write, progress, guard=guard)


@dataclass(slots=True)
class Stream:
    """What one engine sent: its show, its first frame, its records, and how it ended."""

    show: Show
    start: int
    records: list[Record] = field(default_factory=list)
    left: Record | None = None


@dataclass(frozen=True, slots=True)
class Outcome:
    """A stream rendered again; `same` is None for one that was cut off without a digest."""

    start: int
    samples: int
    digest: str
    same: bool | None


def recall(path: Path) -> list[Stream]:
    """What each engine of a journal sent; at least one.

    ShowError when a sound is not what it was, or a show of an older journal, which does not hold
    its texts; and when no sink was ever open.
    """
    played, kept = read_journal(path)
    show: Show | None = None  # read when a stream is played from it
    streams: list[Stream] = []
    for record in kept:
        if record.what == "texts":
            played, show = Played.of(record.args, played.document.folder), None
        elif record.what == "stream":
            show = show or _show_of(played, path)
            streams.append(Stream(show, record.sample))
        elif record.what == "left" and streams:
            streams[-1].left = record
        elif streams:
            streams[-1].records.append(record)
    if not streams:
        raise ShowError(f"{path}: no sink was ever open", "there is nothing to render")
    return streams


def replay(streams: Iterable[Stream], write: Write, progress: Progress) -> list[Outcome]:
    """Render streams again, and compare each with what left then.

    For a device, which cannot count what it played, the samples that entered the ring are compared.
    """
    outcomes = []
    for _, found in groupby(streams, key=lambda stream: id(stream.show)):
        played = list(found)
        show = played[0].show
        sounds = prepare_sounds(show, progress)
        warm(show)
        outcomes += [_again(sounds, stream, write, progress) for stream in played]
    return outcomes


def _show_of(played: Played, path: Path) -> Show:
    show = played.document.load(played.air)
    now, then = Hashes().of(show), played.digests
    if changed := sorted(name for name in now | then if now.get(name) != then.get(name)):
        raise ShowError(
            f"{show.folder}: {', '.join(changed)} changed since {path.name}",
            "put the files back as they were to hear what was sent",
        )
    return show


def _again(sounds: Sounds, stream: Stream, write: Write, progress: Progress) -> Outcome:
    if stream.left is None:
        last = max((r.sample for r in stream.records), default=stream.start)
        digest = _play(sounds, stream, last, write, progress)
        return Outcome(stream.start, last - stream.start, digest, None)
    args = stream.left.args
    if args["left"] is not None:
        digest = _play(sounds, stream, int(args["read"]), write, progress)
        return Outcome(
            stream.start, int(args["read"]) - stream.start, digest, digest == args["left"]
        )
    entered = Entered(int(args["written"]))
    _play(sounds, stream, int(args["written"]), write, progress, entered.take)
    digest = entered.hash.hexdigest()
    samples = int(args["written"]) - stream.start
    return Outcome(stream.start, samples, digest, digest == args["entered"])


class Entered:
    """Hash of what enters the ring, up to a frame."""

    def __init__(self, until: int) -> None:
        self.hash = hashlib.sha256()
        self._until = until

    def take(self, first: int, block: NDArray[np.float32]) -> None:
        """Frames from `first` on."""
        self.hash.update(block[: max(0, self._until - first)].data)


def _play(
    sounds: Sounds,
    stream: Stream,
    until: int,
    write: Write,
    progress: Progress,
    tap: Callable[[int, NDArray[np.float32]], None] | None = None,
    guard: Stepped | None = None,
) -> str:
    """Render a stream up to frame `until`; one thread renders, the other writes a little behind."""
    show = stream.show
    if guard is None:
        chain = Chain(show, sounds, stream.start, tap=tap)
    else:
        chain = Chain(show, sounds, stream.start, ring_n(show), guard.tap)
        guard.watch_over(chain)
    for record in stream.records:
        chain.put(record)
    digest = hashlib.sha256()

    def keep(block: NDArray[np.float32]) -> None:
        digest.update(block.data)
        write(block)

    with ThreadPoolExecutor(max_workers=1) as keeper:
        waiting: deque[Future[None]] = deque()
        while chain.position < until:
            block = np.zeros((min(BLOCK, until - chain.position), show.channels), np.float32)
            chain.render(block)
            if guard is not None:
                guard.settle()
            waiting.append(keeper.submit(keep, block))
            if len(waiting) > BLOCKS_BEHIND:
                waiting.popleft().result()
            progress("rendering", chain.position - stream.start, until - stream.start)
        for written in waiting:
            written.result()
    return digest.hexdigest()


def left(samples: int, digest: str) -> Record:
    """The record that closes the journal of a render."""
    args = {"entered": "", "left": digest, "written": samples, "read": samples}
    return Record(samples, "left", args=args)
