"""The tables of states: every entry happens in the player, and the manual shows them."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import get_args

import pytest
from support.playing import LATER, at, cue, loop, one_shot, player
from support.rigs import make_show

from beamctl.show import events
from beamctl.show.player import Player
from beamctl.show.states import CUE, MODE, OUTPUT, CueState, Mode, Output

MANUAL = Path(__file__).parents[2] / "DEVELOPERS.md"
OUTPUTS: tuple[Output, ...] = get_args(Output)
CUE_STATES: tuple[CueState, ...] = get_args(CueState)
MODES: tuple[Mode, ...] = get_args(Mode)


# -- the output ---------------------------------------------------------------------------------


def arm(p: Player) -> bool:
    """Both acts; of use from SHUT only, from HUSHED they restore."""
    if p.output == "HUSHED":
        return False
    asked = [*p.handle(events.Ready(), 0), *p.handle(events.Confirm(), 0)]
    return all(r.what != "refused" for r in asked)


def ask(event: events.Event) -> Callable[[Player], bool]:
    return lambda p: all(r.what != "refused" for r in p.handle(event, 0))


def sink(event: str) -> Callable[[Player], bool]:
    return lambda p: bool(p.sink(event, 0))


def trip(event: str) -> Callable[[Player], bool]:
    return lambda p: bool(p.trip("a test", 0, event))


def clear(p: Player) -> bool:
    """By its word, of a trip that is there in every state."""
    p.locks.tripped = p.locks.tripped or "a test"
    return ask(events.Clear(word="clear"))(p)


DEEDS: dict[str, Callable[[Player], bool]] = {
    "arm": arm,
    "hush": ask(events.Hush()),
    "restore": ask(events.Restore()),
    "go": ask(events.Go(ref="1")),
    "sink-open": sink("sink-open"),
    "sink-lost": sink("sink-lost"),
    "sink-close": sink("sink-close"),
    "host-over": sink("host-over"),
    "trip": trip("trip"),
    "lease-over": trip("lease-over"),
    "clear": clear,
}


def after(path: tuple[str, ...]) -> Player:
    p = Player(make_show(("a",), [cue("1", loop())]))
    for deed in path:
        DEEDS[deed](p)
    return p


def reached() -> dict[Output, tuple[str, ...]]:
    """Every output state that can be come to, and the deeds that lead there from COLD."""
    paths: dict[Output, tuple[str, ...]] = {"COLD": ()}
    ahead: list[Output] = ["COLD"]
    for state in ahead:
        for deed in DEEDS:
            path = (*paths[state], deed)
            if (there := after(path).output) not in paths:
                paths[there] = path
                ahead.append(there)
    return paths


def test_the_player_does_what_the_table_of_outputs_says_and_nothing_else() -> None:
    done: dict[tuple[Output, str], Output] = {}
    paths = reached()
    for state, path in paths.items():
        for name, deed in DEEDS.items():
            p = after(path)
            if deed(p):
                done[state, name] = p.output
            else:
                assert p.output == state
    assert done == {entry: goal for entry, goal in OUTPUT.items() if entry[0] in paths}


def test_every_state_is_reached() -> None:
    assert set(reached()) == set(OUTPUTS)


@pytest.mark.parametrize("state", OUTPUTS)
def test_after_a_trip_nothing_opens_until_its_word_is_typed(state: Output) -> None:
    p = after(reached()[state])
    p.trip("too loud", 0)
    if not p.locks.tripped:
        assert state == "COLD"  # nothing is open that could trip
        return
    for event in (events.Ready(), events.Confirm(), events.Restore(), events.Clear(word="clera")):
        p.handle(event, 0)
        assert p.output != "OPEN"
        assert p.locks.tripped == ("a test" if state == "TRIPPED" else "too loud")
    assert ask(events.Clear(word="Clear "))(p)
    assert p.output != "OPEN"
    assert not p.locks.tripped


def test_a_blind_guard_lets_nobody_open_nor_clear() -> None:
    p = after(("sink-open",))
    p.locks.blind = "no guard"
    assert not arm(p)
    p.locks.tripped = "it died"
    assert not ask(events.Clear(word="clear"))(p)
    p.locks.blind = ""
    assert ask(events.Clear(word="clear"))(p)
    assert arm(p)


def test_a_house_without_seats_opens_when_somebody_answers_for_it() -> None:
    p = after(("sink-open",))
    p.locks.seats = False
    assert not arm(p)
    assert not ask(events.Vouch(name="  "))(p)
    (told,) = p.handle(events.Vouch(who="desk", name="A. Person"), 5)
    assert (told.what, told.who, told.args) == ("vouch", "desk", {"name": "A. Person"})
    assert arm(p)


def test_every_output_has_its_hush() -> None:
    assert {state for state, event in OUTPUT if event == "hush"} == set(OUTPUTS)


# -- cues ---------------------------------------------------------------------------------------


def standing(p: Player) -> None:
    p.handle(events.StandBy(ref="1"), 0)


def running(p: Player) -> None:
    p.handle(events.Go(ref="1"), 0)


def tailing(p: Player) -> None:
    running(p)
    p.handle(events.Tail(ref="1"), at(0.5))


def done(p: Player) -> None:
    running(p)
    p.advance(LATER)


def barred(p: Player) -> None:
    p.barred = {"1": "too loud"}


COME_TO: dict[CueState, Callable[[Player], None]] = {
    "resting": lambda p: None,
    "standing by": standing,
    "running": running,
    "tailing": tailing,
    "done": done,
    "barred": barred,
}
HAPPENS: dict[str, Callable[[Player, int], object]] = {
    "stand-by": lambda p, now: p.handle(events.StandBy(ref="1"), now),
    "stand-down": lambda p, now: p.handle(events.StandBy(ref="0"), now),
    "go": lambda p, now: p.handle(events.Go(ref="1"), now),
    "tail": lambda p, now: p.handle(events.Tail(ref="1"), now),
    "settled": lambda p, now: p.advance(now + at(60.0)),
}


def in_state(state: CueState) -> Player:
    """A player whose cue 1 is in `state`, by what its operator did; cue 0 stands by first."""
    p = player(cue("0"), cue("1", one_shot()))
    COME_TO[state](p)
    assert p.state("1") == state
    return p


def test_the_player_does_what_the_table_of_cues_says_and_nothing_else() -> None:
    seen: dict[tuple[CueState, str], CueState] = {}
    for state in CUE_STATES:
        for name, happens in HAPPENS.items():
            p = in_state(state)
            now = LATER + 1 if state == "done" else at(0.6)
            happens(p, now)
            if (then := p.state("1")) != state:
                seen[state, name] = then
    assert seen == CUE


# -- the manual ---------------------------------------------------------------------------------


def table(rows: tuple[str, ...], entries: dict[tuple[str, str], str]) -> str:
    """A Markdown table: states down, events across, "–" for a refusal."""
    heads = list(dict.fromkeys(event for _, event in entries))
    lines = [["state", *heads], ["---"] * (len(heads) + 1)]
    lines += [[row, *[entries.get((row, head), "–") for head in heads]] for row in rows]
    return "\n".join("| " + " | ".join(line) + " |" for line in lines)


def word(asked: str) -> str:
    return f"by the word {asked}" if asked else "freely"


TABLES = {
    "output states": table(OUTPUTS, {**OUTPUT}),
    "cue states": table(CUE_STATES, {**CUE}),
    "modes": table(MODES, {change: word(asked) for change, asked in MODE.items()}),
}


def test_a_table_shows_every_entry_and_every_refusal() -> None:
    shown = TABLES["output states"]
    assert shown.count("–") == len(OUTPUTS) * len({e for _, e in OUTPUT}) - len(OUTPUT)
    assert "| HUSHED | – | – | HUSHED | – | – | TRIPPED | – | OPEN | – | LOST | COLD |" in shown


@pytest.mark.parametrize("name", TABLES)
def test_the_manual_shows_the_tables_as_they_are(name: str) -> None:
    text = MANUAL.read_text(encoding="utf-8")
    assert text.count(f"<!-- {name} -->") == 1
    _, _, rest = text.partition(f"<!-- {name} -->\n")
    told, end, _ = rest.partition("\n<!-- end -->")
    assert end
    assert told.strip() == TABLES[name]
