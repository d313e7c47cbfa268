"""Everything that can be asked for at the desk, in the order in which help tells it."""

from __future__ import annotations

from beamctl.actions import ACTIONS, Action
from beamctl.desk.verbs import bench, common, sheet, tables

EVERYTHING: dict[str, Action] = {
    action.name: action
    for action in (
        *(*ACTIONS.values(), *common.VERBS, *sheet.VERBS, *bench.VERBS, *tables.VERBS),
        *common.HISTORY,
    )
}
