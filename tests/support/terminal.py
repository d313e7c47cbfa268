"""A terminal for the desk: a tmux server of its own with one shell in it."""

from __future__ import annotations

import itertools
import os
import shlex
import subprocess
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from support.running import COMMAND, STARTS_S, need, wait_for

from beamctl.desk.rows import glyphs

MODES = (
    "#{cursor_flag} #{alternate_on} #{keypad_flag} #{insert_flag} #{wrap_flag} #{mouse_any_flag}"
)
GUARD_S = 0.75  # Enter sooner than 0.7 s after Enter is a held key


class Terminal:
    """One pane, 120 by 40, that runs a shell."""

    def __init__(self, server: str, folder: Path) -> None:
        self._server = server
        self._folder = folder
        self._entered_s = 0.0
        self._runs = itertools.count(1)

    def run(self, *command: str | Path, **env: str) -> Path:
        """Type a command to the shell; its exit code will be in the file that is returned."""
        code = self._folder / f"code-{next(self._runs)}"
        named = [f"{name}={value}" for name, value in env.items()]
        line = shlex.join(["env", *named, *map(str, command)])
        self.type(f"{line}; echo $? > {shlex.quote(str(code))}")
        self.key("Enter")
        return code

    def desk(self, show: Path, journal: Path, **env: str) -> Path:
        """Start a desk on the null sink, read its caution, and wait until it could be armed."""
        code = self.run(*COMMAND, "desk", show, "--journal", journal, **env)
        read = "I have read this"
        wait_for(lambda: read in self.screen() or code.exists(), "the caution", STARTS_S)
        self.enter()
        wait_for(lambda: read not in self.screen(), "the caution to go")
        wait_for(lambda: self.reads("SHUT") or code.exists(), "the desk to show SHUT", STARTS_S)
        wait_for(lambda: self.reads("CLEAR") or code.exists(), "a guard that sees", STARTS_S)
        assert not code.exists(), self.screen()
        return code

    def modes(self) -> str:
        """What programs may change of a terminal: its line discipline, and what tmux keeps."""
        file = self._folder / "stty"
        wait_for(self.run("sh", "-c", f"stty -a > {shlex.quote(str(file))}").exists, "stty")
        return f"{self._tmux('display', '-p', MODES)}{file.read_text()}"

    def screen(self) -> str:
        """The text on the screen."""
        return self._tmux("capture-pane", "-p")

    def reads(self, word: str) -> bool:
        """True when the desk shows `word` in its big letters, of blocks or of ASCII."""
        screen = self.screen().replace("\N{FULL BLOCK}", "#").splitlines()
        letters = [row.rstrip() for row in glyphs.draw(word, "#")]
        for top, line in enumerate(screen[: -glyphs.ROWS]):
            at = line.find(letters[0])
            while at >= 0:
                rows = screen[top : top + glyphs.ROWS]
                if all(r[at:].startswith(w) for r, w in zip(rows, letters, strict=True)):
                    return True
                at = line.find(letters[0], at + 1)
        return False

    def type(self, text: str) -> None:
        """Send a text as it is."""
        self._tmux("send-keys", "-l", text)

    def key(self, name: str) -> None:
        """Press one key."""
        self._tmux("send-keys", name)

    def enter(self) -> None:
        """Press Enter as one who has let go of it before."""
        time.sleep(max(0.0, self._entered_s + GUARD_S - time.monotonic()))
        self.key("Enter")
        self._entered_s = time.monotonic()

    def _tmux(self, *arguments: str) -> str:
        return subprocess.run(
            ["tmux", "-S", self._server, *arguments],
            check=True,
            capture_output=True,
            text=True,
            timeout=20.0,
        ).stdout


@contextmanager
def terminal(folder: Path) -> Iterator[Terminal]:
    """A terminal whose server is gone when the block is left."""
    need("tmux")
    server = str(Path(os.environ["BEAMCTL_RUNTIME"]) / "tmux")
    start = ["new-session", "-d", "-x", "120", "-y", "40", "sh"]
    subprocess.run(["tmux", "-S", server, "-f", os.devnull, *start], check=True, timeout=20.0)
    try:
        yield Terminal(server, folder)
    finally:
        subprocess.run(["tmux", "-S", server, "kill-server"], check=False, timeout=20.0)
