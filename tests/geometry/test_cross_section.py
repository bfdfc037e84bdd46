"""The cross-section: both parts of every design tile their sector and are as thick as stated."""

import cmath
import math
from collections import Counter
from itertools import combinations

import numpy as np
import pytest
import shapely

from lamwright.geometry.barrier_checks import rotor_faults
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area, reversed_edge
from lamwright.geometry.design_file import read_design
from lamwright.geometry.errors import GeometryError
from lamwright.geometry.remedies import with_value
from tests.outlines import DESIGNS, b1_design, plain_design, polygon, turns
from tests.random_designs import drawn_design, random_design

from .test_checks import shaken

MM = 1e-3
POLYGON_TOL = 3e-7  # m: two polygons, each within 1e-7 m of its arcs
SHIPPED = sorted(DESIGNS.glob("*.toml"))


def net_area(region):
    return area(region.outer) + sum(area(hole) for hole in region.holes)


def assert_tiles(regions, expected):
    """Areas add up, every path closes, every edge is met once or once in each sense."""
    assert sum(net_area(region) for region in regions) == pytest.approx(expected, rel=1e-12)
    edges = Counter()
    for region in regions:
        for path in (region.outer, *region.holes):
            ends = [edge.end for edge in path.edges]
            assert [edge.start for edge in path.edges] == [ends[-1], *ends[:-1]]
            edges.update(path.edges)
    assert set(edges.values()) == {1}
    return [edge for edge in edges if reversed_edge(edge) not in edges]


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: path.stem)
def test_shipped_designs_tile_their_sectors(path):
    """Rotor and stator fill pi r^2 / poles and the ring outside it; only the rim is not shared.

    What is left alone lies on the side rays or on a bounding circle.
    """
    section = cross_section(read_design(path))
    inner = section.circle_radius**2
    pole = math.pi / (2 * section.pole_pairs)
    alone = assert_tiles(section.rotor, pole * inner)
    alone += assert_tiles(section.stator, pole * (section.stator_outer_radius**2 - inner))
    side = cmath.exp(1j * math.pi / section.pole_pairs)
    radii = (section.circle_radius, section.stator_outer_radius)
    for edge in alone:
        middle = edge.point(0.5)
        off_rays = min(abs(middle.imag), abs((middle / side).imag))
        off_circles = min(abs(abs(middle) - radius) for radius in radii)
        assert min(off_rays, off_circles) < 1e-15


def test_radii_are_those_of_the_design():
    """Bore 82, gap 0.4, shaft 26, outer diameter 140, stack 100 mm of the file, in m; rounding."""
    section = cross_section(plain_design())
    assert section.rotor_radius == pytest.approx(0.0406, rel=1e-14)
    assert section.shaft_radius == pytest.approx(0.013, rel=1e-14)
    assert section.stator_bore_radius == pytest.approx(0.041, rel=1e-14)
    assert section.stator_outer_radius == pytest.approx(0.07, rel=1e-14)
    assert section.stack_length == pytest.approx(0.1, rel=1e-14)
    assert section.gap == pytest.approx(0.0004, rel=1e-11)
    assert (section.pole_pairs, section.slots) == (2, 24)


def test_rotor_and_stator_meet_on_one_circle():
    """The turning circle of both parts and of the section's own property is the same number."""
    for design in (plain_design(), b1_design()):
        section = cross_section(design)
        for regions in (section.rotor, section.stator):
            (gap,) = [region for region in regions if region.name.startswith("gap")]
            (circle,) = [edge for edge in gap.outer.edges if _is_on(edge, section)]
            assert abs(abs(circle.start) - section.circle_radius) < 1e-16


def _is_on(edge, section):
    return not edge.is_line and abs(abs(edge.point(0.5)) - section.circle_radius) < 1e-12


def test_a_design_that_cannot_be_drawn_raises_all_findings():
    """The error carries each finding and its text one line each."""
    design = with_value(plain_design(), "rotor.barrier[2].depth_mm", 5.0)
    design = with_value(design, "stator.slot_opening_mm", 6.0)
    with pytest.raises(GeometryError, match="barriers 1 and 2 run into each other") as caught:
        cross_section(design)
    assert [one.code for one in caught.value.findings] == ["opening_wide", "carrier_thin"]
    assert len(str(caught.value).splitlines()) == 2


