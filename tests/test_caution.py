"""The caution has one source: the manual repeats it word for word."""

from __future__ import annotations

from pathlib import Path

from beamctl.caution import CAUTION_TEXT

ROOT = Path(__file__).parents[1]


def test_the_manual_shows_the_caution_as_the_desk_does() -> None:
    quoted = [
        line[2:] for line in (ROOT / "README.md").read_text().splitlines() if line[:2] == "> "
    ]
    assert quoted == CAUTION_TEXT.splitlines()


def test_no_page_calls_anything_safe() -> None:
    """Every exposure figure is a cap; the word for a promise is not ours."""
    for name in ("README.md", "beamctl/caution.py", "beamctl/guard/watch.py"):
        assert "safe" not in (ROOT / name).read_text().lower(), name
