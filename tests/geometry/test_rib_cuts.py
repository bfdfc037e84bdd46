"""Radial ribs anywhere on a barrier, measured on the outline by polygons (shapely).

A polygon's chords lie within SAG = 1e-7 m of their arcs, so a distance between two polygons errs
by at most twice that.
"""

import math
from itertools import pairwise

import numpy as np
import pytest

from lamwright.geometry.bands import band_of
from lamwright.geometry.cavities import cut_barrier
from lamwright.geometry.checks import check_design
from lamwright.geometry.curves import area
from lamwright.geometry.design import BarrierDesign
from lamwright.geometry.half_barrier import half_barrier
from lamwright.geometry.mid_lines import MM
from lamwright.geometry.rib_cuts import rib_cuts
from lamwright.geometry.rotor import rotor_regions
from lamwright.geometry.rotor_checks import rotor_faults
from tests.outlines import SAG, b1_barrier, plain_design, polygon, turns
from tests.random_designs import drawn_design

R = 39.5 * MM
MOST_DRAWS = 4000
STRAIGHT = BarrierDesign(
    shape="straight",
    end_angle_deg=33.0,
    thickness_mm=4.0,
    depth_mm=18.0,
    tangential_rib_mm=0.6,
    arm_angle_deg=30.0,
    bend_radius_mm=3.0,
)


def cut(barrier, **changes):
    barrier = barrier.model_copy(update=changes)
    half = half_barrier(barrier, R, 2)
    return cut_barrier(band_of(half, half), rib_cuts(barrier))


def ribs(*places, width=0.8, fillet=0.5, tilt=0.0):
    return {
        "radial_ribs": len(places),
        "radial_rib_places_mm": places,
        "radial_rib_mm": width,
        "fillet_mm": fillet,
        "radial_rib_tilt_deg": tilt,
    }


def ribbed_designs(count, seed):
    """Valid random designs of all families, 0 to 4 ribs a barrier at random places and tilts."""
    rng = np.random.default_rng(seed)
    found = []
    for _ in range(MOST_DRAWS):
        if len(found) == count:
            return found
        design = drawn_design(rng)
        barriers = [ribbed(rng, barrier) for barrier in reshaped(rng, design.rotor.barrier)]
        rotor = design.rotor.model_copy(update={"barrier": tuple(barriers)})
        design = design.model_copy(update={"rotor": rotor})
        if any(barrier.radial_ribs for barrier in barriers) and not rotor_faults(design):
            found.append(design)
    raise AssertionError(f"only {len(found)} valid designs in {MOST_DRAWS} draws")


def reshaped(rng, barriers):
    """The barriers in one of the families, maybe thicker or thinner at their ends."""
    shape = str(rng.choice([barriers[0].shape, "vee", "hyperbolic", "streamline"]))
    if shape == barriers[0].shape:
        return barriers
    changes = {"shape": shape, "arm_angle_deg": None, "bend_radius_mm": None}
    ends = [barrier.thickness_mm * float(rng.uniform(0.7, 1.4)) for barrier in barriers]
    if shape == "vee":
        ends = [None] * len(ends)
    return [
        barrier.model_copy(update={**changes, "end_thickness_mm": end})
        for barrier, end in zip(barriers, ends, strict=True)
    ]


