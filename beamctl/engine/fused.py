"""Compiled: a fused multiply-add that is always fused, or never.

Left to itself the compiler fuses in some loops and not in others, and a sample would depend on
where a block ends. Asked for by name it is one rounding everywhere. On a processor without the
instruction it would be a slow library call, so there it is a plain product and sum.
"""

from __future__ import annotations

from typing import Any

import llvmlite.binding as llvm
from numba import types
from numba.extending import intrinsic

HAS_FMA = bool(llvm.get_host_cpu_features().get("fma")) or llvm.get_process_triple().startswith(
    ("aarch64", "arm64")
)


def _fma(typing_context: Any, a: Any, b: Any, c: Any) -> Any:
    """a × b + c of three floats of one type."""
    if not (isinstance(a, types.Float) and a == b == c):
        raise TypeError(f"fma of {a}, {b}, {c}: three floats of one type")

    def generate(context: Any, builder: Any, signature: Any, arguments: Any) -> Any:
        x, y, z = arguments
        if HAS_FMA:
            return builder.fma(x, y, z)
        return builder.fadd(builder.fmul(x, y), z)

    return a(a, b, c), generate


fma: Any = intrinsic(_fma)
