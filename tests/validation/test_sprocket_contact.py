"""Chains on wheels that do not turn: tension along the teeth, friction of a wrap, worn pitch."""

import numpy as np
import pytest

from chainsim.kernels.march import march
from chainsim.kernels.mounts import MOUNT
from chainsim.kernels.wheels import WHEEL
from chainsim.model.equilibrium import clear
from chainsim.model.packing_wheels import write_tooth
from chainsim.model.strand import IMMOVABLE, bench_strand, rest_strand, strand_step
from chainsim.model.tooth import tooth_form
from tests.validation.bench import BLINK, LINK_MASS, PITCH, fitted_rate, follow

ROLLER = 7.92e-3
STIFFNESS = 2e5 / PITCH


def wheels_at(places, *, radius=None, form=None, friction=0.0, stiffness=STIFFNESS, mass=LINK_MASS):
    """Records of wheels that do not turn, and of what holds them."""
    count = len(places)
    wheels, mounts = np.zeros(count, WHEEL), np.zeros(count, MOUNT)
    for wheel, mount, (x, y) in zip(wheels, mounts, places, strict=True):
        wheel["side"] = wheel["middle_y"] = 1.0
        wheel["stiffness"], wheel["grip_stiffness"] = stiffness, 0.5 * stiffness
        wheel["friction"], wheel["inverse_mass"] = friction, 1.0 / mass
        if form is None:
            wheel["seat_radius"] = wheel["reach"] = wheel["tip_radius"] = radius
        else:
            wheel["teeth"] = form.teeth
            write_tooth(wheel, form, 0.5 * ROLLER)
        mount["home_x"], mount["home_y"], mount["axis_y"] = x, y, 1.0
        mount["mass"] = mount["inertia"] = 1.0
        mount["wheel_inertia"] = IMMOVABLE
    return {"wheels": wheels, "mounts": mounts}


