"""Single keys from a terminal, one of which silences: read by a thread that does nothing else.

So neither a screen that takes no more text nor a slow command stands between the key and the hush.
"""

from __future__ import annotations

import contextlib
import os
import queue
import re
import select
import signal
import threading
import time
from collections.abc import Callable
from types import TracebackType
from typing import Any

# one key: a function key's sequence, or a byte
KEY = re.compile(rb"\x1b\[[0-9;]*[A-Za-z~]|\x1bO.|[\s\S]")
UNFINISHED = re.compile(rb"\x1b(\[[0-9;]*|O)?\Z")
UNFINISHED_S = 0.05  # a sequence comes in one piece; what comes later is another key
INSERT = re.compile(
    rb"\x1b\[2(;\d+)?~|\x1bOp|\x1b\[24~|\x03"
)  # keypad 0 is Insert without Num Lock
PLAIN = (b"0", b"q", b"Q")
SIGNALS = ("SIGINT", "SIGTERM", "SIGHUP")


class Silenced(Exception):
    """The operator silenced it, or the terminal went away."""


class Keys:
    """Keys as they are pressed on the terminal `fd`, between enter and exit.

    `silence` is called at once, on the reading thread, for 0, q, Ctrl-C, Insert and F12, a closed
    terminal and a signal to end; all `next` calls then raise Silenced. While a `line` is typed,
    0 and q are text.
    """

    def __init__(self, fd: int, silence: Callable[[], object]) -> None:
        self._fd, self._silence = fd, silence
        self._keys: queue.SimpleQueue[str] = queue.SimpleQueue()
        self._typing = False
        self._silenced = threading.Event()
        self._wake_read, self._wake_write = os.pipe()
        self._thread = threading.Thread(target=self._read, name="keys", daemon=True)
        self._before: list[Any] = []
        self._handlers: dict[int, Any] = {}

    def __enter__(self) -> Keys:
        import termios

        self._before = termios.tcgetattr(self._fd)
        changed = termios.tcgetattr(self._fd)
        changed[0] &= ~(termios.IXON | termios.ISTRIP)
        changed[3] &= ~(termios.ICANON | termios.ECHO | termios.ISIG | termios.IEXTEN)
        changed[6][termios.VMIN], changed[6][termios.VTIME] = 1, 0
        termios.tcsetattr(self._fd, termios.TCSAFLUSH, changed)
        if threading.current_thread() is threading.main_thread():
            for name in SIGNALS:
                number = getattr(signal, name)
                self._handlers[number] = signal.signal(number, lambda *_: self._end())
        self._thread.start()
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        import termios

        os.write(self._wake_write, b".")
        self._thread.join()
        for number, handler in self._handlers.items():
            signal.signal(number, handler)
        with contextlib.suppress(termios.error):  # the terminal is gone
            termios.tcsetattr(self._fd, termios.TCSADRAIN, self._before)
        os.close(self._wake_read)
        os.close(self._wake_write)

    def next(self, timeout_s: float) -> str | None:
        """The next key, None when none came in time; Silenced once it is."""
        with contextlib.suppress(queue.Empty):
            key = self._keys.get(timeout=max(0.0, timeout_s))
            if not self._silenced.is_set():
                return key
        if self._silenced.is_set():
            raise Silenced
        return None

    def line(self, echo: Callable[[str], object]) -> str:
        """A line of text, shown as it is typed; Silenced once it is. Nothing may sound then."""
        self._typing = True
        text = ""
        try:
            while (key := self.next(0.5)) not in ("\n", "\r"):
                if key in ("\x7f", "\b") and text:
                    text = text[:-1]
                    echo("\b \b")
                elif key is not None and key.isprintable() and len(key) == 1:
                    text += key
                    echo(key)
            return text.strip()
        finally:
            self._typing = False

    def _end(self) -> None:
        self._silence()
        self._silenced.set()
        self._keys.put("")  # wakes whoever waits

    def _read(self) -> None:
        held, held_s = b"", 0.0
        while True:
            ready, _, _ = select.select([self._fd, self._wake_read], [], [])
            if self._wake_read in ready:
                return
            try:
                data = os.read(self._fd, 256)
            except OSError:
                data = b""
            if not data:
                self._end()
                return
            if time.monotonic() - held_s > UNFINISHED_S:
                held = b""
            data = held + data
            tail = UNFINISHED.search(data)
            held, held_s = (tail[0], time.monotonic()) if tail else (b"", 0.0)
            for key in KEY.findall(data[: len(data) - len(held)]):
                if INSERT.fullmatch(key) or (key in PLAIN and not self._typing):
                    self._end()
                elif len(key) == 1:
                    self._keys.put(key.decode("ascii", "replace"))
