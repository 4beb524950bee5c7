"""Hanging chains at rest: tension profile, catenary of links, stretch."""

import numpy as np
import pytest

from chainsim.model.strand import bench_strand, rest_strand, strand_step
from tests.validation.bench import AXIAL, GRAVITY, LINK_MASS, PITCH, WEIGHT, advance, line

STATICS = "statics of a hanging chain, from memory"


def hung(n_links, *, axial=AXIAL, pitch=PITCH, end_mass=0.0, **more):
    """Vertical strand, first pin held."""
    return bench_strand(
        line(n_links, pitch),
        pitch=pitch,
        link_mass=more.pop("link_mass", LINK_MASS),
        link_stiffness=axial / pitch,
        link_damping=0.1,
        fixed=(0,),
        end_mass=end_mass,
        **more,
    )


def settled(packed, force=3e-8):
    """Bring a strand to rest and work out its tensions."""
    dt = strand_step(packed)
    rest_strand(packed, dt, force)
    advance(packed, dt, dt)
    return packed


@pytest.fixture(scope="module")
def vertical():
    return settled(hung(100))


def test_tension_of_a_vertical_chain(claim, vertical):
    tension = vertical.work.links.tension[:100]
    links = 99.5 - np.arange(100)
    worst = np.abs(tension - links * LINK_MASS * GRAVITY).max()
    claim(
        "tension of a hanging chain, worst of 100 links", STATICS, 0.0, worst, 1e-6, "N",
        "unbalanced force left by the relaxation, summed over the links", absolute=True,
    )  # fmt: skip
    claim(
        "top link of 100 hanging links of 0.64 kg/m", STATICS, 7.93099089, tension[0], 2e-7, "N",
        "printed digits; half of a link's mass sits on the held pin",
    )  # fmt: skip


def drawn_out(end_load):
    """Growth in length of 100 links hung up with a load at the end [m]."""
    packed = settled(hung(100, end_mass=end_load / GRAVITY))
    return -packed.state.y[100] - 100 * PITCH


@pytest.mark.parametrize(("load", "expected"), [(0.0, 2.53074333e-5), (10.0, 8.88074333e-5)])
def test_stretch_of_a_vertical_chain(claim, load, expected):
    claim(
        f"stretch of 1.27 m of chain, EA 200 kN, {load:g} N at its end",
        "w L^2/(2 EA) + W L/EA; H. M. Irvine, Cable Structures (1981), from memory",
        expected, drawn_out(load), 1e-6, "m", "printed digits; rounding of places near 1 m",
    )  # fmt: skip


def funicular(n, span, axial=AXIAL, depth=0.6):
    """Strand of n links between two level held pins, settled."""
    x = np.linspace(0.0, span, n + 1)
    pins = np.column_stack([x, -depth * span * np.sin(np.pi * x / span)])
    packed = bench_strand(
        pins,
        pitch=PITCH,
        link_mass=LINK_MASS,
        link_stiffness=axial / PITCH,
        link_damping=0.1,
        fixed=(0, n),
    )
    return settled(packed, 1e-9)


#: links, span as a share of the unstretched length, pull H [N], sag [m], end link [N]
FUNICULAR = [
    (8, 0.08, 0.2039603197, 0.02798567404, 0.345585615),
    (21, 0.20, 0.4641258449, 0.07834010556, 0.922364635),
    (40, 0.40, 1.023742696, 0.1387854109, 1.86116727),
]


@pytest.mark.parametrize(("n", "span", "pull", "sag", "end"), FUNICULAR)
def test_catenary_of_links(claim, n, span, pull, sag, end):
    packed = funicular(n, span)
    links = packed.work.links
    source = "funicular polygon of equal links (statics, from memory), solved apart"
    why = "links stretch by T/EA, up to 1e-5"
    claim(f"level pull in a catenary of {n} links", source, pull,
          float(np.mean(links.tension[:n] * links.tx[:n])), 3e-5, "N", why)  # fmt: skip
    claim(f"sag of a catenary of {n} links", source, sag,
          -float(packed.state.y[:n].min()), 3e-5, "m", why)  # fmt: skip
    claim(f"end link of a catenary of {n} links", source, end,
          float(links.tension[0]), 3e-5, "N", why)  # fmt: skip


@pytest.mark.parametrize(
    ("axial", "pull", "sag"),
    [(500.0, 1.999700509, 0.1027406285), (50.0, 1.671248377, 0.1212585046)],
)
def test_elastic_catenary(claim, axial, pull, sag):
    n, pitch = 50, 0.011
    x = np.linspace(0.0, 0.5, n + 1)
    packed = bench_strand(
        np.column_stack([x, -0.1 * np.sin(np.pi * x / 0.5)]),
        pitch=pitch,
        link_mass=0.64 * pitch,
        link_stiffness=axial / pitch,
        link_damping=0.1,
        fixed=(0, n),
    )
    settled(packed, 1e-8)
    links = packed.work.links
    source = "elastic catenary; H. M. Irvine, Cable Structures (1981), from memory"
    why = "50 links for a continuum"
    claim(f"level pull of an elastic catenary, EA {axial:g} N", source, pull,
          float(np.mean(links.tension[:n] * links.tx[:n])), 1e-3, "N", why)  # fmt: skip
    claim(f"sag of an elastic catenary, EA {axial:g} N", source, sag,
          -float(packed.state.y[:n].min()), 1e-3, "m", why)  # fmt: skip


def test_play_lengthens_a_hung_chain(claim):
    n, play = 20, 0.2e-3
    packed = settled(hung(n, play=play), 1e-8)
    loads = (n - 0.5 - np.arange(n)) * LINK_MASS * GRAVITY
    stretch = loads.sum() * PITCH / AXIAL
    claim(
        "play drawn out of 20 hanging links", "half the play of every joint, by definition",
        n * 0.5 * play, -packed.state.y[n] - n * PITCH - stretch, 1e-6, "m", "rounding",
    )  # fmt: skip


def test_weight_at_a_support_is_that_of_the_chain(claim, vertical):
    top = vertical.work.links.tension[0] + 0.5 * LINK_MASS * GRAVITY
    claim("weight of 1.27 m of chain at its support", STATICS, 7.97084512, top, 2e-7, "N",
          "printed digits")  # fmt: skip
    assert pytest.approx(7.97084512) == 100 * PITCH * WEIGHT
