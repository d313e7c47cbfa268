"""The Wire: who may speak to the show over the network, and whether anything listens."""

from __future__ import annotations

from typing import ClassVar

from beamctl.desk.box import Box
from beamctl.desk.format import View
from beamctl.desk.forms import read
from beamctl.desk.pages.page import Rows
from beamctl.desk.pages.tables import TablesPage
from beamctl.desk.rows.wire import wire_rows
from beamctl.desk.tables.tables import ALLOW, WIRE, Allowed, Table, wire_tables
from beamctl.show.edits import Edit, Set
from beamctl.show.show import Show


class WirePage(TablesPage):
    """wire.toml as tables; what is heard stands below them."""

    NAME: ClassVar = "wire"
    TITLE: ClassVar = "Wire"
    PICTURED: ClassVar = False

    def tables(self, show: Show) -> tuple[Table, ...]:
        """The settings, and the addresses that may speak."""
        return wire_tables(show)

    def foot(self, view: View, table: Table, width: int) -> Rows:
        """What is heard."""
        return wire_rows(view.snapshot.wire, width)

    def begin(self, show: Show) -> None:
        """Ask who else may speak, and what of."""

        def use(text: str) -> str:
            peer, _, roles = text.partition(" ")
            try:
                may = read(Allowed, "roles", roles)
            except ValueError as error:
                return str(error)
            edit = Edit(f"{peer} may {' '.join(may)}", (Set(WIRE, ALLOW, peer, may),))
            return self.asking.edit(edit, lambda: self.go_to("allow"))

        text = "read: ask and be told. trigger: fire cues. aim: move beams. hush: silence the show."
        wants = "an address or a network, then its roles"
        self.asking.open(Box("WHO ELSE MAY SPEAK", text, wants, use=use))
