"""The user's own keys: `keys.toml`, action = a key or a list of keys."""

from __future__ import annotations

import tomllib
from pathlib import Path

from beamctl.errors import ShowError

DO = 'write lines such as: go = ["enter", "f9"]; `beamctl keys` lists actions and keys'


def read_keys(path: Path) -> dict[str, tuple[str, ...]]:
    """Action → keys as the file binds them, none when there is no file; ShowError otherwise."""
    try:
        table = tomllib.loads(path.read_text(encoding="utf-8"))
    except FileNotFoundError:
        return {}
    except OSError as error:
        raise ShowError(f"{path} cannot be read: {error.strerror}", "or delete it") from error
    except ValueError as error:  # of TOML, and of text that is not UTF-8
        raise ShowError(f"{path}: {error}", DO) from error
    keys = {name: [value] if isinstance(value, str) else value for name, value in table.items()}
    for name, value in keys.items():
        if not (isinstance(value, list) and all(isinstance(key, str) and key for key in value)):
            raise ShowError(f"{path}: {name} is no key and no list of keys", DO)
    return {name: tuple(value) for name, value in keys.items()}
