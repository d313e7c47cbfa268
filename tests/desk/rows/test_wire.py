"""The network in one line."""

from __future__ import annotations

from beamctl.desk.rows.wire import wire_rows
from beamctl.snapshot import WireView


def text_of(wire: WireView, width: int = 100) -> str:
    return "".join(span.text for row in wire_rows(wire, width) for span in row)


def test_a_wire_that_is_off_says_that_nothing_listens() -> None:
    assert text_of(WireView()).startswith("nothing listens: the wire is off")
    assert len(text_of(WireView(), 20)) <= 20


def test_a_wire_that_listens_says_where() -> None:
    assert text_of(WireView("127.0.0.1:61740", "2 senders")) == (
        "listens at 127.0.0.1:61740  2 senders"
    )
