"""The block of memory between the engine, its device and whoever watches: what lies where.

One file-backed map of int64 words, shared by processes. Every word has one writer. Words of
different writers lie on cache lines of their own. Positions count frames since the stream began and
only grow, so ring fill = WRITTEN - READ.
"""

from __future__ import annotations

# the render thread
WRITTEN, FLOWING = 0, 1
# whoever grants (the guard): the lease is a sample number; GRANTS counts the rows of CEILINGS
LEASE_UNTIL, GRANTS = 8, 9
# the host, with a lease of its own; HUSH may be raised by anyone, and only ever grows. SEEN_TO is
# for who plays a journal: chunks that the final stage may look at, 0 for all
OPEN_ASK, OPEN_N, HUSH, HOST_UNTIL, SEEN_TO = 16, 17, 18, 19, 20
# the final stage
READ, CALLBACKS, EMPTY, BLOCK, LAST_NS, LONGEST_NS = 24, 25, 26, 27, 28, 29
SEEN_OPEN, SEEN_HUSH, GATE, EVENTS = 30, 31, 32, 33
FAULTS, FAULT_FEED, CLIPS, SOUNDED, SCANNED, DRY = 34, 35, 36, 37, 38, 39
LAST_READ, SEEN_GRANT = 40, 41  # READ at LAST_NS; the newest grant that holds
SHORT = 42  # SCANNED while less is in the ring than is looked ahead, else 0
# set once
FRAMES, CHANNELS, PANELS, RAMP_N, SIZE, START = 48, 49, 50, 51, 52, 53
HEADER = 64

# kinds of events that the final stage logs, with their sample
OPENED, HUSHED, LEASE_OVER, WENT_DRY, FAULT, CLIP, HOST_OVER, GRANTED, WENT_SHORT = range(1, 10)
EVENT_NAMES = (
    *("", "opened", "hushed", "lease-over", "dry"),
    *("fault", "clip", "host-over", "granted", "short"),
)
EVENT_WORDS = 4  # sample, kind, value, spare
EVENTS_KEPT = 256

MAX_PANELS = 64
CHUNK = 64  # frames a peak is taken over
SMOOTH = 8  # chunks that a panel's demand is averaged over
HOLD = SMOOTH + 2  # chunks a peak is held
LOOKAHEAD = (SMOOTH + 1) * CHUNK  # frames by which the final stage looks into the ring

LONG = 64  # chunks that a panel's drive is averaged over
GRANTS_KEPT = 256

# offsets in words
EVENT_AT = HEADER
GATE_ROW = EVENT_AT + EVENTS_KEPT * EVENT_WORDS  # 8 float64: a scalar row of show/glides.py
CEILINGS = GATE_ROW + 8  # float64 (GRANTS_KEPT, panels), written by whoever grants: drive
TARGETS = CEILINGS + GRANTS_KEPT * MAX_PANELS  # float64 per panel: the ceiling that holds
GLIDES = TARGETS + MAX_PANELS  # float64 (panels, 2): it at both marks of GLIDED, on its way there
DOWNS = GLIDES + 2 * MAX_PANELS  # float64 (panels, 3): shares of itself that a panel is held down
GLIDED = DOWNS + 3 * MAX_PANELS  # int64 per panel: the chunk those marks enclose
RATINGS = GLIDED + MAX_PANELS  # float64 per panel: full drive, max_volts over volts at full scale
FIRSTS = RATINGS + MAX_PANELS  # int64 per panel: first channel
FEEDS = FIRSTS + MAX_PANELS  # int64 per panel: how many channels
PEAKS = FEEDS + MAX_PANELS  # float64 (panels, HOLD)
HELD = PEAKS + MAX_PANELS * HOLD  # float64 (panels, SMOOTH)
DEMANDS = HELD + MAX_PANELS * SMOOTH  # float64 (panels, DEMANDS_KEPT), by chunk number
DEMANDS_KEPT = 4096  # chunks; a ring is shorter
POWERS = DEMANDS + MAX_PANELS * DEMANDS_KEPT  # the same: summed mean squares of the feeds
DRIVES = POWERS + MAX_PANELS * DEMANDS_KEPT  # the same: drive that the ceiling is held against
LEFT = DRIVES + MAX_PANELS * DEMANDS_KEPT  # the same: sum of squared gains a chunk went out with
SQUARES = LEFT + MAX_PANELS * DEMANDS_KEPT  # float32 (channels): scratch of the final stage
MAX_CHANNELS = 4096
SAMPLES = SQUARES + MAX_CHANNELS // 2  # float32 (frames, channels)


def words_needed(frames: int, channels: int) -> int:
    """Length of the whole block in words."""
    return SAMPLES + (frames * channels + 1) // 2
