"""The smallest sector of a winding and a rotor, and sectors of any number of poles."""

import math

import numpy as np
import pytest
from outlines import plain_design

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area
from lamwright.geometry.section import Region, base_name, pole_of, rotor_cell, rotor_iron
from lamwright.geometry.sectors import repeats, ripples_in_sixty_degrees, smallest_sector
from lamwright.geometry.winding import WindingTable

TILING = 1e-9  # of the sector's area: rounding of some hundred edges


def tooth_table(slots: int, poles: int) -> WindingTable:
    """A two-layer tooth-coil winding: phases by the nearest belt of the star, one turn a coil."""
    conductors = np.zeros((slots, 2, 3))
    for tooth in range(slots):
        # A coil round the tooth after slot `tooth`; belts A -C B -A C -B of 60 degrees.
        belt = math.floor((tooth * 180.0 * poles / slots + 30.0) % 360.0 / 60.0 + 1e-9)
        phase, sign = ((0, 1), (2, -1), (1, 1), (0, -1), (2, 1), (1, -1))[belt]
        conductors[tooth, 1, phase] -= sign
        conductors[(tooth + 1) % slots, 0, phase] += sign
    return WindingTable(slots, poles, 2, conductors, 0.0, float(np.abs(conductors[..., 0]).sum()))


@pytest.mark.parametrize(
    ("slots", "poles", "sector"),
    [(9, 6, 2), (9, 8, 8), (9, 10, 10), (12, 8, 2), (12, 10, 5), (12, 14, 7), (18, 16, 8)],
)
def test_smallest_sector_of_tooth_coils(slots: int, poles: int, sector: int) -> None:
    """With t = gcd(slots, pole pairs): 2p/t poles, half of it where slots/t is even (and then odd).

    Source: the star of slots (textbook matter): a base winding of slots/t slots repeats t times;
    with an even number of slots its second half is the first one reversed.
    """
    t = math.gcd(slots, poles // 2)
    assert sector == poles // t // (1 if (slots // t) % 2 else 2)
    assert smallest_sector(tooth_table(slots, poles)) == sector


def test_a_rotor_of_unlike_poles_asks_for_its_period() -> None:
    """The sector is a multiple of the rotor's period; all poles where nothing smaller fits."""
    assert smallest_sector(tooth_table(9, 6), 2) == 2
    assert smallest_sector(tooth_table(12, 10), 2) == 10
    assert smallest_sector(tooth_table(9, 6), 6) == 6


def test_repeats_with_the_sign_of_the_poles() -> None:
    """12 slots, 10 poles: five poles on all currents are reversed; one pole has no whole slots."""
    table = tooth_table(12, 10)
    assert repeats(table, 5)
    assert repeats(table, 10)
    assert not any(repeats(table, poles) for poles in (1, 2, 3, 4, 6))


def test_ripple_of_unlike_poles() -> None:
    """Whole q: always. 12/10 reverses after 5 poles, which exchanges two kinds; 9/8 never does.

    All balanced pairs with like poles (the usual claim).
    """
    for poles in range(2, 21, 2):
        for slots in range(3, 73, 3):
            if slots % (3 * math.gcd(slots, poles // 2)) == 0:
                assert ripples_in_sixty_degrees(slots, poles, 1)
    for period in (1, 2, 4):
        assert ripples_in_sixty_degrees(24, 4, period)
    assert ripples_in_sixty_degrees(12, 10, 2)
    assert not ripples_in_sixty_degrees(12, 10, 10)
    assert not ripples_in_sixty_degrees(9, 8, 2)
    assert not ripples_in_sixty_degrees(18, 4, 2)


def total(regions: tuple[Region, ...]) -> float:
    paths = [path for region in regions for path in (region.outer, *region.holes)]
    return sum(area(path) for path in paths)


@pytest.mark.parametrize("poles", [1, 2, 4])
def test_any_sector_is_tiled(poles: int) -> None:
    """Areas sum to the sector's between shaft centre and circle, circle and outer radius."""
    design = plain_design()
    section = cross_section(design, poles)
    assert section.sector_poles == poles
    circle, outer = section.circle_radius, section.stator_outer_radius
    half = 0.5 * section.sector_angle
    assert total(section.rotor) == pytest.approx(half * circle**2, rel=TILING)
    assert total(section.stator) == pytest.approx(half * (outer**2 - circle**2), rel=TILING)
    assert len(section.ribs) == poles * len(cross_section(design).ribs)
    assert sum(r.name.startswith("slot_") for r in section.stator) % section.sector_slots == 0


def test_poles_of_a_sector_are_named() -> None:
    """The first pole has plain names, pole k `p<k>_`; the rotor's cell is the first pole again."""
    one, two = cross_section(plain_design()), cross_section(plain_design(), 2)
    assert {base_name(r.name) for r in two.rotor} == {r.name for r in one.rotor}
    assert {pole_of(r.name) for r in two.rotor} == {1, 2}
    assert [r.name for r in rotor_iron(two)] == ["rotor_iron", "p2_rotor_iron"]
    assert rotor_cell(two).rotor == one.rotor
    assert rotor_cell(two).ribs == one.ribs
    assert rotor_cell(one) is one


def test_a_sector_that_does_not_stand_for_the_machine_is_refused() -> None:
    """Three of four poles do not tile the circle."""
    with pytest.raises(ValueError, match="sector of 3 poles"):
        cross_section(plain_design(), 3)