def ribbed(rng, barrier):
    height = (barrier.depth_mm + barrier.thickness_mm) * rng.uniform(0.2, 0.9)
    number = int(rng.integers(0, 5))
    places = rng.uniform(-height, height, number)
    if number and rng.random() < 0.5:  # symmetric, with one on the axis where they are odd
        half = np.abs(places[: number // 2])
        places = np.concatenate([half, -half, np.zeros(number % 2)])
    full = 0.5 * barrier.thickness_mm
    return barrier.model_copy(
        update={
            **ribs(
                *(round(float(place), 3) for place in places),
                width=round(float(rng.uniform(0.5, 1.5)), 3),
                fillet=full
                if rng.random() < 0.4
                else round(float(full * rng.uniform(0.3, 0.9)), 3),
                tilt=round(float(rng.uniform(-50.0, 50.0)), 2) if np.any(places) else 0.0,
            ),
            "radial_rib_offset_mm": None,
        }
    )


@pytest.mark.parametrize("count", [5, pytest.param(12, marks=pytest.mark.slow)])
def test_random_ribs_measure_what_is_stated_and_tile_the_pole(count):
    """Random valid designs: cavities simple, smooth, apart by just the ribs' width.

    Each rib by the distance of two polygons, to 2 SAG; corners turn by under 1e-9 rad; the areas
    of all regions make up the sector pi r^2 / (2 p) to 1e-9 of it.
    """
    for design in ribbed_designs(count, seed=5):
        regions, found = rotor_regions(design)
        for number, barrier in enumerate(design.rotor.barrier, start=1):
            own = [r.outer for r in regions if r.name.split("_")[:2] == ["barrier", f"{number}"]]
            assert len(own) == barrier.radial_ribs + 1
            shapes = [polygon(path) for path in own]
            assert all(shape.is_valid for shape in shapes)
            assert all(area(path) > 0.0 for path in own)
            assert max(abs(turn) for path in own for turn in turns(path)) < 1e-9
            radial = [rib for rib in found if rib.name.startswith(f"radial_{number}_")]
            assert len(radial) == barrier.radial_ribs
            for rib, pair in zip(radial, pairwise(shapes), strict=True):
                width = MM * barrier.radial_rib_mm
                assert rib.width == pytest.approx(width, abs=1e-12)
                assert pair[0].distance(pair[1]) == pytest.approx(width, abs=2.0 * SAG)
        radius = max(abs(edge.start) for edge in regions[-1].outer.edges)
        net = sum(area(r.outer) + sum(area(hole) for hole in r.holes) for r in regions)
        assert net == pytest.approx(0.5 * math.pi / design.pole_pairs * radius**2, rel=1e-9)


@pytest.mark.parametrize("fillet", [0.5, 1.0])
@pytest.mark.parametrize("tilt", [0.0, 20.0, -35.0])
@pytest.mark.parametrize("barrier", [b1_barrier(), STRAIGHT], ids=["arc", "straight"])
def test_symmetric_ribs_are_mirror_images_to_the_last_bit(barrier, tilt, fillet):
    """Places +-h with one tilt: cavities and ribs of one half are the other's, exactly."""
    drawn = cut(barrier, **ribs(-9.0, -4.5, 4.5, 9.0, tilt=tilt, fillet=fillet))
    for path, other in zip(drawn.cavities[:2], reversed(drawn.cavities[3:]), strict=True):
        assert {e.start for e in path.edges} == {e.start.conjugate() for e in other.edges}
    for (low, high), (start, end) in zip(drawn.ribs[:2], reversed(drawn.ribs[2:]), strict=True):
        assert (low, high) == (end.conjugate(), start.conjugate())


@pytest.mark.parametrize("place", [0.0, 2.0, 9.0, 11.0])
def test_inclined_ribs_lean_as_stated(place):
    """Positive: the rim's end leans away from the q axis on both halves; its sides to 1e-12 rad.

    The places lie on the bottom (2), over the bend (9) and on the arm (11) of the barrier.
    """
    for side in (1.0, -1.0):
        low, high = cut(STRAIGHT, **ribs(side * place, tilt=25.0)).cavities
        leans = {
            round(math.degrees(math.atan(e.direction(0.5).imag / e.direction(0.5).real)), 9)
            for path in (low, high)
            for e in path.edges
            if e.is_line and abs(e.direction(0.5).real) > 0.01
        }
        assert (side * 25.0 if place else 0.0) in leans


def test_a_full_round_on_a_slope_is_moved_to_its_width():
    """Two rounds r = t/2 whose centres lie w + 2 r apart on an arc leave just w (derived).

    On the slope the ribs' straight sides, gone in the rounds, would stand further apart.
    """
    drawn = cut(b1_barrier(), **ribs(-8.0, 8.0, width=1.2, fillet=2.5))
    for pair, rib in zip(pairwise(drawn.cavities), drawn.ribs, strict=True):
        below, above = (
            [e.centre for e in path.edges if abs(e.radius - 2.5 * MM) < 1e-12] for path in pair
        )
        gaps = [abs(p - q) for p in below for q in above]
        assert min(gaps) == pytest.approx((1.2 + 5.0) * MM, rel=1e-9)
        assert abs(rib[1] - rib[0]) == pytest.approx(1.2 * MM, abs=1e-12)


ONE = {"radial_ribs": 1, "radial_rib_mm": 1.0}
OFFSET = {"radial_rib_offset_mm": 3.0}


def changed(**changes):
    design = plain_design()
    barriers = list(design.rotor.barrier)
    barriers[2] = barriers[2].model_copy(update=changes)
    rotor = design.rotor.model_copy(update={"barrier": tuple(barriers)})
    return design.model_copy(update={"rotor": rotor})


@pytest.mark.parametrize(
    ("changes", "code", "key"),
    [
        ({**ribs(0.0), **OFFSET}, "radial_offset_idle", "radial_rib_offset_mm"),
        ({**ONE, **OFFSET}, "radial_offset_idle", "radial_rib_offset_mm"),
        (OFFSET, "radial_offset_idle", "radial_rib_offset_mm"),
        ({**ribs(-3.0, 3.0), **OFFSET}, "radial_offset_idle", "radial_rib_offset_mm"),
        ({**ONE, "radial_rib_tilt_deg": 9.0}, "radial_tilt_idle", "radial_rib_tilt_deg"),
        (ribs(0.0, tilt=9.0), "radial_tilt_idle", "radial_rib_tilt_deg"),
        ({**ribs(-3.0, 3.0), "radial_ribs": 3}, "radial_places_count", "radial_ribs"),
        ({"radial_ribs": 4, "radial_rib_mm": 1.0}, "radial_places_missing", "radial_ribs"),
        (ribs(2.0, 3.0), "radial_ribs_close", "radial_rib_places_mm[2]"),
        (ribs(-40.0, 3.0), "radial_rib_reach", "radial_rib_places_mm[1]"),
        (ribs(3.0, -40.0), "radial_rib_reach", "radial_rib_places_mm[2]"),
        (ribs(3.0, tilt=89.0), "radial_rib_reach", "radial_rib_places_mm[1]"),
    ],
)
def test_faults_of_ribs_have_their_code_key_and_a_remedy(changes, code, key):
    """Codes are stable, the key is the one to change; a key that would do nothing is refused."""
    (finding,) = check_design(changed(**changes))
    assert finding.code == code
    assert finding.key == f"rotor.barrier[3].{key}"
    assert finding.remedy
