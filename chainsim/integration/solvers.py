"""The lift behind scipy's interface: a right-hand side, our compiled stepper, and stock methods.

`InnerStepper` is a subclass of `scipy.integrate.OdeSolver`, so that `solve_ivp(method=InnerStepper,
prepared=...)` takes it; each of its steps takes many compiled inner steps.  `integrate` drives any
method, ours or one of scipy's, over a stretch of a prepared lift as the reference of short runs.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from scipy.integrate import DenseOutput, OdeSolver, solve_ivp
from scipy.sparse import lil_matrix

from chainsim.errors import CallError
from chainsim.integration.start import Prepared
from chainsim.kernels.layout import State, view
from chainsim.kernels.march import march
from chainsim.kernels.motion import derivative, relist
from chainsim.model.packing import Packed

STOCK_METHODS = ("RK23", "RK45", "DOP853", "Radau", "BDF", "LSODA")
"""scipy's methods that may be chosen; the implicit ones are told the sparsity."""

RELIST_TIME = 0.01
"""How long the lists of what balls may touch hold for a stock method [s]."""

ABSOLUTE = {
    "x": 1e-8, "y": 1e-8, "vx": 1e-6, "vy": 1e-6, "q": 1e-7, "w": 1e-5, "joint": 1e-6,
    "tooth": 1e-9, "guide": 1e-9, "held": 1e-7, "bx": 1e-8, "by": 1e-8, "spin": 1e-6,
    "bvx": 1e-6, "bvy": 1e-6, "bw": 1e-4, "grip": 1e-9, "ledger": 1e-6,
}  # fmt: skip
"""Absolute tolerance by kind of coordinate [m, m/s, rad, rad/s, J]."""


def right_hand_side(packed: Packed) -> Callable[[float, np.ndarray], np.ndarray]:
    """Return the derivative of the flat state as a function of time and state.

    Parameters
    ----------
    packed : Packed
        Supplies parts and scratch space; its own state is left alone.

    Returns
    -------
    callable
        ``f(t, y)`` with `t` [s] and `y` of shape (n_state,), for `scipy.integrate.solve_ivp`.
    """
    flat, rate_flat = packed.flat.copy(), np.zeros_like(packed.rate_flat)
    state, rate = view(flat, packed.ends), view(rate_flat, packed.ends)

    def evaluated(t: float, y: np.ndarray) -> np.ndarray:
        flat[:] = y
        rate_flat[:] = 0.0
        derivative(float(t), packed.parts, state, rate, packed.work)
        return rate_flat.copy()

    return evaluated


def absolute_tolerances(packed: Packed) -> np.ndarray:
    """Return the absolute tolerance of every entry of the state, shape (n_state,) (mixed SI).

    Parameters
    ----------
    packed : Packed
    """
    tolerances = np.ones_like(packed.flat)
    views = view(tolerances, packed.ends)
    for name in State._fields:
        getattr(views, name)[:] = ABSOLUTE[name]
    return tolerances


def sparsity(packed: Packed):
    """Return which entries of the derivative depend on which entries of the state.

    Pins depend on their neighbors, and everything on wheels, mounts and balls.

    Parameters
    ----------
    packed : Packed

    Returns
    -------
    sparse matrix, shape (n_state, n_state)
    """
    ends, n = packed.ends, packed.parts.chain.n
    size = int(ends[-1])
    pattern = lil_matrix((size, size), dtype=np.int8)
    starts = [0, *map(int, ends[:-1])]
    of = dict(zip(State._fields, starts, strict=True))
    names = ("x", "y", "vx", "vy", "joint", "tooth", "guide")
    for i in range(n):
        near = [(i + k) % n for k in (-2, -1, 0, 1, 2)]
        columns = [of[name] + j for name in names for j in near]
        for name in names:
            pattern[of[name] + i, columns] = 1
    dense = [*range(of["q"], of["joint"]), *range(of["held"], size)]
    pattern[:, dense] = 1
    pattern[dense, :] = 1
    return pattern.tocsc()