@pytest.mark.parametrize("count", [40, pytest.param(120, marks=pytest.mark.slow)])
def test_every_random_design_is_refused_or_sound(count):
    """Draws, half of them shaken: refused with a fault, or as thick as stated everywhere.

    Measured on fine polygons, independently of the checks' own distances: no outline crosses
    itself, cavities stay apart by the sheet's thickness at least, off the side rays and off the
    bore; the thinnest place to the rim is the tangential rib, that between cavities of a barrier
    the radial rib, at most 5 % wider than stated. Outlines turn by 0 at every joint.
    """
    rng, refused, sound = np.random.default_rng(41), 0, 0
    for k in range(count):
        design = drawn_design(rng)
        if k % 2:
            design = shaken(rng, design)
        if rotor_faults(design):
            refused += 1
            continue
        try:
            section = cross_section(design)
        except GeometryError:
            refused += 1  # the stator
            continue
        assert_sound(design, section)
        sound += 1
    assert refused > count / 6
    assert sound > count / 3


def assert_sound(design, section):
    sheet = design.rotor.sheet_thickness_mm * MM
    cavities = {r.name: r.outer for r in section.rotor if r.name.startswith("barrier")}
    outlines = {name: polygon(path) for name, path in cavities.items()}
    assert all(one.is_valid for one in outlines.values())
    assert max(abs(turn) for path in cavities.values() for turn in turns(path)) < 1e-9
    far, side = 2.0 * section.rotor_radius, cmath.exp(1j * math.pi / section.pole_pairs)
    rays = [shapely.LineString([(0.0, 0.0), (far * s.real, far * s.imag)]) for s in (1 + 0j, side)]
    for name, one in outlines.items():
        assert min(one.distance(ray) for ray in rays) > sheet - POLYGON_TOL
        assert one.distance(shapely.Point(0.0, 0.0)) > section.shaft_radius + sheet - POLYGON_TOL
        reach = np.hypot(*np.array(one.exterior.coords).T).max()
        barrier = design.rotor.barrier[int(name.split("_")[1]) - 1]
        if not name.endswith("_b") or barrier.radial_ribs == 1:
            thinnest = section.rotor_radius - reach
            assert thinnest == pytest.approx(barrier.tangential_rib_mm * MM, abs=POLYGON_TOL)
    for (name_1, one), (name_2, other) in combinations(outlines.items(), 2):
        gap = one.distance(other)
        assert gap > sheet - POLYGON_TOL
        number = name_1.split("_")[1]
        if name_2.split("_")[1] == number and ord(name_2[-1]) - ord(name_1[-1]) == 1:
            stated = design.rotor.barrier[int(number) - 1].radial_rib_mm * MM
            assert stated - POLYGON_TOL < gap < 1.05 * stated + POLYGON_TOL
            (rib,) = [r for r in section.ribs if r.name == f"radial_{number}_{name_1[-1]}"]
            assert gap == pytest.approx(rib.width, abs=POLYGON_TOL)


def test_random_designs_are_varied_and_repeatable():
    """Of 60 valid designs every kind occurs; the same state of the generator gives the same."""
    designs = [random_design(np.random.default_rng([51, k])) for k in range(60)]
    assert designs[7] == random_design(np.random.default_rng([51, 7]))
    barriers = [barrier for design in designs for barrier in design.rotor.barrier]
    assert {barrier.shape for barrier in barriers} == {"arc", "straight"}
    assert {barrier.radial_ribs for barrier in barriers} == {0, 1, 2}
    assert {len(design.rotor.barrier) for design in designs} == {1, 2, 3, 4, 5, 6}
    assert {design.rotor.poles for design in designs} == {4, 6, 8}
    per_pole = {(d.stator.slots, d.rotor.poles) for d in designs}
    assert {slots // (3 * poles) for slots, poles in per_pole} == {1, 2, 3, 4}
    assert {design.winding.layers for design in designs} == {1, 2}
    chorded = [d.winding.coil_span_slots < d.stator.slots // d.rotor.poles for d in designs]
    assert {True, False} == set(chorded)
