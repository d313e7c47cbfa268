"""The frozen picture of all that a screen or a reply may show, made by the host 20 times a second.

Texts that change only with an edit (titles, notes) travel once, as `SheetView`.
"""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True)
class CueText:
    """What is written of one cue."""

    ref: str
    title: str
    note: str = ""
    then: str = ""


@dataclass(frozen=True, slots=True)
class SheetView:
    """The sheet as text; `version` changes with every edit of any file of the show."""

    version: int
    title: str
    cues: tuple[CueText, ...]


@dataclass(frozen=True, slots=True)
class BeamView:
    """One beam now. Angles are (azimuth, elevation) in the panel's frame, degrees."""

    name: str
    panel: str
    cue: str  # the cue that last touched it, "" before the first
    sound: str  # "" when silent
    target: str  # "seat B4", "spot conductor via back_wall", "" for plain angles
    level_db: float | None  # carrier trim now; None when silent
    depth: float
    law: str
    aim_deg: tuple[float, float]
    peak_deg: tuple[float, float] | None  # predicted carrier peak; None while it is not computed
    reach_m: float | None  # None is far
    travelling: bool


@dataclass(frozen=True, slots=True)
class PanelView:
    """One panel's drive over the last tenth of a second."""

    name: str
    feeds: int
    peak_db: float | None  # highest feed peak re full scale; None for exact zero
    shared_gain_db: float  # below 0 while the panel's beams share the drive between them


@dataclass(frozen=True, slots=True)
class EngineView:
    """How the engine and its sink are doing."""

    sink: str
    rate_hz: int
    feeds: int
    quantum: int
    ring_ms: float
    rendered: int  # samples handed to the sink since it opened
    late: int  # times the sink found the ring dry
    load_pct: float  # share of the time that rendering takes
    compile_s: float
    busy: str = ""  # what it is getting ready, "sound bell.flac, 3 of 7"; "" when it is ready
    route: str = ""  # how samples reach the device
    priority: str = ""  # of the thread that renders, as the system granted it
    fill_ms: float = 0.0  # what the ring holds now
    longest_ms: float = 0.0  # longest time between two callbacks
    callbacks: int = 0
    drift_ppm: float | None = None  # the device's clock against the system's; None: not known yet


@dataclass(frozen=True, slots=True)
class GuardView:
    """What the exposure guard measures and holds. Levels in dB re 20 µPa, in the worst band."""

    state: str  # CLEAR, NEAR, CAPPING, TRIPPED or BLIND
    reason: str = ""  # why it is TRIPPED or BLIND
    headroom_db: float | None = None  # least of cap minus level, anywhere; None: nothing is heard
    seat: str = ""  # where that is: "stalls B4"
    band_hz: float = 0.0  # nominal frequency of its band
    level_db: float | None = None
    cap_db: float = 0.0
    held_db: dict[str, float] = field(default_factory=dict)  # panel → dB it is held down by, > 0
    dose_pct: float = 0.0  # the most of any seat; 100 is its cap for the whole dose window
    dose_seat: str = ""
    signed: str = ""  # "signed by NAME on DATE", or "UNSIGNED: why"; then the tables that hold
    margin_db: float = 0.0  # the most that any panel counts louder for want of a measurement


@dataclass(frozen=True, slots=True)
class SeatLevel:
    """One seat or crew point, averaged as the caps are, in the band where it is nearest its cap."""

    name: str
    block: str
    crew: bool
    at_m: tuple[float, float, float]
    level_db: float | None
    band_hz: float
    cap_db: float
    dose_pct: float


@dataclass(frozen=True, slots=True)
class CueLevel:
    """One cue where it comes nearest to a cap, or farthest over it, along its whole travel.

    beam, fits_db  of a barred cue: its loudest beam there, and the highest trim of it that keeps
                   every seat to its cap; None when no trim of that beam alone does
    """

    ref: str
    seat: str
    band_hz: float
    level_db: float
    cap_db: float
    at_s: float  # seconds after its GO
    beam: str = ""
    fits_db: float | None = None


@dataclass(frozen=True, slots=True)
class AirView:
    """The air that beams and guard reckon with."""

    temperature_c: float = 20.0
    humidity_pct: float = 50.0
    pressure_kpa: float = 101.325
    source: str = "house.toml"  # or who gave the reading
    age_s: float | None = None  # None: from house.toml, not read today


@dataclass(frozen=True, slots=True)
class WireView:
    """The network side in one line."""

    listen: str = ""  # "127.0.0.1:61740"; "" while nothing listens
    state: str = "off"


@dataclass(frozen=True, slots=True)
class EditView:
    """How the edited show stands against the saved one and against what plays."""

    undo: str = ""  # what undo would take back, in words; "" when there is nothing
    redo: str = ""
    unsaved: int = 0  # edits since the last save
    edited: tuple[str, ...] = ()  # references of cues that differ from the saved sheet
    waits: str = ""  # what is being worked out or waits to be taken up, in words


@dataclass(frozen=True, slots=True)
class Snapshot:
    """Everything at one moment."""

    sheet_version: int
    output: str  # an output state of DEVELOPERS.md, upper case
    standby: str  # "" when nothing stands by
    newest: str  # the cue fired last, "" before the first
    since_go_s: float | None
    holding: bool
    arming: bool  # the first of the two keys was pressed, and its five seconds still run
    states: dict[str, str]  # cue ref → state, only those that are not resting
    left_s: dict[str, float]  # running or tailing cue → seconds until it is done, where known
    follow: dict[str, float]  # cue that will follow by itself → seconds until it does
    beams: tuple[BeamView, ...]
    panels: tuple[PanelView, ...]
    engine: EngineView
    notices: tuple[str, ...]  # unacknowledged, oldest first
    guard: GuardView = GuardView("BLIND", "not started")
    barred: dict[str, str] = field(default_factory=dict)  # cue → why, and the trim that fits
    unvouched: bool = False  # no seat is declared, and nobody has answered for that
    mode: str = "WRITE"  # WRITE, WALK or SHOW
    edit: EditView = EditView()
    looked: int = 0  # changes whenever every cue was looked at anew; see `CueLevel`
    air: AirView = AirView()
    wire: WireView = WireView()
    trying: tuple[str, ...] = ()  # beams that Sound it now sounds


@dataclass(frozen=True, slots=True)
class Answer:
    """What became of an action. `reason` is a refusal's word, "" when it was done."""

    done: bool
    reason: str = ""
    text: str = ""
