"""How compiled code is made: once, outside the interpreter lock, and kept on disk.

The disk cache lives under a digest of every source that gets compiled, because the compiler itself
looks only at the file of the function it was asked for, not at what that function calls.
"""

from __future__ import annotations

import hashlib
import os
from pathlib import Path

import numba
from numba.extending import register_jitable
from platformdirs import user_cache_path

import beamctl.acoustics.steering
import beamctl.show.glides
import beamctl.signal.laws


def _sources() -> list[Path]:
    shared = (beamctl.acoustics.steering, beamctl.show.glides, beamctl.signal.laws)
    here = sorted(Path(__file__).parent.glob("*.py"))
    return [*here, *(Path(module.__file__) for module in shared if module.__file__)]


def cache_folder() -> Path:
    """Where the compiled code of exactly this source is kept."""
    digest = hashlib.sha256(b"".join(path.read_bytes() for path in _sources())).hexdigest()
    root = os.environ.get("BEAMCTL_CACHE")
    return (Path(root) if root else user_cache_path("beamctl")) / "compiled" / digest[:16]


numba.config.CACHE_DIR = str(cache_folder())  # type: ignore[attr-defined]

# No contraction into fused multiply-adds: whether the compiler fuses depends on the loop it is in,
# and the samples would depend on where a block ends.
KEPT = True  # on disk
compiled = numba.njit(cache=KEPT, nogil=True, error_model="numpy")

# for what runs inside a loop of another function, where a call would cost more than the work
inlined = numba.njit(cache=KEPT, nogil=True, error_model="numpy", inline="always")

jitable = register_jitable  # lends a plain function of a pure package to compiled code
