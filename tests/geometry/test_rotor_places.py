"""Even places of barrier ends: exact spreads are found again, others by their nearest."""

import math

import pytest

from lamwright.geometry.first_spread import Spread
from lamwright.geometry.rotor_places import rotor_places
from tests.outlines import plain_design
from tests.shipped import shipped


def with_ends(ends_el):
    """A four-pole design with barriers that end at these electrical degrees from the q axis."""
    design = plain_design()
    barrier = design.rotor.barrier[0]
    degrees = [end / design.pole_pairs for end in ends_el]
    barriers = tuple(barrier.model_copy(update={"end_angle_deg": end}) for end in degrees)
    return design.model_copy(
        update={"rotor": design.rotor.model_copy(update={"barrier": barriers})}
    )


@pytest.mark.parametrize(("barriers", "places"), [(2, 8), (3, 12), (3, 16), (4, 20)])
def test_even_ends_are_found_again(barriers, places):
    """Ends of `Spread`, the definition of n_r; none misses its place."""
    ends = [math.degrees(end) for end in Spread(barriers, places, is_half=True).ends]
    found = rotor_places(with_ends(ends))
    assert found.count == places
    assert found.away == pytest.approx(0.0, abs=1e-8)


def test_the_demo_lies_near_sixteen_places():
    """Ends at 32.6, 54.4 and 77.6 el. degrees; 33.75, 56.25, 78.75 are half places of 22.5."""
    found = rotor_places(shipped("demo_24s4p_arc", 2.5).machine.design)
    assert found.count == 16
    assert math.degrees(found.away) == pytest.approx(56.25 - 54.4)


def test_uneven_ends_have_no_places():
    """20, 31 and 74 el. degrees: no even places within a fifth of their spacing (searched)."""
    assert rotor_places(with_ends([20.0, 31.0, 74.0])) is None


def test_unlike_halves_have_no_places():
    """Poles or halves that differ have two sets of ends: n_r is not given."""
    design = with_ends([30.0, 60.0])
    rotor = design.rotor.model_copy(update={"alternate_barrier": design.rotor.barrier})
    assert rotor_places(design.model_copy(update={"rotor": rotor})) is None