def over_the_top(radius, teeth, pitch, right, left):
    """Pins up a right strand, over the top of a wheel on a polygon, down a left strand [m]."""
    angle = 2 * np.pi * np.arange(teeth // 2 + 1) / teeth
    wrap = radius * np.column_stack([np.cos(angle), np.sin(angle)])
    rising = [[radius, -pitch * j] for j in range(right, 0, -1)]
    falling = [[-radius, -pitch * j] for j in range(1, left + 1)]
    return np.vstack([rising, wrap, falling])


def work_round(packed, center, radius, samples=4000):
    """Net and total work of a pin that is led round a circle against a wheel [J]."""
    turn = 2 * np.pi * np.arange(samples) / samples
    place = center + radius * np.column_stack([np.cos(turn), np.sin(turn)])
    force = np.empty((samples, 2))
    for k, (x, y) in enumerate(place):
        packed.state.x[0] = packed.state.x[2] = x
        packed.state.y[0] = packed.state.y[2] = y
        packed.work.search_in[0] = 0
        march(0.0, BLINK, 1, packed.parts, packed.state, packed.rate, packed.work, 0.0)
        force[k] = packed.work.links.fx[0], packed.work.links.fy[0]
    ahead = np.roll(place, -1, axis=0) - place
    work = np.sum(0.5 * (force + np.roll(force, -1, axis=0)) * ahead, axis=1)
    return work.sum(), np.abs(work).sum()


@pytest.mark.parametrize("teeth", [6, 8, 16])
def test_pin_moved_over_a_tooth_and_back_does_no_work(claim, teeth):
    """Round circles that dip into the seat, the flank and the tip, friction and damping off."""
    form = tooth_form(teeth, PITCH, ROLLER)
    packed = bench_strand(
        [[0.0, 0.0], [1.0, 1.0]], pitch=PITCH, link_mass=LINK_MASS, link_stiffness=0.0,
        fixed=(0, 1), gravity=(0.0, 0.0), **wheels_at([(0.0, 0.0)], form=form),
    )  # fmt: skip
    along = 0.5 * form.flank_end
    reach = form.corner_radius + 0.5 * ROLLER
    lean = np.pi / teeth - 0.3
    places = {
        "seat": (form.seat_radius, 0.0),
        "flank": (form.seat_radius + along * form.cos_lean, along * form.sin_lean),
        "tip": (
            form.seat_radius + form.corner_u + reach * np.cos(lean),
            form.corner_w - reach * np.sin(-lean),
        ),
    }
    shares = []
    for place in places.values():
        net, total = work_round(packed, np.array(place), 0.03 * PITCH)
        assert total > 1e-3
        shares.append(abs(net) / total)
    claim(
        f"net work of a pin led over tooth and seat and back, over all work, {teeth} teeth",
        "force from a potential", 0.0, max(shares), 1e-4, "",
        "sum over 4000 pieces of each circle", absolute=True,
    )  # fmt: skip


@pytest.fixture(scope="module")
def half_wrap():
    """Worn chain, tight on the left, lying on the flanks of half a 16-tooth wheel."""
    teeth, growth, lean = 16, 0.01, np.radians(20.0)
    form = tooth_form(teeth, PITCH, ROLLER, pressure_angle=lean, seat_clearance=0.0)
    pitch = PITCH * (1 + growth)
    radius = pitch / 2 / np.sin(np.pi / teeth)
    pins = over_the_top(radius, teeth, pitch, 5, 5)
    psi = np.pi / teeth + lean
    packed = bench_strand(
        pins, pitch=pitch, link_mass=LINK_MASS, link_stiffness=STIFFNESS, link_damping=0.1,
        fixed=(0, len(pins) - 1), gravity=(0.0, 0.0), **wheels_at([(0.0, 0.0)], form=form),
    )  # fmt: skip
    # the pins lie on the flanks ahead of them
    packed.state.q[3] = -(radius - form.seat_radius) * np.tan(psi) / radius
    packed.state.y[len(pins) - 1] -= 40e-6
    rest_strand(packed, 0.5 * strand_step(packed), 1e-5)
    return packed, form, pitch


def test_tension_along_the_teeth(claim, half_wrap):
    packed, _, _ = half_wrap
    # links of the wrap from the tight side on: 5 right, 8 on the wrap
    tension = packed.work.links.tension[12:4:-1]
    ratio = np.sin(np.radians(20)) / np.sin(np.radians(20 + 22.5))
    for k in (1, 2, 3, 4):
        claim(
            f"tension after {k} teeth over that before, 16 teeth, flank 20 deg",
            "T_k = T_0 (sin f / sin(f + 2 b))^k, Naji & Marshek (1983)", ratio**k,
            tension[k] / tension[0], 0.05, "", "the law has every pin at the middle of its seat",
            cause="pins of the worn chain lie on their flanks 0.34 deg ahead of their seats, "
            "which comes off the flank's 20 deg: 1 % a tooth",
        )  # fmt: skip


def test_worn_chain_rides_higher(claim, half_wrap):
    packed, form, pitch = half_wrap
    at = np.hypot(packed.state.x[6:13], packed.state.y[6:13])
    claim(
        "rise of a chain worn by 1 % on 16 teeth",
        "polygon of the worn pitch, e p / (2 sin(pi/N)), checks B8.2",
        0.01 * PITCH / 2 / np.sin(np.pi / 16), at.mean() - form.seat_radius, 0.05, "m",
        "links and contacts give way",
    )  # fmt: skip
    assert pitch > PITCH


def test_idle_wrap_without_friction(claim):
    teeth, pull = 12, 20.0
    radius = PITCH / 2 / np.sin(np.pi / teeth)
    pins = over_the_top(radius, teeth, PITCH, 6, 6)
    packed = bench_strand(
        pins, pitch=PITCH - pull / STIFFNESS, link_mass=LINK_MASS, link_stiffness=STIFFNESS,
        link_damping=0.1, fixed=(0, len(pins) - 1), gravity=(0.0, 0.0),
        **wheels_at([(0.0, 0.0)], radius=radius),
    )  # fmt: skip
    rest_strand(packed, 0.5 * strand_step(packed), 1e-6)
    tension = packed.work.links.tension[: len(pins) - 1]
    claim("pull on both sides of an idle wrap without friction, ratio", "statics, checks C2", 1.0,
          tension[1] / tension[-2], 1e-6, "", "rest of the relaxation")  # fmt: skip
    depth = radius - np.hypot(packed.state.x[9], packed.state.y[9])
    claim("force of a pin on an idle wheel over the pull, 12 teeth", "2 sin(pi/N), checks C2",
          0.517638090, depth * STIFFNESS / tension[9], 2e-3, "",
          "pins sink in by micrometers")  # fmt: skip
    claim("load on the axle of an idle half wrap over the pull", "statics, checks C2", 2.0,
          -packed.work.frames.fy[0] / tension[1], 1e-4, "", "rest of the relaxation")  # fmt: skip


def test_chain_dragged_over_a_wheel_that_is_held(claim):
    teeth, friction, mass, stiffness = 12, 0.3, 1e-4, 2e5
    radius = PITCH / 2 / np.sin(np.pi / teeth)
    pins = over_the_top(radius, teeth, PITCH, 4, 14)[::-1] * [-1.0, 1.0]
    # now pin 0 hangs low on the right; the last hangs on the left with the load
    packed = bench_strand(
        pins[::-1], pitch=PITCH, link_mass=mass, link_stiffness=stiffness, link_damping=0.5,
        fixed=(0,), end_mass=1.0,
        **wheels_at([(0.0, 0.0)], radius=radius, friction=friction, stiffness=stiffness, mass=mass),
    )  # fmt: skip
    speed, n = 0.03, len(pins)

    def pull(p, t):
        p.state.vy[0] = -speed * min(1.0, t / 0.3)

    def sides(p):
        x, y, tension = p.state.x[:n], p.state.y[:n], p.work.links.tension[: n - 1]
        cut = (np.minimum(y[:-1], y[1:]) < -0.6 * PITCH) & (
            np.maximum(y[:-1], y[1:]) >= -0.6 * PITCH
        )
        return [tension[cut & (x[:-1] > 0)].mean(), tension[cut & (x[:-1] < 0)].mean()]

    seconds = 0.6 + 4 * PITCH / speed
    _, both = follow(packed, seconds, 1200, sides, act=pull)
    both = both[-round(4 * PITCH / speed / seconds * 1200) :].mean(axis=0)
    step = np.tan(np.pi / teeth) * friction
    claim(
        "pull of a chain dragged over half a wheel over its load, 12 pins a turn, friction 0.3",
        "Euler-Eytelwein on a polygon, ((1 + mu tan b)/(1 - mu tan b))^(N/2), checks C3",
        ((1 + step) / (1 - step)) ** (teeth / 2), both.max() / both.min(), 0.015, "",
        "the outer pins of the wrap turn by less than a full step",
    )  # fmt: skip


def test_strand_that_runs_along_itself(claim):
    """A loop that runs over two smooth wheels without friction, plucked on its upper strand."""
    span, radius, links, speed, axial, pull = 0.5, 0.06, 216, 1.0, 2e4, 10.0
    per_length = 0.64
    length = 2 * span + 2 * np.pi * radius
    pitch = length / links
    s = np.arange(links) * pitch
    half = np.pi * radius
    pins, along = np.empty((links, 2)), np.empty((links, 2))
    for i, at in enumerate(s):
        if at < span:
            pins[i], along[i] = (span - at, radius), (-1, 0)
        elif at < span + half:
            a = np.pi / 2 + (at - span) / radius
            pins[i] = radius * np.cos(a), radius * np.sin(a)
            along[i] = -np.sin(a), np.cos(a)
        elif at < 2 * span + half:
            pins[i], along[i] = (at - span - half, -radius), (1, 0)
        else:
            a = -np.pi / 2 + (at - 2 * span - half) / radius
            pins[i] = span + radius * np.cos(a), radius * np.sin(a)
            along[i] = -np.sin(a), np.cos(a)
    stiffness = axial / pitch
    mass = per_length * pitch
    packed = bench_strand(
        pins, pitch=pitch * (1 - (pull + per_length * speed**2) / axial), link_mass=mass,
        link_stiffness=stiffness, link_damping=0.2, closed=True, gravity=(0.0, 0.0),
        **wheels_at([(0.0, 0.0), (span, 0.0)], radius=radius, stiffness=stiffness, mass=mass),
    )  # fmt: skip
    packed.state.vx[:links], packed.state.vy[:links] = speed * along.T
    packed.state.vx[links], packed.state.vy[links] = packed.state.vx[0], packed.state.vy[0]
    follow(packed, 0.5, 10, lambda p: 0.0)

    def upper(p):
        x, y = p.state.x[:links], p.state.y[:links]
        return (y > 0.5 * radius) & (x > 0) & (x < span)

    def look(p):
        on = upper(p)
        x, y = p.state.x[:links][on], p.state.y[:links][on]
        flow = -p.state.vx[:links][on].mean()
        return [np.sum((y - radius) * np.sin(np.pi * x / span)), flow]

    on = upper(packed)
    packed.state.vy[:links][on] += 0.004 * np.sin(np.pi * packed.state.x[:links][on] / span)
    packed.state.vy[links] = packed.state.vy[0]
    clear(packed)
    dt, seconds = strand_step(packed), 6.0
    t, seen = follow(packed, seconds, 3000, look, dt=dt)
    steps = 3000 * round(seconds / 3000 / dt)
    tension = packed.work.links.tension_sum[:links].mean() / steps
    hub, flow = -packed.work.wheel_sums[0, 0] / steps, seen[:, 1].mean()
    wave = np.sqrt(tension / per_length)
    expected = wave * (1 - flow**2 / wave**2) / 2 / span
    claim(
        "first frequency of a strand that runs along itself at a quarter of its wave speed",
        "n c (1 - v^2/c^2) / (2 L), Archibald & Emslie (1958), from memory", expected,
        fitted_rate(t, seen[:, 0], 2 * np.pi * expected, 0.1) / 2 / np.pi, 0.015, "Hz",
        "its ends lie on pins that have met a wheel, half a pitch beyond the axles: 1 %",
    )  # fmt: skip
    claim(
        "load of a running loop on one of its wheels",
        "2 (T - m v^2), checks C4", 2 * (tension - per_length * flow**2), abs(hub), 0.01, "N",
        "the plucked strand swings and pulls harder",
    )  # fmt: skip
