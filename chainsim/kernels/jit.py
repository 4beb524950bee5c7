"""How kernels are compiled: cached, without the interpreter's lock, and without hidden work."""

from typing import Any

from numba import njit

#: Kernels allocate nothing, so no reference is counted; division follows IEEE 754 (packing has
#: ruled zeros out), which lets the compiler use vector instructions; sums are never reordered.
OPTIONS: dict[str, Any] = {"cache": True, "nogil": True, "error_model": "numpy", "_nrt": False}

kernel = njit(**OPTIONS)
#: for laws of a few lines that are called from inner loops
inlined = njit(forceinline=True, **OPTIONS)
#: for effects that have one place in the inner loop: woven into it before types are inferred, so
#: that they are compiled once and pass no arguments at run time
woven = njit(inline="always", **OPTIONS)
