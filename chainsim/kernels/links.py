"""Links: axial springs and dampers, joint friction, limits of articulation, air damping.

The loops run over separate x and y arrays, without branches, so that the compiler turns them into
vector instructions; the ghost pin behind the last one closes the loop without a modulo.
"""

import math
from typing import NamedTuple

import numpy as np

from chainsim.kernels.contact import RELAXATION
from chainsim.kernels.jit import kernel, woven


class Chain(NamedTuple):
    """What the chain is made of."""

    n: int  # links, and pins
    pitch: np.ndarray  # (n,) unstretched length [m]
    stiffness: float  # [N/m]
    damping: float  # [N s/m]
    play: float  # total axial play of a joint [m]
    inverse_mass: np.ndarray  # (n,) of pins that carry no carrier [1/kg]
    weight_re: np.ndarray  # (n,) complex mass moment on each pin: gravity force = weight * g [kg]
    weight_im: np.ndarray
    mass: np.ndarray  # (n,) own entry of the mass matrix [kg]
    coupling_re: np.ndarray  # (n,) entry (pin i, pin i + 1) of the mass matrix [kg]
    coupling_im: np.ndarray
    gx: float  # gravity, for the audit [m/s2]
    gy: float
    gravity: float
    joint_moment: float  # constant part of joint friction [N m]
    joint_radius: float  # friction coefficient times pin radius [m]
    joint_stiffness: float  # [N m/rad]; 0 switches joint friction off
    front_bend: float  # largest turn that moves a joint out of the loop [rad]; 0: no limit
    back_bend: float  # largest turn the other way [rad]; 0: no limit
    bend_stiffness: float  # of the limits [N m/rad]
    air: float  # damping of sideways motion, per pin [N s/m]
    open: int  # 1: the last link, from the last pin to pin 0, is not there (a strand on the bench)


class ChainWork(NamedTuple):
    """Scratch arrays of the chain, one entry per link or pin plus the ghost."""

    tx: np.ndarray  # unit vector along the link
    ty: np.ndarray
    inverse_length: np.ndarray  # [1/m]
    tension: np.ndarray  # [N]
    pull_x: np.ndarray  # pull of link i stands at i + 1; entry 0 repeats the last [N]
    pull_y: np.ndarray
    fx: np.ndarray  # force on each pin [N], later its acceleration [m/s2]
    fy: np.ndarray
    turn: np.ndarray  # rotation rate of each link [rad/s]
    couple: np.ndarray  # couple at each joint [N m]
    damper: np.ndarray  # damper force of the last step [N]
    rate: np.ndarray  # stretch rate of the last step [m/s]
    loss: np.ndarray  # energy lost in each link's damper [J]
    loss_joint: np.ndarray  # energy lost in each joint [J]
    tension_sum: np.ndarray  # running sum for the mean over a sample [N]
    tension_peak: np.ndarray  # largest of the sample interval [N]
    tension_low: np.ndarray  # smallest of the sample interval [N]


@woven
def pull_links(chain, x, y, vx, vy, work, half_dt):
    """Work out every link's direction, tension and pull; keep its losses and extremes.

    A link is a spring and a damper side by side; it pulls when longer than its pitch and pushes
    when shorter, so a pushed strand buckles at its pins.  Inside the play nothing acts.  What the
    damper took since the step before is its force then times the mean stretch rate.

    Parameters
    ----------
    chain : Chain
    x, y, vx, vy : ndarray, shape (n_pins + 1,)
        Positions [m] and velocities [m/s]; the last entry repeats pin 0.
    work : ChainWork
        Overwritten: tx, ty, inverse_length, tension, pull_x, pull_y, damper, rate.
        Updated: loss, tension_sum, tension_peak, tension_low.
    half_dt : float
        Half the inner step [s].

    Notes
    -----
    Kelvin-Voigt element: spring and damper in parallel (from memory: any text on viscoelasticity).
    """
    n = chain.n
    k, c = chain.stiffness, chain.damping
    tx, ty, inverse, tension = work.tx, work.ty, work.inverse_length, work.tension
    pull_x, pull_y, pitch = work.pull_x, work.pull_y, chain.pitch
    damper, rate, loss = work.damper, work.rate, work.loss
    total, peak, low = work.tension_sum, work.tension_peak, work.tension_low
    if chain.play > 0.0 or chain.open == 1:
        _pull_loose(chain, x, y, vx, vy, work, half_dt)
    else:
        for i in range(n):
            dx = x[i + 1] - x[i]
            dy = y[i + 1] - y[i]
            length = math.sqrt(dx * dx + dy * dy)
            inv = 1.0 / length
            ux, uy = dx * inv, dy * inv
            speed = ux * (vx[i + 1] - vx[i]) + uy * (vy[i + 1] - vy[i])
            drag = c * speed
            pull = k * (length - pitch[i]) + drag
            loss[i] += half_dt * damper[i] * (rate[i] + speed)
            damper[i] = drag
            rate[i] = speed
            tx[i] = ux
            ty[i] = uy
            inverse[i] = inv
            tension[i] = pull
            pull_x[i + 1] = pull * ux
            pull_y[i + 1] = pull * uy
            total[i] += pull
            peak[i] = max(peak[i], pull)
            low[i] = min(low[i], pull)
    pull_x[0] = pull_x[n]
    pull_y[0] = pull_y[n]


