"""Kinds of chain: ordered ranges, and growth with the pitch as for bodies of similar shape."""

import math

import pytest

from chainsim.scenario.kinds import (
    BALL_DENSITIES,
    KINDS_OF_CHAIN,
    POCKET_FORMS,
    ball_mass,
    chain_properties,
)
from chainsim.scenario.schema_balls import BallMaterial, PocketShape
from chainsim.scenario.schema_chain import ChainKind

KINDS = list(KINDS_OF_CHAIN)


def test_names_in_the_schema_are_the_names_in_the_tables():
    assert set(ChainKind.__args__) == set(KINDS_OF_CHAIN)
    assert set(BallMaterial.__args__) == set(BALL_DENSITIES)
    assert set(PocketShape.__args__) == set(POCKET_FORMS)


@pytest.mark.parametrize("kind", KINDS)
def test_ranges_are_ordered(kind):
    for name, span in chain_properties(kind, KINDS_OF_CHAIN[kind].pitch).items():
        assert 0 < span.low <= span.typical <= span.high, name
        assert span.low < span.high, name


@pytest.mark.parametrize("kind", KINDS)
def test_properties_grow_as_in_similar_bodies(kind):
    pitch = KINDS_OF_CHAIN[kind].pitch
    one, two = chain_properties(kind, pitch), chain_properties(kind, 2 * pitch)
    powers = {"link_mass": 3, "allowable_tension": 2, "link_stiffness": 1, "link_damping": 0}
    for name, power in powers.items():
        assert two[name].typical == pytest.approx(one[name].typical * 2**power)


@pytest.mark.parametrize("kind", KINDS)
def test_a_link_fits_into_its_pitch(kind):
    pitch = KINDS_OF_CHAIN[kind].pitch
    found = chain_properties(kind, pitch)
    assert found["roller_diameter"].high < pitch
    assert found["joint.pin_radius"].high < found["roller_diameter"].low / 2


@pytest.mark.parametrize("kind", KINDS)
def test_a_link_at_its_allowable_tension_stretches_little(kind):
    found = chain_properties(kind, KINDS_OF_CHAIN[kind].pitch)
    strain = (
        found["allowable_tension"].typical
        / found["link_stiffness"].typical
        / KINDS_OF_CHAIN[kind].pitch
    )
    assert strain < 0.15


def test_mass_of_a_steel_ball():
    # A 16 mm ball of bearing steel, 7.81 g/cm3, weighs 16.75 g (density from memory).
    mass = ball_mass("steel", 0.016)
    assert mass.low < 7810 * math.pi / 6 * 0.016**3 < mass.high
    assert mass.typical == pytest.approx(16.75e-3, rel=0.005)


@pytest.mark.parametrize("form", POCKET_FORMS.values(), ids=list(POCKET_FORMS))
def test_a_pocket_is_wider_than_its_ball(form):
    assert form.floor > 1.0
    assert 0 <= form.tilt < math.radians(45)
