"""The door for desks: a local socket, and one carrying thread per connection."""

from __future__ import annotations

import json
import queue
import threading
from collections.abc import Callable
from multiprocessing.connection import Client, Connection, Listener
from pathlib import Path
from typing import Any

from beamctl.errors import DeviceError

LONGEST_MESSAGE = 1_000_000  # bytes: an edit may touch every cue of a long sheet

Answer = Callable[[bytes], None]
Post = Callable[[dict[str, Any], Answer], None]


class Door:
    """Listens at `address` and posts every message with the way to answer it."""

    def __init__(self, address: str, folder: Path, post: Post) -> None:
        _refuse_second(address, folder)
        self._post = post
        self._listener = Listener(address)
        threading.Thread(target=self._accept, daemon=True).start()

    def close(self) -> None:
        """Let nobody in any more."""
        self._listener.close()

    def _accept(self) -> None:
        while True:
            try:
                connection = self._listener.accept()
            except OSError:
                return
            threading.Thread(target=self._serve, args=(connection,), daemon=True).start()

    def _serve(self, connection: Connection) -> None:
        """One desk: pass its messages on one at a time, and its answers back."""
        answers: queue.SimpleQueue[bytes] = queue.SimpleQueue()
        try:
            while True:
                self._post(json.loads(connection.recv_bytes(LONGEST_MESSAGE)), answers.put)
                connection.send_bytes(answers.get())
        except (EOFError, OSError, ValueError, RecursionError):
            connection.close()


def _refuse_second(address: str, folder: Path) -> None:
    """DeviceError when a host runs this show already; a socket left by a dead one is removed."""
    try:
        Client(address).close()
    except (FileNotFoundError, ConnectionError):
        Path(address).unlink(missing_ok=True)
        return
    raise DeviceError(f"a host runs {folder} already", f"`beamctl desk {folder}` joins it")
