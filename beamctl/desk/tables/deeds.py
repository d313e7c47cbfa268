"""What the verbs of a page of tables do: boxes, and the edits that come of them."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from beamctl.desk.asking import Asking
from beamctl.desk.box import Box
from beamctl.desk.desk import Desk
from beamctl.desk.forms import field_box
from beamctl.desk.tables.new import begun
from beamctl.desk.tables.tables import Line, Table, change
from beamctl.show.edits import Drop, Edit, Rename
from beamctl.show.expected import A_NAME
from beamctl.show.show import Show

GoTo = Callable[[str], None]  # puts the cursor on a table, by its title


def ask_field(asking: Asking, table: Table, line: Line) -> None:
    """Ask what stands at a line from now on."""
    title = f"{line.key.upper()} OF {table.title.upper()}"
    box = field_box(
        title,
        line.field,
        line.now,
        lambda value: asking.edit(change(table, line, value)),
        line.choices,
    )
    asking.open(box)


def rename(asking: Asking, desk: Desk, table: Table, go_to: GoTo) -> None:
    """Ask for another name."""
    if not table.named:
        desk.tell(f"{table.title} keeps its name.")
        return
    kind, now = str(table.place[0]), str(table.place[-1])

    def use(name: str) -> str:
        if name in ("", now):
            return ""
        edit = Edit(f"{kind} {now} is now {name}", (Rename(table.file, table.place, name),))
        return asking.edit(edit, lambda: go_to(f"{kind} {name}"))

    text = "What names it in the sheet follows."
    asking.open(
        Box(
            f"ANOTHER NAME FOR {table.title.upper()}",
            text,
            A_NAME,
            use=use,
            typed=now,
            prefilled=True,
        )
    )


def take_away(asking: Asking, desk: Desk, table: Table, line: Line | None) -> None:
    """Take the table away, or leave the line out; nothing is asked, it can be undone."""
    if line is not None and line.field.optional:
        if line.given:
            desk.edit(change(table, line, None))
    elif line is not None:
        desk.tell(f"{line.key} cannot be left out.")
    elif table.named:
        desk.edit(Edit(f"{table.title} taken away", (Drop(table.file, table.place),)))
    else:
        desk.tell(f"{table.title} stays; its fields can be changed.")


def begin(asking: Asking, show: Show, kinds: Sequence[str], go_to: GoTo) -> None:
    """Ask for a kind where there are several, then for a name, and begin it."""

    def use(kind: str) -> str:
        if kind not in kinds:
            return "One of them, please."
        _ask_name(asking, show, kind, go_to)
        return ""

    if len(kinds) == 1:
        _ask_name(asking, show, kinds[0], go_to)
    else:
        text = "It begins with values that work; change them field by field."
        asking.open(Box("NEW", text, "which kind", use=use, choices=tuple(kinds), strict=True))


def _ask_name(asking: Asking, show: Show, kind: str, go_to: GoTo) -> None:
    def use(name: str) -> str:
        if not name:
            return f"It wants {A_NAME}."
        return asking.edit(begun(kind, name, show), lambda: go_to(f"{kind} {name}"))

    text = "What the sheet will call it by." if kind != "block" else "A part of the house."
    asking.open(Box(f"NEW {kind.upper()}", text, A_NAME, use=use))
