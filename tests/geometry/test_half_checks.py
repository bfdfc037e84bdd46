"""Faults of a barrier's sides and end: each on its key, with a remedy that mends it."""

import pytest

from lamwright.geometry.checks import check_design
from lamwright.geometry.design import BarrierDesign
from lamwright.geometry.remedies import with_value
from tests.geometry.test_checks import suggested
from tests.outlines import plain_design


def design(shape, **changes):
    """The plain machine with one barrier."""
    base = {
        "end_angle_deg": 30.0,
        "thickness_mm": 3.0,
        "depth_mm": 10.0,
        "tangential_rib_mm": 0.6,
        "arm_angle_deg": 35.0 if shape == "straight" else None,
    }
    barrier = BarrierDesign(shape=shape, **(base | changes))
    plain = plain_design()
    return plain.model_copy(
        update={"rotor": plain.rotor.model_copy(update={"barrier": (barrier,)})}
    )


FLAT = {"end_shape": "flat"}
RANGES = [
    (design("arc", end_thickness_mm=0.3), "end_thin", "end_thickness_mm"),
    (design("vee", bend_radius_mm=0.1), "bend_tight", "bend_radius_mm"),
    (design("hyperbolic", **FLAT, end_fillet_mm=0.1), "end_fillet_small", "end_fillet_mm"),
    (design("straight", **FLAT, end_fillet_mm=1.6), "no_outline", "end_fillet_mm"),
    (design("arc", end_shape="square", end_fillet_mm=1.6), "no_outline", "end_fillet_mm"),
    (
        design("vee", **FLAT, tangential_rib_inner_mm=0.5),
        "rib_inner_thin",
        "tangential_rib_inner_mm",
    ),
    (
        design("streamline", **FLAT, tangential_rib_inner_mm=3.0),
        "no_outline",
        "tangential_rib_inner_mm",
    ),
    (design("streamline", depth_mm=25.0), "no_outline", "depth_mm"),
    (design("hyperbolic", depth_mm=4.5), "barrier_flat", "depth_mm"),
    (design("hyperbolic", end_angle_deg=43.0, depth_mm=20.0), "side_close", "end_angle_deg"),
]
OTHERS = [
    (design("vee", arm_angle_deg=40.0), "straight_only", 'remove it, or set shape = "straight"'),
    (
        design("arc", bend_radius_mm=2.0),
        "straight_only",
        'remove it, or set shape = "straight" or "vee"',
    ),
    (
        design("arc", end_fillet_mm=0.5),
        "end_fillet_only",
        'remove it, or set end_shape = "flat" or "square"',
    ),
    (
        design("arc", end_shape="square", tangential_rib_inner_mm=0.8),
        "flat_only",
        'remove it, or set end_shape = "flat"',
    ),
]


@pytest.mark.parametrize(("machine", "code", "key"), RANGES, ids=[f"{c} {k}" for _, c, k in RANGES])
def test_a_fault_is_mended_by_the_range_it_states(machine, code, key):
    """Lower end, upper end and middle of the range each make the finding go away, and no other."""
    findings = check_design(machine)
    finding = next(one for one in findings if one.code == code)
    assert finding.key == f"rotor.barrier[1].{key}"
    values = suggested(finding.remedy)
    assert values, finding.remedy
    for value in values:
        left = check_design(with_value(machine, finding.key, value))
        assert code not in {one.code for one in left}, (value, left)
        assert {one.code for one in left} <= {one.code for one in findings}


@pytest.mark.parametrize(("machine", "code", "remedy"), OTHERS, ids=[c for _, c, _ in OTHERS])
def test_a_key_of_another_shape_or_end_is_refused(machine, code, remedy):
    """No key does nothing: the text says whose it is."""
    (finding,) = check_design(machine)
    assert finding.code == code
    assert finding.remedy == remedy