class InnerStepper(OdeSolver):
    """Our compiled fixed-step method behind scipy's interface.

    Semi-implicit Euler inner steps, first order in the step; see `chainsim.kernels.motion`.

    Parameters
    ----------
    fun, t0, y0, t_bound, vectorized
        As of `scipy.integrate.OdeSolver`; `fun` is not called.
    prepared : Prepared
        The lift; its packed state is overwritten as the method steps.
    inner_step : float or None
        Inner step [s]; None for the one that the stiffest mode allows.
    max_step : float
        Longest stretch of one call [s]; None for one sample interval.
    """

    def __init__(
        self, fun, t0, y0, t_bound, vectorized=False, *, prepared: Prepared,
        inner_step: float | None = None, max_step: float | None = None, **_extraneous,
    ) -> None:  # fmt: skip
        super().__init__(fun, t0, y0, t_bound, vectorized)
        self.t: float = t0
        self.y: np.ndarray = y0
        self.inner_step = inner_step or prepared.dt
        self._stretch = max_step or prepared.steps * prepared.dt
        self._packed = prepared.packed
        self._packed.work.search_in[0] = 0

    def _step_impl(self):
        remaining = abs(self.t_bound - self.t)
        stretch = min(self._stretch, remaining)
        steps = max(1, round(stretch / self.inner_step))
        packed = self._packed
        packed.flat[:] = self.y
        march(
            self.t,
            stretch / steps,
            steps,
            packed.parts,
            packed.state,
            packed.rate,
            packed.work,
            0.0,
        )
        if not np.isfinite(packed.flat).all():
            return False, "the state is no longer finite"
        last = stretch >= remaining * (1.0 - 1e-12)
        self.t = self.t_bound if last else self.t + stretch
        self.y = packed.flat.copy()
        return True, None

    def _dense_output_impl(self):
        return _Between(self.t_old, self.t, self._old(), self.y)

    def step(self):
        """Take one stretch of inner steps; see `scipy.integrate.OdeSolver.step`."""
        self._before = self.y.copy()
        return super().step()

    def _old(self) -> np.ndarray:
        """Return the state before the last stretch (mixed SI)."""
        return self._before


class _Between(DenseOutput):
    """Straight lines between two states."""

    def __init__(self, t_old, t, y_old, y) -> None:
        super().__init__(t_old, t)
        self._old, self._new = y_old, y

    def _call_impl(self, t):
        part = (np.asarray(t) - self.t_old) / (self.t - self.t_old)
        return (
            self._old[:, None] + (self._new - self._old)[:, None] * part
            if part.ndim
            else (self._old + (self._new - self._old) * part)
        )


def integrate(
    prepared: Prepared, duration: float, method: str = "chainsim", rtol: float = 1e-6
) -> np.ndarray:
    """March a prepared lift by any method, without dated events, and return its state.

    Parameters
    ----------
    prepared : Prepared
        Its packed state is overwritten with the result.
    duration : float
        Stretch of time from 0 [s].
    method : str
        ``"chainsim"``, or one of `STOCK_METHODS`.
    rtol : float
        Relative tolerance of a stock method (dimensionless).

    Returns
    -------
    ndarray, shape (n_state,)
        Final state [mixed SI].

    Raises
    ------
    CallError
        If the method is unknown, or fails.
    """
    packed = prepared.packed
    if method == "chainsim":
        found = solve_ivp(
            right_hand_side(packed), (0.0, duration), packed.flat.copy(), method=InnerStepper,
            prepared=prepared, t_eval=[duration],
        )  # fmt: skip
        if not found.success:
            raise CallError(f"chainsim's stepper failed: {found.message}")
        return packed.flat
    if method not in STOCK_METHODS:
        raise CallError(f"method is '{method}', need chainsim or one of {', '.join(STOCK_METHODS)}")
    options: dict = {"rtol": rtol, "atol": absolute_tolerances(packed)}
    if method in ("Radau", "BDF"):
        options["jac_sparsity"] = sparsity(packed)
    t = 0.0
    while t < duration * (1.0 - 1e-12):
        end = min(duration, t + RELIST_TIME)
        relist(packed.parts, packed.state, packed.work)
        found = solve_ivp(
            right_hand_side(packed), (t, end), packed.flat.copy(), method=method, **options
        )
        if not found.success:
            raise CallError(f"{method} failed at {found.t[-1]:.4g} s: {found.message}")
        packed.flat[:] = found.y[:, -1]
        t = end
    return packed.flat
