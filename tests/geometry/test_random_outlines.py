"""20 000 random rotors of every barrier family and end: drawn soundly, or refused with a reason.

What is drawn is measured anew here, by polygons (shapely) and by formulas of this file, not by the
checks that let it pass. A polygon's chords lie within a stated sag of the arcs.
"""

import cmath
import math
from collections import Counter
from itertools import combinations, pairwise

import numpy as np
import pytest
import shapely

from lamwright.geometry.checks import check_design
from lamwright.geometry.curves import area
from lamwright.geometry.rotor import rotor_frame, rotor_regions
from lamwright.geometry.rotor_checks import rotor_faults
from tests.outlines import polygon, turns
from tests.random_outlines import ENDS, FAMILIES, drawn_rotor

MM = 1e-3
SAG = 2e-6  # of the rotor's radius: 0.04 um on the smallest rotor drawn, 0.6 um on the largest
TANGENT_TOL = 1e-9  # rad
RIB_TOL = 1e-12  # m, rounding
LEAST_SHARE = 0.3  # of valid ones in each family and each end
RANGES_EACH = 100  # of the refused ones also the search for ranges is run: it takes a second


def test_a_part_of_the_random_outlines_is_sound_or_refused():
    """The first 150 of the long run; see there."""
    _run(150)


@pytest.mark.slow
def test_all_random_outlines_are_sound_or_refused():
    """No exception; valid outlines closed, simple, tangent, ribs as stated, sector tiled to 1e-9.

    At least three tenths of each family's and each end's rotors are valid, so that the property is
    not kept by refusing.
    """
    _run(20_000)


def _run(count):
    rng = np.random.default_rng(20261201)
    valid, drawn, refused = Counter(), Counter(), Counter()
    for number in range(count):
        family = FAMILIES[number % len(FAMILIES)]
        design = drawn_rotor(rng, family)
        ends = {barrier.end_shape for barrier in design.rotor.barrier}
        drawn.update((family, *ends))
        faults = rotor_faults(design)
        if faults:
            _check_refusal(design, faults, with_ranges=number % RANGES_EACH == 0)
            refused.update({fault.code for fault in faults})
            continue
        _check_outline(design)
        valid.update((family, *ends))
    shares = {kind: valid[kind] / drawn[kind] for kind in (*FAMILIES, *ENDS)}
    print({kind: f"{valid[kind]} of {drawn[kind]}" for kind in shares}, refused.most_common())
    assert min(shares.values()) > LEAST_SHARE, shares


def _check_refusal(design, faults, *, with_ranges):
    """Every fault has a text, keys of the rotor, and says how much is missing."""
    for fault in faults:
        assert fault.text
        assert fault.lack > 0.0
        assert all(key.startswith("rotor.barrier[") for key in fault.keys), fault
    if with_ranges:
        findings = check_design(design)
        assert {fault.code for fault in faults} <= {finding.code for finding in findings}
        assert all(finding.remedy for finding in findings)


def _check_outline(design):
    regions, ribs = rotor_regions(design)
    frame = rotor_frame(design)
    sag, sheet = SAG * frame.rotor_radius, MM * design.rotor.sheet_thickness_mm
    cavities = {r.name: r.outer for r in regions if r.name.startswith("barrier")}
    for path in cavities.values():
        ends = [edge.end for edge in path.edges]
        assert [edge.start for edge in path.edges] == [ends[-1], *ends[:-1]]
        assert max(map(abs, turns(path))) < TANGENT_TOL
        assert area(path) > 0.0
    shapes = {name: polygon(path, sag) for name, path in cavities.items()}
    assert all(shape.is_valid for shape in shapes.values())
    _check_tiling(regions, frame, design.rotor.poles)
    _check_iron(shapes, frame, sheet - 2.0 * sag)
    _check_ribs(design, cavities, shapes, ribs, sag)


def _check_tiling(regions, frame, poles):
    """Exact areas add up to the sector; no cavity overlaps another, see `_check_iron`."""
    total = sum(area(r.outer) + sum(map(area, r.holes)) for r in regions)
    sector = math.pi * frame.circle_radius**2 / poles
    assert total == pytest.approx(sector, rel=1e-9)


def _check_iron(shapes, frame, least):
    """Iron no thinner than the sheet between cavities, to the d axes and to the bore."""
    far = 2.0 * frame.rotor_radius * cmath.exp(2j * frame.q_axis)
    d_axes = shapely.MultiLineString(
        [[(0.0, 0.0), (abs(far), 0.0)], [(0.0, 0.0), (far.real, far.imag)]]
    )
    axis = shapely.Point(0.0, 0.0)
    for shape in shapes.values():
        assert shape.distance(d_axes) > least
        assert shape.distance(axis) - frame.shaft_radius > least
    for first, second in combinations(shapes.values(), 2):
        assert first.distance(second) > least


def _check_ribs(design, cavities, shapes, ribs, sag):
    """Each rib is nowhere thinner than stated, and as wide as its report says."""
    radius = rotor_frame(design).rotor_radius
    for number, barrier in enumerate(design.rotor.barrier, start=1):
        own = [
            n for n in cavities if n == f"barrier_{number}" or n.startswith(f"barrier_{number}_")
        ]
        reach = max(_farthest(edge) for name in own for edge in cavities[name].edges)
        assert radius - reach == pytest.approx(MM * barrier.tangential_rib_mm, abs=RIB_TOL)
        for first, second in pairwise(own):
            least = shapes[first].distance(shapes[second])
            assert least > MM * barrier.radial_rib_mm - 2.0 * sag
    for rib in ribs:
        barrier = design.rotor.barrier[rib.barrier - 1]
        stated = barrier.tangential_rib_mm if rib.kind == "tangential" else barrier.radial_rib_mm
        assert rib.width > MM * stated - RIB_TOL
        assert rib.kind == "radial" or rib.width < MM * stated + RIB_TOL


def _farthest(edge):
    """Largest distance of an edge from the shaft axis: at an end, or on the ray of its centre."""
    ends = max(abs(edge.start), abs(edge.end))
    if edge.is_line or edge.centre == 0.0:
        return ends
    ray = edge.centre / abs(edge.centre)
    middle = (edge.point(0.5) - edge.centre) / ray
    is_on_arc = abs(cmath.phase(middle)) < 0.5 * abs(edge.sweep)
    return abs(edge.centre) + edge.radius if is_on_arc else ends
