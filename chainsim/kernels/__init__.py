"""Compiled kernels: arrays and floats in SI, nothing of chainsim.

What every kernel obeys:

1. float64, C-contiguous, SI; counts and indices are integers.
2. Inputs first, written arrays last; arrays are grouped in named tuples and records.
3. It writes only what its docstring names, and allocates nothing.
4. Equal and opposite pairs are written in the same loop body.
5. No checks and no exceptions: packing has checked, the loop watches finiteness.
6. Same input, same bits: no reordering of sums, no fast math.
7. ``dt > 0`` means that the inner-step method calls: friction deflections advance in place by the
   velocity that has just moved the positions.  ``dt == 0`` means that a general method calls: the
   state is only read and the deflection rates are written.
"""

import hashlib
import os
from pathlib import Path

import llvmlite.binding
import numba


def _cache_folder() -> str:
    """Return a cache folder that changes with every edit of any kernel.

    numba looks only at the file of the function it compiles, so a change in a kernel that others
    call would leave stale machine code behind; the hash of all sources rules that out.
    """
    digest = hashlib.sha256(numba.__version__.encode())
    for source in sorted(Path(__file__).parent.glob("*.py")):
        digest.update(source.read_bytes())
    base = os.environ.get("NUMBA_CACHE_DIR") or os.environ.get("XDG_CACHE_HOME")
    root = Path(base) if base else Path.home() / ".cache"
    return str(root / "chainsim" / digest.hexdigest()[:16])


# level 3 takes a third longer to compile and runs no faster here (benchmarks/README.md)
os.environ.setdefault("NUMBA_OPT", "2")
numba.config.reload_config()
numba.config.CACHE_DIR = _cache_folder()  # type: ignore[attr-defined]
# the kernels' arrays never overlap, but the compiler can't know: let it test that in front of a
# loop over many arrays, rather than give up on vector instructions
llvmlite.binding.set_option("", "-runtime-memory-check-threshold=128")
