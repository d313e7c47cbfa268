"""A process of the host's own: its start, the line to it, and somebody who hears what it says."""

from __future__ import annotations

import json
import queue
import threading
from collections.abc import Callable
from contextlib import AbstractContextManager, nullcontext
from multiprocessing import get_context
from multiprocessing.connection import Connection
from typing import Any

Post = Callable[[dict[str, Any]], None]


def start_child(
    target: Callable[[Connection, Any], None],
    task: Any,
    generation: int,
    post: Post,
    scheduling: AbstractContextManager[None] | None = None,
) -> tuple[Any, Connection]:
    """Run `target(line, task)` in a fresh interpreter; returns the process and our end of its line.

    What it says is posted with its generation, and that it is gone at last. `scheduling` is for
    its start alone: the thread that hears it is scheduled as the caller is.
    """
    context = get_context("spawn")  # no threads or locks inherited
    ours, theirs = context.Pipe()
    process = context.Process(target=target, args=(theirs, task), daemon=True)
    with scheduling or nullcontext():
        process.start()
    theirs.close()
    threading.Thread(target=_hear, args=(ours, generation, post), daemon=True).start()
    return process, ours


def _hear(line: Connection, generation: int, post: Post) -> None:
    try:
        while True:
            post(json.loads(line.recv_bytes()) | {"generation": generation})
    except (EOFError, OSError):
        post({"gone": True, "generation": generation})


def take_waiting(line: Connection, inbox: queue.SimpleQueue[dict[str, Any]]) -> None:
    """In the child, before it listens: put what waits on its line into `inbox`.

    EOFError when it is not wanted any more: it was told to stop, or the host is gone.
    """
    while line.poll():
        message = json.loads(line.recv_bytes())
        if message.get("stop"):
            raise EOFError
        inbox.put(message)
