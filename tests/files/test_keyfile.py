"""The user's own keys: what is read, what is refused, and that the desk is given them."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from click.testing import CliRunner

from beamctl.cli import main
from beamctl.commands.keys import key_file, user_keymap
from beamctl.errors import ShowError
from beamctl.files.keyfile import read_keys


@pytest.fixture
def own(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The key file of a user who has none yet."""
    for name in ("HOME", "XDG_CONFIG_HOME", "APPDATA", "LOCALAPPDATA"):
        monkeypatch.setenv(name, str(tmp_path))
    key_file().parent.mkdir(parents=True, exist_ok=True)
    return key_file()


def test_without_a_file_the_keys_are_the_registry_s(own: Path) -> None:
    assert read_keys(own) == {}
    assert user_keymap().name_of("enter") == "go"


def test_a_key_or_a_list_of_keys(own: Path) -> None:
    own.write_text('go = "ctrl+g"\nhold = ["f10", "ctrl+y"]\n', encoding="utf-8")
    assert read_keys(own) == {"go": ("ctrl+g",), "hold": ("f10", "ctrl+y")}
    assert user_keymap().name_of("ctrl+g") == "go"
    assert user_keymap().name_of("enter") == ""


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("go = 1", "go is no key"),
        ("go = [1]", "go is no key"),
        ('go = [""]', "go is no key"),
        ("go = ", "Invalid value"),
        ("[go]\nkey = 'j'", "go is no key"),
    ],
)
def test_what_is_no_key_file(own: Path, text: str, what: str) -> None:
    own.write_text(text, encoding="utf-8")
    with pytest.raises(ShowError, match=what):
        read_keys(own)


@pytest.mark.parametrize(
    ("text", "what"), [('fly = "j"', "fly: no such action"), ('go = "f12"', "f12 is bound to hush")]
)
def test_what_will_not_do(own: Path, text: str, what: str) -> None:
    own.write_text(text, encoding="utf-8")
    result = CliRunner().invoke(main, ["keys"])
    assert result.exit_code == 2
    assert what in result.output
    assert str(own) in result.output


def test_the_list_is_told_and_can_be_put_into_the_file(own: Path) -> None:
    told = CliRunner().invoke(main, ["keys"]).output
    assert str(own) in told.splitlines()[0]
    lines = [line for line in told.splitlines() if not line.startswith(("    ", "#"))]
    own.write_text("\n".join(lines), encoding="utf-8")
    rows = json.loads(CliRunner().invoke(main, ["keys", "--json"]).output)
    assert len(rows) == len(lines)
    assert next(row for row in rows if row["action"] == "go")["keys"][0] == "enter"
