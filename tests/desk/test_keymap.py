"""Which key does what: the registry's keys, the user's own, and what is wrong with them."""

from __future__ import annotations

from itertools import combinations

import pytest

from beamctl.actions import ACTIONS
from beamctl.desk.keymap import DEFAULT, RUNS, SURE_HUSH, Keymap, complaints, printed
from beamctl.desk.pages.all import PAGES
from beamctl.desk.registry import EVERYTHING
from beamctl.desk.verbs.common import SCREENS, SWITCH_MODE

EDITS = [name for name in SCREENS if name not in RUNS]


@pytest.mark.parametrize("screen", SCREENS)
@pytest.mark.parametrize("action", ACTIONS.values(), ids=ACTIONS)
def test_in_show_every_key_of_the_registry_works_on_every_screen(action, screen: str) -> None:
    keys = set(action.keys) - (set() if screen in RUNS else {"delete"})
    assert all(DEFAULT.name_of(key, screen) == action.name for key in keys)


@pytest.mark.parametrize("screen", EDITS)
def test_delete_which_takes_away_while_writing_never_ends_a_sound(screen: str) -> None:
    assert DEFAULT.name_of("delete", screen) == ""
    assert DEFAULT.name_of("full_stop", screen) == "tail"


@pytest.mark.parametrize("screen", SCREENS)
def test_in_show_the_screens_have_no_verbs_of_their_own(screen: str) -> None:
    own = [action for action in EVERYTHING.values() if screen in action.on]
    for key in (key for action in own for key in action.keys):
        name = DEFAULT.name_of(key, screen)
        assert not name or not EVERYTHING[name].on
    assert DEFAULT.name_of(SWITCH_MODE.keys[0], screen) == ""


@pytest.mark.parametrize("screen", EDITS)
def test_while_writing_enter_is_no_go_on_the_screens_that_edit(screen: str) -> None:
    assert DEFAULT.name_of("enter", screen, writing=True) != "go"
    assert DEFAULT.name_of("f9", screen, writing=True) == "go"
    assert DEFAULT.name_of("0", screen, writing=True) == "hush"


@pytest.mark.parametrize("screen", [*SCREENS, "help", "key-test", "caution", ""])
@pytest.mark.parametrize("writing", [False, True])
def test_hush_and_the_screens_can_be_reached_from_everywhere(screen: str, writing: bool) -> None:
    for name in ("hush", "help", *SCREENS):
        assert all(DEFAULT.name_of(k, screen, writing) == name for k in EVERYTHING[name].keys)


def test_no_two_actions_share_a_key_where_both_work() -> None:
    for screen in SCREENS:
        here = [a for a in EVERYTHING.values() if screen in a.on]
        for one, other in combinations(here, 2):
            assert set(one.keys).isdisjoint(other.keys), (screen, one.name, other.name)
    everywhere = [a for a in EVERYTHING.values() if not a.on]
    for one, other in combinations(everywhere, 2):
        assert set(one.keys).isdisjoint(other.keys), (one.name, other.name)


def test_every_name_is_there_once_and_every_screen_has_a_page() -> None:
    from beamctl.desk.verbs import bench, common, sheet, tables

    verbs = [*common.VERBS, *common.HISTORY, *sheet.VERBS, *bench.VERBS, *tables.VERBS]
    assert len(EVERYTHING) == len(ACTIONS) + len(verbs)
    assert set(SCREENS) | {"help", "key-test"} <= set(PAGES)
    assert all(set(action.on) <= set(PAGES) for action in verbs)
    assert all(action.help.endswith(".") and action.title for action in EVERYTHING.values())


@pytest.mark.parametrize("key", ["space", "escape", "a", "tab", "ctrl+z", "ctrl+p", "ctrl+j", "up"])
def test_other_keys_ask_nothing(key: str) -> None:
    assert DEFAULT.name_of(key) == ""


@pytest.mark.parametrize(
    ("key", "name"),
    [
        ("add", "next"),
        ("subtract", "back"),
        ("multiply", "ready"),
        ("decimal", "tail"),
        ("divide", "find"),
    ],
)
def test_the_number_pad_by_its_extended_names(key: str, name: str) -> None:
    assert DEFAULT.name_of(key) == name


def test_the_user_s_own_keys_take_the_place_of_the_registry_s() -> None:
    keymap = Keymap({"go": ("j",)})
    assert keymap.name_of("j") == "go"
    assert keymap.name_of("enter") == ""
    assert ("J", "Go") not in keymap.legend("desk", False)
    assert ("j", "Go") in keymap.legend("desk", False)
    assert complaints({"go": ("j",)}) == []


def test_hush_cannot_be_bound_away() -> None:
    keymap = Keymap({"hush": ("h",)})
    assert all(keymap.name_of(key) == "hush" for key in ("h", *SURE_HUSH))


@pytest.mark.parametrize(
    ("own", "what"),
    [
        ({"fly": ("x",)}, "fly: no such action"),
        ({"go": ("f12",)}, "go: f12 is bound to hush as well"),
        ({"next": ("j",), "back": ("j",)}, "next: j is bound to back as well"),
    ],
)
def test_what_is_wrong_with_the_user_s_keys(own, what: str) -> None:
    assert what in complaints(own)


def test_the_registry_s_own_keys_are_all_right() -> None:
    assert complaints({name: action.keys for name, action in EVERYTHING.items()}) == []


def test_keys_as_they_are_printed() -> None:
    assert printed(("enter", "kp_enter", "ctrl+q", "shift+f8", "slash", "a")) == (
        "Enter/^Q/Shift F8///a"
    )


@pytest.mark.parametrize("screen", SCREENS)
@pytest.mark.parametrize("writing", [False, True])
def test_the_legend_tells_screens_in_one_word_and_nothing_without_a_key(screen, writing) -> None:
    legend = DEFAULT.legend(screen, writing)
    assert ("F1..F8", "Screens") in legend
    assert all(keys and title for keys, title in legend)
