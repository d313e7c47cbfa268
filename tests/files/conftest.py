"""A copy of the shipped show to spoil."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

SCENE = Path(__file__).parents[2] / "scenes" / "night-tram"


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A writable copy of the show that ships."""
    return Path(shutil.copytree(SCENE, tmp_path / "show"))