@kernel
def _pull_loose(chain, x, y, vx, vy, work, half_dt):
    """Do the same for a chain whose links float inside their play, or that is an open strand."""
    n = chain.n
    half = 0.5 * chain.play
    for i in range(n):
        dx, dy = x[i + 1] - x[i], y[i + 1] - y[i]
        length = math.sqrt(dx * dx + dy * dy)
        ux, uy = dx / length, dy / length
        speed = ux * (vx[i + 1] - vx[i]) + uy * (vy[i + 1] - vy[i])
        stretch = length - chain.pitch[i]
        beyond = max(stretch - half, 0.0) + min(stretch + half, 0.0)
        drag = chain.damping * speed if beyond != 0.0 else 0.0
        pull = chain.stiffness * beyond + drag
        if chain.open == 1 and i == n - 1:
            speed = drag = pull = 0.0
        work.loss[i] += half_dt * work.damper[i] * (work.rate[i] + speed)
        work.damper[i], work.rate[i] = drag, speed
        work.tx[i], work.ty[i], work.inverse_length[i] = ux, uy, 1.0 / length
        work.tension[i] = pull
        work.pull_x[i + 1], work.pull_y[i + 1] = pull * ux, pull * uy
        work.tension_sum[i] += pull
        work.tension_peak[i] = max(work.tension_peak[i], pull)
        work.tension_low[i] = min(work.tension_low[i], pull)


@woven
def sum_pin_forces(chain, gx, gy, work):
    """Write the force on every pin: pulls of its two links and the weight hung on it.

    Parameters
    ----------
    chain : Chain
    gx, gy : float
        Gravity, less the acceleration of the frame [m/s2].
    work : ChainWork
        `fx`, `fy` [N] are overwritten.
    """
    fx, fy, pull_x, pull_y = work.fx, work.fy, work.pull_x, work.pull_y
    re, im = chain.weight_re, chain.weight_im
    for i in range(chain.n):
        fx[i] = pull_x[i + 1] - pull_x[i] + (re[i] * gx - im[i] * gy)
        fy[i] = pull_y[i + 1] - pull_y[i] + (re[i] * gy + im[i] * gx)


@woven
def turn_links(chain, vx, vy, work):
    """Write every link's rotation rate [rad/s] to ``work.turn``; entry n repeats link 0.

    Parameters
    ----------
    chain : Chain
    vx, vy : ndarray, shape (n_pins + 1,)
        Pin velocities [m/s].
    work : ChainWork
    """
    tx, ty, inverse, turn = work.tx, work.ty, work.inverse_length, work.turn
    for i in range(chain.n):
        turn[i] = inverse[i] * (tx[i] * (vy[i + 1] - vy[i]) - ty[i] * (vx[i + 1] - vx[i]))
    turn[chain.n] = turn[0]


