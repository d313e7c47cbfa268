"""The one wording of what this sound can do and whom to ask, in two lengths.

From general literature on airborne ultrasound (ICNIRP 2024 review, doi 10.1097/HP.0000000000001800;
IRPA interim guidelines 1984): the published caps are interim, and the evidence for them is thin.
"""

from __future__ import annotations

CAUTION_LINE = "Ultrasound: local rules and qualified people come first."

CAUTION_TEXT = """\
Ask first: local rules and qualified people decide what may sound in a room.
High-level airborne ultrasound can be unpleasant or harmful, even unheard.
People differ: what one does not notice another cannot bear.
Dogs and many other animals hear these frequencies.
Hearing aids, microphones and ultrasonic sensors can be disturbed by them.
Published caps are interim: nobody can yet say if they are too high or low.
A cap is a limit that somebody chose and signed for, not a promise.
Keep heads out of the beam near a panel, and stop when anyone asks."""
