"""Off-axis loads: a link tips against its neighbors, and a hung tail swings out of plumb."""

import numpy as np
import pytest

from chainsim.integration.start import prepare
from chainsim.model.lift import build_lift
from chainsim.model.strand import Rider, bench_strand, rest_strand, strand_step
from tests.validation.bench import GRAVITY, advance, line
from tests.validation.lifts import BALL, LOADED, PER_LENGTH, lift

PITCH, STIFFNESS, OUT = 0.01, 5e4, 0.012
SOURCE = "moments on a tipped link, (T + m g/2) p tan(f) = m g e, statics"


def upright(n, links, mass, pull):
    """Upright strand between two held pins, with loads off the line of the pins; settled.

    Returns the tilt of the loaded links [rad], and the pull in the links below them [N].
    """
    stretch = 1 + pull / STIFFNESS / PITCH
    packed = bench_strand(
        line(n, PITCH, (0.0, 1.0), stretch), pitch=PITCH, link_mass=1e-4, link_stiffness=STIFFNESS,
        link_damping=0.1, fixed=(0, n),
        riders=[Rider(link, 0.5 * PITCH, OUT, mass) for link in links],
    )  # fmt: skip
    dt = strand_step(packed)
    rest_strand(packed, dt, 1e-7)
    advance(packed, dt, dt)
    chain = packed.work.links
    below = np.array(links) - 1
    return np.arctan2(chain.tx[links], chain.ty[links]), chain.tension[below]


@pytest.mark.parametrize(("pull", "printed"), [(2.0, 6.4), (1.0, None), (0.5, 21.5)])
def test_tilt_of_one_loaded_carrier(claim, pull, printed):
    n, mass = 120, 0.02
    tilt, below = upright(n, [60], mass, pull)
    weight = mass * GRAVITY
    expected = np.arctan(weight * OUT / (below[0] + 0.5 * weight) / PITCH)
    claim(
        f"tilt of one carrier with 20 g 12 mm off the pins, about {pull:g} N below", SOURCE,
        np.degrees(expected), np.degrees(tilt[0]), 0.03, "deg",
        "a strand of 120 links leans back by 1/120 of it",
    )  # fmt: skip
    if printed:
        at = np.degrees(np.arctan(weight * OUT / (pull + 0.5 * weight) / PITCH))
        assert at == pytest.approx(printed, abs=0.05)


@pytest.mark.parametrize("every", [3, 5])
def test_tilt_where_every_few_links_are_loaded(claim, every):
    count, mass = 8, 0.004
    links = [every // 2 + every * k for k in range(count)]
    tilt, below = upright(count * every, links, mass, 3.0)
    weight = mass * GRAVITY
    alone = np.arctan(weight * OUT / (below + 0.5 * weight) / PITCH)
    claim(
        f"tilt of a carrier where every {every}th link is loaded, over that of one alone",
        "the strand leans back between its ends: 1 - 1/q, statics", 1 - 1 / every,
        float(np.mean(tilt / alone)), 0.05, "", "pull grows by the carriers' weight",
    )  # fmt: skip


def test_free_hung_tail_swings_out_of_plumb(claim):
    """Moments of both strands: the tail gives way until their lean takes the balls' moment."""
    hung = 1.0
    carriers = LOADED.replace('offset = "-8.001 mm"', 'offset = "4 mm"')
    assert carriers != LOADED
    prepared = prepare(
        build_lift(lift(carriers=carriers, tail=f'kind = "hung", mass = "{hung} kg", free = "xy"'))
    )
    balls = int(prepared.watch.feeding["held"][0] and np.sum(prepared.memory.loaded))
    load = balls * BALL * GRAVITY
    weight = (hung + 0.04 * PER_LENGTH) * GRAVITY
    out = prepared.lift.pocket.seat[1]
    expected = -load * out / (weight + PER_LENGTH * GRAVITY * 0.24 + 0.5 * load)
    claim(
        "how far balls on one strand swing a free hung tail out of plumb",
        "-P e / (W + w H + P/2), derived from moments and lateral forces of both strands", expected,
        float(prepared.packed.work.frames.cx[1]), 0.05, "m",
        "the pull of each strand is taken at its middle; carriers hang off the line as well",
    )  # fmt: skip
