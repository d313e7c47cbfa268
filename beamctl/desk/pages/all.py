"""Every page, by its name in the registry."""

from __future__ import annotations

from beamctl.desk.pages.bench import BenchPage
from beamctl.desk.pages.caps import CapsPage
from beamctl.desk.pages.desk import DeskPage
from beamctl.desk.pages.guard import GuardPage
from beamctl.desk.pages.help import HelpPage
from beamctl.desk.pages.house import HousePage
from beamctl.desk.pages.keytest import KeyTestPage
from beamctl.desk.pages.log import LogPage
from beamctl.desk.pages.page import Page
from beamctl.desk.pages.rig import RigPage
from beamctl.desk.pages.sheet import SheetPage
from beamctl.desk.pages.wire import WirePage

PAGES: dict[str, type[Page]] = {
    page.NAME: page
    for page in (
        DeskPage,
        SheetPage,
        BenchPage,
        HousePage,
        RigPage,
        GuardPage,
        CapsPage,
        WirePage,
        LogPage,
        HelpPage,
        KeyTestPage,
    )
}
