"""What can be done on House, Rig, Guard and Wire, while the mode is WRITE or WALK."""

from __future__ import annotations

from beamctl.actions import Action

VERBS: tuple[Action, ...] = ()
