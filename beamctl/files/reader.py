"""A show folder into the model. Everything that is wrong with it is told at once.

sheet.toml, rig.toml and house.toml must be there; guard.toml and wire.toml have defaults. Nothing
in the folder is changed, and whatever it holds, the answer is a list of problems. Texts that are
not saved yet may stand in place of files: they are read as the files would be, digests and all.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from functools import partial
from itertools import chain
from pathlib import Path
from typing import TypeVar

from pydantic import BaseModel

from beamctl.acoustics.cells import CellMap, cell_map, grid_positions, hex_positions, loom
from beamctl.errors import ShowError
from beamctl.files.folder import MISSING, Unreadable, folder_trouble, read_bytes, text_of
from beamctl.files.locate import Key
from beamctl.files.measurement import panel_digest, read_measurement
from beamctl.files.panel_csv import read_cells
from beamctl.files.problems import Problem, Severity, Source, shown
from beamctl.files.signing import seal_of_parts
from beamctl.files.sounds import read_sounds
from beamctl.files.tables import read_table
from beamctl.show.aims import check_aims
from beamctl.show.checks import GUARD, HOUSE, RIG, SHEET, Parts, check_names
from beamctl.show.house import House
from beamctl.show.limits import Guard, Wire
from beamctl.show.rig import PanelSpec, Rig
from beamctl.show.sheet import Sheet
from beamctl.show.show import Show

WIRE = "wire.toml"
ABSENT: dict[str, tuple[Severity, str]] = {
    SHEET: ("error", "missing, expected the beams and cues"),
    RIG: ("error", "missing, expected the panels"),
    HOUSE: ("error", "missing, expected the room and its seats"),
    GUARD: ("warning", "missing: unsigned, the tables hold as they are"),
}
M = TypeVar("M", bound=BaseModel)


def read_show(
    folder: str | Path, texts: Mapping[str, str] | None = None
) -> tuple[Show | None, list[Problem]]:
    """The show of a folder, None when it has an error, and every problem in the order of lines.

    texts  file name → what to read in place of that file, a TOML text or a cell list
    """
    reading = _Reading(Path(folder), texts or {})
    show = reading.show()
    order = {name: i for i, name in enumerate((SHEET, RIG, HOUSE, GUARD, WIRE))}
    told = dict.fromkeys(reading.problems)  # two panels may share a file
    problems = sorted(told, key=lambda p: (order.get(p.file, 9), p.file, p.line or 0))
    return (None if any(p.severity == "error" for p in problems) else show), problems


def load_show(folder: str | Path, texts: Mapping[str, str] | None = None) -> Show:
    """The show of a folder, as `read_show`; ShowError, listing its errors, when it has any."""
    show, problems = read_show(folder, texts)
    if show is None:
        errors = [str(problem) for problem in problems if problem.severity == "error"]
        count = "1 error" if len(errors) == 1 else f"{len(errors)} errors"
        raise ShowError(f"{folder} cannot be played: {count}", "\n  ".join(errors))
    return show


class _Reading:
    """One reading of one folder, and what it found."""

    def __init__(self, folder: Path, given: Mapping[str, str]) -> None:
        self.folder = folder
        self.given = given
        self.problems: list[Problem] = []
        self.digests: dict[str, str] = {}
        self.texts: dict[str, str] = {}
        self.sources: dict[str, Source] = {}
        self.cut: set[tuple[str, str]] = set()

    def show(self) -> Show | None:
        """The show as far as it can be read; the problems say whether it can be played."""
        if what := folder_trouble(self.folder):
            self.problems.append(Problem(str(self.folder), None, "", what))
            return None
        sheet, rig = self.table(SHEET, Sheet), self.table(RIG, Rig)
        house = self.table(HOUSE, House)
        guard, wire = self.table(GUARD, Guard), self.table(WIRE, Wire)
        cells = self.cells(rig) if rig else {}
        sounds = read_sounds(self.folder, sheet, partial(self.tell, SHEET)) if sheet else {}
        seal = seal_of_parts(self.texts.get(GUARD, ""), rig, self.digests) if rig else ""
        parts = Parts(sheet, rig, house, guard, cells, frozenset(self.cut), seal)
        for finding in chain(check_names(parts), check_aims(parts)):
            self.tell(finding.file, finding.where, finding.what, finding.severity)
        if not (sheet and rig and house) or cells.keys() != rig.panel.keys():
            return None
        guard, wire = guard or Guard(format=1), wire or Wire(format=1)
        home = str(self.folder.absolute())
        return Show(home, sheet, rig, house, guard, wire, cells, sounds, self.digests, seal)

    def text(self, file: str) -> str:
        """The text of a file, as given or else as it is in the folder; Unreadable if it is none."""
        if file in self.given:
            data = self.given[file].encode()
        else:
            data = read_bytes(self.folder, file)
        text, self.digests[file] = text_of(data)
        return text

    def table(self, file: str, model: type[M]) -> M | None:
        """One TOML file; None when it is not there or nothing can be made of it."""
        try:
            text = self.texts[file] = self.text(file)
        except Unreadable as error:
            if str(error) != MISSING or file in ABSENT:
                severity, what = ABSENT[file] if str(error) == MISSING else ("error", str(error))
                self.problems.append(Problem(file, None, "", what, severity))
            return None
        table = read_table(file, text, model, self.problems.append)
        if table is None:
            return None
        self.sources[file] = table.source
        self.cut |= {(file, name) for name in table.cut}
        return table.model

    def cells(self, rig: Rig) -> dict[str, CellMap]:
        """Cell maps by panel, of every panel that has one; measurements are looked into too."""
        maps: dict[str, CellMap] = {}
        for name, spec in rig.panel.items():
            cells = self.listed(name, spec) if spec.cells is not None else _drawn(spec)
            if cells is not None:
                maps[name] = cells
            if spec.measured and (what := self.against_measured(name, spec, cells)):
                self.tell(RIG, ("panel", name, "measured"), f"{shown(spec.measured)}: {what}")
        return maps

    def against_measured(self, panel: str, spec: PanelSpec, cells: CellMap | None) -> str:
        """Why the panel is not measured by the file it names; "" when it is."""
        try:
            self.text(spec.measured)
            found = read_measurement(self.folder / spec.measured)
        except Unreadable as error:
            return str(error)
        except ShowError as error:
            return ": ".join(["no measurement of a panel", *error.do.split("\n")[:1]])
        if found.panel != panel:
            return f'measures panel "{found.panel}"'
        if found.against:
            return f"a measurement that did not pass: {found.against[0]}"
        if cells is not None and found.of != panel_digest(spec, cells):
            return 'the panel was changed since; measure it again, or write measured = ""'
        return ""

    def listed(self, panel: str, spec: PanelSpec) -> CellMap | None:
        """The cell map of a panel whose cells are in a CSV file."""
        file = spec.cells or ""
        try:
            text = self.text(file)
        except Unreadable as error:
            self.tell(RIG, ("panel", panel, "cells"), f"{shown(file)}: {error}")
            return None
        wiring = None if spec.loom == "csv" else spec.loom
        return read_cells(file, text, wiring, self.problems.append)

    def tell(
        self, file: str, where: Sequence[Key], what: str, severity: Severity = "error"
    ) -> None:
        self.problems.append(self.sources[file].problem(where, what, severity))


def _drawn(spec: PanelSpec) -> CellMap | None:
    """The cell map of a grid or of a hexagon, all cells alike."""
    if spec.grid is not None:
        at_m = grid_positions(spec.grid.columns, spec.grid.rows, spec.grid.pitch_mm / 1000.0)
    elif spec.hex is not None:
        at_m = hex_positions(spec.hex.rings, spec.hex.pitch_mm / 1000.0)
    else:
        return None
    return None if spec.loom == "csv" else cell_map(at_m, loom(at_m, spec.loom))
