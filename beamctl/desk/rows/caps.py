"""The caps that hold now, band by band, and whose name is under them."""

from __future__ import annotations

from beamctl.desk.format import Role, Row, Span, wrap
from beamctl.show.show import Show

_SIGN = "An edit here, of the rig or of the house takes the signature off, and then nothing is "
_SIGN += "looser than the plain tables. `beamctl sign` puts the venue's name under the files as "
_SIGN += "they are on disk."


def cap_rows(show: Show, width: int, height: int) -> list[Row]:
    """At most `height` rows: who signed, the cap of every band, what an edit does."""
    caps = show.caps
    signed = f"signed by {caps.signed_by} on {caps.signed_on}"
    who = f"UNSIGNED: {caps.unsigned}" if caps.unsigned else signed
    role: Role = "attention" if caps.unsigned else "text"
    rows: list[Row] = [(Span(line, role),) for line in wrap(who, width, 3)]
    rows.append((Span(f"{'band kHz':>9}{'seats dB':>10}{'crew dB':>10}"),))
    for hz, seats_db in caps.seats_db.items():
        levels = f"{seats_db:>10g}{caps.crew_db[hz]:>10g}"
        rows.append((Span(f"{hz / 1000.0:>9g}"), Span(levels, "text")))
    for who, names in caps.tables.items():
        rows += [(Span(line),) for line in wrap(f"{who}: {' and '.join(names)}", width, 2)]
    margins = sorted(set(caps.margin_db.values()))
    counts = ", ".join(f"{margin:g}" for margin in margins)
    rows.append((Span(f"averaged over {caps.averaging_s:g} s; panels count {counts} dB louder"),))
    rows += [(Span(line),) for line in wrap(_SIGN, width, 5)]
    return rows[: max(height, 0)]
