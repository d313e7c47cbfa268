"""What can be done on the Bench, while the mode is WRITE or WALK."""

from __future__ import annotations

from beamctl.actions import Action

VERBS: tuple[Action, ...] = ()
