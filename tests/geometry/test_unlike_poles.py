"""Halves of a pole and neighbouring poles that differ, against mirror images and turned poles."""

import cmath
import math

import numpy as np
import pytest

from lamwright.geometry.checks import check_design
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area
from lamwright.geometry.design import OtherHalfDesign
from lamwright.geometry.remedies import with_value
from lamwright.geometry.rotor import rotor_frame, rotor_regions
from lamwright.geometry.rotor_checks import rotor_faults
from lamwright.geometry.unlike_poles import clockwise_half
from tests.outlines import SAG, plain_design, polygon, turns
from tests.random_designs import drawn_design

MM = 1e-3
NAMES = ("end_angle_deg", "tangential_rib_mm")


def with_barriers(design, barriers, **rotor):
    part = design.rotor.model_copy(update={"barrier": tuple(barriers), **rotor})
    return design.model_copy(update={"rotor": part})


def unlike(barrier, **values):
    return barrier.model_copy(update={"other_half": OtherHalfDesign(**values)})


def swapped(barrier):
    """The mirror image: what the halves state changed over."""
    if barrier.other_half is None:
        return barrier
    other = {
        name: getattr(barrier, name) for name, value in barrier.other_half if value is not None
    }
    return clockwise_half(barrier).model_copy(update={"other_half": OtherHalfDesign(**other)})


def unlike_designs(count, seed):
    """Valid random designs whose barriers end unlike on the two halves."""
    rng = np.random.default_rng(seed)
    found = []
    while len(found) < count:
        design = drawn_design(rng)
        barriers = [
            unlike(
                barrier,
                end_angle_deg=barrier.end_angle_deg * float(rng.uniform(0.85, 1.15)),
                tangential_rib_mm=barrier.tangential_rib_mm * float(rng.uniform(1.0, 1.5)),
            )
            for barrier in design.rotor.barrier
        ]
        design = with_barriers(design, barriers)
        if not rotor_faults(design):
            found.append(design)
    return found


def test_random_unlike_halves_join_smoothly_and_tile_the_pole():
    """Turns under 1e-9 rad everywhere, the q axis included; areas make up the sector to 1e-9.

    Each tangential rib by the distance of the cavity's polygon to the rim, to 2 SAG.
    """
    for design in unlike_designs(15, seed=8):
        regions, ribs = rotor_regions(design)
        frame = rotor_frame(design)
        for number, barrier in enumerate(design.rotor.barrier, start=1):
            paths = [r.outer for r in regions if r.name.split("_")[:2] == ["barrier", f"{number}"]]
            assert max(abs(turn) for path in paths for turn in turns(path)) < 1e-9
            stated = [clockwise_half(barrier).tangential_rib_mm, barrier.tangential_rib_mm]
            for rib, width, path in zip(
                ribs_of(ribs, number), stated, (paths[0], paths[-1]), strict=True
            ):
                assert rib.width == pytest.approx(MM * width, rel=1e-9)
                assert to_rim(path, frame, rib) == pytest.approx(MM * width, abs=2.0 * SAG)
        net = sum(area(r.outer) + sum(area(hole) for hole in r.holes) for r in regions)
        whole = 0.5 * math.pi / design.pole_pairs * frame.circle_radius**2
        assert net == pytest.approx(whole, rel=1e-9)


def ribs_of(ribs, number):
    return [rib for rib in ribs if rib.kind == "tangential" and rib.barrier == number]


def to_rim(path, frame, rib):
    """Distance to the rim of that half of a cavity that the rib bounds, by its polygon."""
    z = np.array([complex(*xy) for xy in polygon(path).exterior.coords])
    local = z * cmath.exp(-1j * frame.q_axis)
    side = (rib.start * cmath.exp(-1j * frame.q_axis)).imag
    return frame.rotor_radius - float(np.abs(z[local.imag * side > 0.0]).max())


def test_a_mirrored_design_is_the_mirror_image():
    """Halves changed over: every cavity is the other's mirror image in the q axis, to 1e-15 m."""
    for design in unlike_designs(8, seed=9):
        frame = rotor_frame(design)
        other = with_barriers(design, map(swapped, design.rotor.barrier))
        again = with_barriers(other, map(swapped, other.rotor.barrier))
        assert rotor_regions(again) == rotor_regions(design)  # mirrored twice is the same
        one, two = (points(d, frame) for d in (design, other))
        assert len(one) == len(two)
        for point in one:
            assert min(abs(two - point.conjugate())) < 1e-15