@woven
def rub_joints(chain, deflection, rate, work, dt):
    """Work out the friction couple at every joint; it holds below its limit.

    The limit is ``M0 + mu r_pin T`` with the mean pull of the two links that meet.

    Parameters
    ----------
    chain : Chain
    deflection : ndarray, shape (n_pins,)
        Friction deflections [rad]; advanced in place where ``dt > 0``.
    rate : ndarray, shape (n_pins,)
        Their rates [rad/s]; overwritten where ``dt == 0``.
    work : ChainWork
        `couple` [N m] is overwritten: what link i feels at pin i, negative for positive turn;
        `loss_joint` [J] is added to where ``dt > 0``.
    dt : float
        Inner step [s] or 0.

    Returns
    -------
    power : float
        Dissipated power where ``dt == 0`` [W].
    """
    n = chain.n
    k, m0, radius = chain.joint_stiffness, chain.joint_moment, 0.5 * chain.joint_radius
    compliance = 1.0 / k
    turn, tension, couple, loss = work.turn, work.tension, work.couple, work.loss_joint
    # joint 0 lies between the last link and the first: it is done apart, after the straight loop
    power = 0.0
    if dt > 0.0:
        for i in range(1, n):
            slip = turn[i] - turn[i - 1]
            limit = m0 + radius * abs(tension[i] + tension[i - 1])
            old = deflection[i]
            elastic = min(max(k * (old + slip * dt), -limit), limit)
            new = elastic * compliance
            couple[i] = -elastic
            deflection[i] = new
            loss[i] += 0.5 * k * (new + old) * (slip * dt - (new - old))
        elastic, new, lost = _rub_joint(chain, 0, n - 1, deflection[0], work, dt)
        couple[0] = -elastic
        deflection[0] = new
        loss[0] += lost
    else:
        for i in range(n):
            before = i - 1 if i > 0 else n - 1
            elastic, new, _ = _rub_joint(chain, i, before, deflection[i], work, 0.0)
            couple[i] = -elastic
            slip = turn[i] - turn[before]
            rate[i] = slip - RELAXATION * (deflection[i] - new)
            power += elastic * (slip - rate[i])
    if chain.open == 1:
        couple[0] = couple[n - 1] = 0.0
    couple[n] = couple[0]
    return power


@kernel
def _rub_joint(chain, i, before, old, work, dt):
    """Return couple [N m], deflection [rad] and loss [J] of joint i, link `before` to link i."""
    k = chain.joint_stiffness
    slip = work.turn[i] - work.turn[before]
    limit = chain.joint_moment + chain.joint_radius * 0.5 * abs(
        work.tension[i] + work.tension[before]
    )
    elastic = min(max(k * (old + slip * dt), -limit), limit)
    new = elastic / k
    return elastic, new, 0.5 * k * (new + old) * (slip * dt - (new - old))


@woven
def limit_bend(chain, work):
    """Add the couple of the articulation limits at every joint to ``work.couple`` [N m].

    A positive turn from one link to the next (counterclockwise) is what a sprocket inside the loop
    asks of the chain: it is limited by `front_bend`; a turn the other way by `back_bend`.

    Parameters
    ----------
    chain : Chain
    work : ChainWork
    """
    n = chain.n
    tx, ty, couple = work.tx, work.ty, work.couple
    for i in range(n):
        before = i - 1 if i > 0 else n - 1
        sine = tx[before] * ty[i] - ty[before] * tx[i]
        cosine = tx[before] * tx[i] + ty[before] * ty[i]
        angle = math.atan2(sine, cosine)
        if chain.front_bend > 0.0 and angle > chain.front_bend:
            couple[i] -= chain.bend_stiffness * (angle - chain.front_bend)
        elif chain.back_bend > 0.0 and angle < -chain.back_bend:
            couple[i] -= chain.bend_stiffness * (angle + chain.back_bend)
    couple[n] = couple[0]


@woven
def apply_couples(chain, work):
    """Turn the couples at the joints into force pairs, added to every link's pull.

    A link feels the couple of its first joint and the opposite of that at its second; a couple on
    a link is a pair of forces across it, so the sum of forces stays zero.

    Parameters
    ----------
    chain : Chain
    work : ChainWork
        `pull_x`, `pull_y` [N] are added to, their first entries repeat the last again.
    """
    n = chain.n
    tx, ty, inverse, couple = work.tx, work.ty, work.inverse_length, work.couple
    pull_x, pull_y = work.pull_x, work.pull_y
    for i in range(n):
        pair = (couple[i] - couple[i + 1]) * inverse[i]
        pull_x[i + 1] += pair * ty[i]
        pull_y[i + 1] -= pair * tx[i]
    pull_x[0] = pull_x[n]
    pull_y[0] = pull_y[n]


@woven
def drag_sideways(chain, vx, vy, work):
    """Slow the sideways motion of every pin by the air; returns the dissipated power [W].

    Parameters
    ----------
    chain : Chain
    vx, vy : ndarray, shape (n_pins + 1,)
        Pin velocities [m/s].
    work : ChainWork
        `fx`, `fy` [N] are added to.
    """
    tx, ty, fx, fy = work.tx, work.ty, work.fx, work.fy
    power = 0.0
    for i in range(chain.n):
        across = vx[i] * ty[i] - vy[i] * tx[i]
        drag = chain.air * across
        fx[i] -= drag * ty[i]
        fy[i] += drag * tx[i]
        power += drag * across
    return power