def points(design, frame):
    """Corners of all cavities in the q axis's frame."""
    turn = cmath.exp(-1j * frame.q_axis)
    regions, _ = rotor_regions(design)
    cavities = [region for region in regions if region.name.startswith("barrier_")]
    return np.array([edge.start * turn for region in cavities for edge in region.outer.edges])


def test_a_half_that_states_the_same_changes_nothing():
    """An override of equal value draws the same outline to the last bit."""
    design = plain_design()
    same = [unlike(b, **{name: getattr(b, name) for name in NAMES}) for b in design.rotor.barrier]
    assert rotor_regions(with_barriers(design, same)) == rotor_regions(design)


def alternating(**changes):
    """The plain machine whose every second pole has two barriers of other angles."""
    design = plain_design()
    own = design.rotor.barrier
    others = (
        own[0].model_copy(update={"end_angle_deg": 17.0}),
        own[1].model_copy(update={"end_angle_deg": 29.0, **changes}),
    )
    return with_barriers(design, own, alternate_barrier=others), others


def test_every_second_pole_is_the_other_one_turned():
    """Period and sector of two poles; pole 2 is a machine of such poles turned by a pole pitch."""
    design, others = alternating()
    section = cross_section(design)
    assert (section.rotor_period, section.sector_poles) == (2, 2)
    alone, alone_ribs = rotor_regions(with_barriers(design, others))
    second = [region for region in section.rotor if region.name.startswith("p2_")]
    assert [region.name for region in second] == [f"p2_{region.name}" for region in alone]
    turn = cmath.exp(1j * math.pi / design.pole_pairs)
    for region, own in zip(second, alone, strict=True):
        ends = [edge.start * turn for edge in own.outer.edges]
        assert [edge.start for edge in region.outer.edges] == pytest.approx(ends, abs=1e-15)
    assert [r.name for r in section.ribs if r.name.startswith("p2_")] == [
        f"p2_{rib.name}" for rib in alone_ribs
    ]
    net = sum(area(r.outer) + sum(area(hole) for hole in r.holes) for r in section.rotor)
    assert net == pytest.approx(0.25 * 2.0 * math.pi * section.circle_radius**2, rel=1e-9)


@pytest.mark.parametrize(
    ("name", "value", "code", "keys"),
    [
        ("end_angle_deg", 44.5, "side_close", {"other_half.end_angle_deg"}),
        ("end_angle_deg", 50.0, "end_beyond", {"other_half.end_angle_deg"}),
        ("end_angle_deg", 25.5, "carrier_thin", {"other_half.end_angle_deg", "depth_mm"}),
        ("tangential_rib_mm", 0.2, "tangential_rib_thin", {"other_half.tangential_rib_mm"}),
        ("arm_angle_deg", 20.0, "straight_only", {"other_half.arm_angle_deg"}),
    ],
)
def test_faults_of_the_clockwise_half_name_its_own_keys(name, value, code, keys):
    """The fault is that of a barrier with both halves so; its remedy mends it."""
    design = plain_design()
    barriers = list(design.rotor.barrier)
    barriers[2] = unlike(barriers[2], **{name: value})
    design = with_barriers(design, barriers)
    (finding,) = check_design(design)
    assert finding.code == code
    assert finding.key in {f"rotor.barrier[3].{key}" for key in keys}
    assert finding.fault.endswith("(clockwise half)")
    if code == "end_beyond":
        low, high = (float(word) for word in finding.remedy.split()[1::2])
        for angle in (low, 0.5 * (low + high), high):
            assert not rotor_faults(with_value(design, finding.key, angle))


def test_faults_of_every_second_pole_name_its_own_keys():
    """A barrier beyond its pole: the key is that of the alternate barrier, its range mends it."""
    design, _ = alternating(end_angle_deg=60.0)
    (finding,) = check_design(design)
    assert finding.key == "rotor.alternate_barrier[2].end_angle_deg"
    assert finding.code == "end_beyond"
    low, high = (float(word) for word in finding.remedy.split()[1::2])
    for angle in (low, high):
        assert not rotor_faults(with_value(design, finding.key, angle))
