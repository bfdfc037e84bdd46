"""Checks of designs: each fault is found, placed on its key, and mended by what is suggested."""

import json
import math
import re

import numpy as np
import pytest
from pydantic import ValidationError

from lamwright.geometry.checks import check_design
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import read_design
from lamwright.geometry.remedies import with_value
from lamwright.geometry.rotor_checks import rotor_faults
from tests.outlines import DESIGNS
from tests.outlines import plain_design as plain
from tests.random_designs import drawn_design, random_design

BARRIER_KEYS = (
    "end_angle_deg",
    "thickness_mm",
    "depth_mm",
    "tangential_rib_mm",
    "fillet_mm",
    "radial_rib_mm",
    "radial_rib_offset_mm",
    "arm_angle_deg",
    "bend_radius_mm",
)


def changed(design, **changes):
    """The design with values at keys, dots written as two underscores and barriers as b1, b2."""
    for key, value in changes.items():
        table, name = key.split("__")
        if table[0] == "b" and table[1:].isdigit():
            table = f"rotor.barrier[{table[1:]}]"
        design = with_value(design, f"{table}.{name}", value)
    return design


def ribbed(**changes):
    """The plain machine with two radial ribs in its innermost barrier."""
    ribs = {"radial_ribs": 2, "radial_rib_mm": 0.8, "radial_rib_offset_mm": 4.0}
    return changed(plain(), **{f"b3__{k}": v for k, v in {**ribs, **changes}.items()})


def straight(**changes):
    """The plain machine with its innermost barrier straight."""
    return changed(plain(), b3__shape="straight", **changes)


def suggested(remedy):
    """The numbers of a range as `a to b`, `up to b`, `a or more`; the middle of a range too."""
    match = re.match(r"accepted (?:up to )?([\d.e+-]+)(?: to ([\d.e+-]+))?", remedy)
    if match is None:
        return []
    ends = [float(number) for number in match.groups() if number]
    return [*ends, 0.5 * sum(ends)] if len(ends) == 2 else ends


FAULTS = [
    (changed(plain(), b2__depth_mm=5.0), "carrier_thin", "rotor.barrier[2].depth_mm"),
    (changed(plain(), b2__depth_mm=6.4), "carrier_thin", "rotor.barrier[2].depth_mm"),
    (changed(plain(), b2__depth_mm=3.0), "barrier_order", "rotor.barrier[2].depth_mm"),
    (
        changed(plain(), b2__end_angle_deg=14.0),
        "ends_order",
        "rotor.barrier[2].end_angle_deg",
    ),
    (
        changed(plain(), b1__tangential_rib_mm=0.4),
        "tangential_rib_thin",
        "rotor.barrier[1].tangential_rib_mm",
    ),
    (
        changed(plain(), b3__end_angle_deg=43.0),
        "side_close",
        "rotor.barrier[3].end_angle_deg",
    ),
    (
        changed(plain(), b3__end_angle_deg=50.0),
        "end_beyond",
        "rotor.barrier[3].end_angle_deg",
    ),
    (changed(plain(), b3__depth_mm=24.0), "bore_close", "rotor.barrier[3].depth_mm"),
    (
        changed(plain(), b1__end_angle_deg=24.0),
        "barrier_flat",
        "rotor.barrier[1].end_angle_deg",
    ),
    (
        changed(plain(), b1__thickness_mm=0.3),
        "barrier_thin",
        "rotor.barrier[1].thickness_mm",
    ),
    (
        changed(plain(), b1__end_angle_deg=1.5),
        "ends_close",
        "rotor.barrier[1].end_angle_deg",
    ),
    (changed(plain(), b1__end_angle_deg=0.8), "arc_tight", "rotor.barrier[1].thickness_mm"),
    (
        changed(plain(), b3__arm_angle_deg=30.0),
        "straight_only",
        "rotor.barrier[3].arm_angle_deg",
    ),
    (
        changed(plain(), b3__bend_radius_mm=3.0),
        "straight_only",
        "rotor.barrier[3].bend_radius_mm",
    ),
    (straight(b3__arm_angle_deg=70.0), "bottom_gone", "rotor.barrier[3].arm_angle_deg"),
    (straight(b3__bend_radius_mm=40.0), "bottom_gone", "rotor.barrier[3].bend_radius_mm"),
    (straight(b3__bend_radius_mm=0.1), "bend_tight", "rotor.barrier[3].bend_radius_mm"),
    (ribbed(radial_rib_mm=None), "radial_rib_missing", "rotor.barrier[3].radial_ribs"),
    (ribbed(radial_rib_offset_mm=None), "radial_offset_missing", "rotor.barrier[3].radial_ribs"),
    (ribbed(radial_rib_mm=0.3), "radial_rib_thin", "rotor.barrier[3].radial_rib_mm"),
    (
        ribbed(radial_rib_offset_mm=30.0),
        "radial_rib_reach",
        "rotor.barrier[3].radial_rib_offset_mm",
    ),
    (
        ribbed(radial_rib_offset_mm=0.5),
        "radial_ribs_close",
        "rotor.barrier[3].radial_rib_offset_mm",
    ),
    (ribbed(fillet_mm=2.0), "fillet_large", "rotor.barrier[3].fillet_mm"),
    (ribbed(fillet_mm=1.79), "fillet_large", "rotor.barrier[3].fillet_mm"),
    (ribbed(fillet_mm=0.1), "fillet_small", "rotor.barrier[3].fillet_mm"),
    (
        changed(plain(), rotor__shaft_diameter_mm=81.0),
        "ring_thin",
        "rotor.shaft_diameter_mm",
    ),
    (changed(plain(), rotor__gap_mm=45.0), "ring_thin", "rotor.gap_mm"),
    (changed(plain(), rotor__sheet_thickness_mm=9.0), "scale", "rotor.sheet_thickness_mm"),
    (changed(plain(), stator__tooth_width_mm=0.3), "tooth_thin", "stator.tooth_width_mm"),
    (changed(plain(), stator__tooth_width_mm=10.9), "opening_wide", "stator.tooth_width_mm"),
    (
        changed(plain(), stator__slot_opening_mm=6.0),
        "opening_wide",
        "stator.slot_opening_mm",
    ),
    (
        changed(
            plain(),
            stator__tooth_width_mm=0.5,
            stator__opening_depth_mm=1.5,
            stator__slot_opening_mm=10.4,  # leaves 0.15 mm of tooth tip at the bore
        ),
        "opening_wide",
        "stator.slot_opening_mm",
    ),
    (
        changed(plain(), stator__slot_opening_mm=0.2),
        "opening_narrow",
        "stator.slot_opening_mm",
    ),
    (changed(plain(), stator__opening_depth_mm=0.1), "lip_thin", "stator.opening_depth_mm"),
    (changed(plain(), stator__slot_depth_mm=28.9), "yoke_thin", "stator.slot_depth_mm"),
    (changed(plain(), stator__slot_depth_mm=3.0), "slot_shallow", "stator.slot_depth_mm"),
    (
        changed(plain(), stator__slot_corner_radius_mm=9.0),
        "corner_large",
        "stator.slot_corner_radius_mm",
    ),
    (
        changed(plain(), stator__slot_corner_radius_mm=0.01),
        "corner_small",
        "stator.slot_corner_radius_mm",
    ),
    (
        changed(plain(), stator__wedge_depth_mm=0.01, stator__wedge_angle_deg=0.0),
        "wedge_thin",
        "stator.wedge_depth_mm",
    ),
    (changed(plain(), winding__turns_per_coil=60), "slot_fill", "winding.turns_per_coil"),
    (
        changed(plain(), winding__conductor_area_mm2=90.0),
        "slot_fill",
        "winding.conductor_area_mm2",
    ),
    (
        changed(plain(), winding__coil_span_slots=5),
        "winding_span",
        "winding.coil_span_slots",
    ),
    (
        changed(plain(), stator__slots=28, winding__layers=2),
        "winding_slots",
        "stator.slots",
    ),
    (changed(plain(), rotor__poles=5), "poles_odd", "rotor.poles"),
    (
        changed(plain(), duty__maximum_speed_rpm=1000.0),
        "speed_order",
        "duty.maximum_speed_rpm",
    ),
]


@pytest.mark.parametrize(("design", "code", "key"), FAULTS, ids=[f"{c} {k}" for _, c, k in FAULTS])
def test_a_fault_is_found_on_its_key_and_mended_by_its_remedy(design, code, key):
    """The code is stable, the key as written in the file; every suggested number mends it.

    Applied is the range's lower end, upper end and middle; after each the finding is gone and no
    other appears that was not there before.
    """
    findings = check_design(design)
    matching = [one for one in findings if one.code == code]
    assert [one.key for one in matching] == [key]
    codes = {one.code for one in findings}
    for number in suggested(matching[0].remedy):
        value = int(number) if key.endswith(("slots", "poles", "turns_per_coil")) else number
        after = check_design(with_value(design, key, value))
        assert {one.code for one in after} <= codes - {code}


def test_a_fault_that_hides_others_says_so():
    """With two more faults behind it the range mends the first and says that it is not enough."""
    design = changed(plain(), rotor__gap_mm=45.0, b1__tangential_rib_mm=0.1)
    (finding,) = check_design(design)
    assert finding.remedy.endswith(", then other values must change too")
    for value in suggested(finding.remedy):
        after = check_design(with_value(design, finding.key, value))
        assert "ring_thin" not in {one.code for one in after}


@pytest.mark.parametrize("path", sorted(DESIGNS.glob("*.toml")), ids=lambda path: path.stem)
def test_shipped_designs_have_no_finding(path):
    """What is shipped can be drawn and punched."""
    assert check_design(read_design(path)) == ()


def test_ranges_are_those_of_the_q_axis():
    """Where only the q axis binds, the range of a depth is a sum of stated values.

    Barrier 2 of the plain machine lies between barrier 1, 3.6 + 2.6 mm deep, and barrier 3 at
    18 mm, with a sheet of 0.5 mm of iron either side of its own 3.4 mm: 6.7 to 14.1.
    """
    (finding,) = check_design(changed(plain(), b2__depth_mm=5.0))
    assert finding.text == (
        "rotor.barrier[2].depth_mm = 5: barriers 1 and 2 run into each other; accepted 6.7 to 14.1"
    )


def test_ranges_of_radii_are_known_in_closed_form():
    """The shaft may reach to a sheet from barrier 3: 2 (40.6 - 18 - 3.6 - 0.5) = 37 mm."""
    (finding,) = check_design(changed(plain(), rotor__shaft_diameter_mm=81.0))
    assert finding.remedy == "accepted up to 37"


def test_clearance_to_the_d_axis_is_that_of_the_round_end():
    """Largest end angle of barrier 3: its round end of 1.8 mm stays a sheet off the d axis.

    The cap's centre lies r = 38.2 mm from the shaft axis: r sin(45 - e) = 1.8 + 0.5 mm.
    """
    (finding,) = check_design(changed(plain(), b3__end_angle_deg=43.0))
    largest = 45.0 - math.degrees(math.asin(2.3 / (40.6 - 0.6 - 1.8)))
    assert suggested(finding.remedy)[1] == pytest.approx(largest, abs=0.01)
    assert suggested(finding.remedy)[1] <= largest


def test_full_round_is_accepted_up_to_half_the_thickness():
    """A fillet of exactly half the thickness is a full round end, above it nothing fits."""
    assert check_design(ribbed(fillet_mm=1.8, radial_rib_offset_mm=2.5)) == ()
    (finding,) = check_design(ribbed(fillet_mm=1.81, radial_rib_offset_mm=2.5))
    assert finding.text == (
        "rotor.barrier[3].fillet_mm = 1.81: more than half the thickness; 1.8 is a full round; "
        "accepted 0.25 to 1.77"
    )


@pytest.mark.parametrize("miss_mm", [-1e-7, 0.0, 1e-7])
def test_a_limit_met_to_rounding_hides_no_other(miss_mm):
    """A straight barrier that rises by just the least edge, 0.05 mm, still has no arm.

    Cap centre at 38.2 mm, 36 degrees; the rise passes by rounding, the missing arm must be seen.
    """
    depth = 40.6 - 1.8 - 38.2 * math.cos(math.radians(36.0)) + 0.05 + miss_mm
    codes = [one.code for one in check_design(straight(b3__depth_mm=depth))]
    assert "arm_gone" in codes


def test_all_faults_are_found_at_once():
    """Five faults in five tables' keys: five findings in one call."""
    design = changed(
        plain(),
        b1__tangential_rib_mm=0.3,
        b3__end_angle_deg=43.5,
        stator__slot_opening_mm=6.0,
        winding__coil_span_slots=5,
        duty__maximum_speed_rpm=10.0,
    )
    codes = [one.code for one in check_design(design)]
    assert codes == [
        "opening_wide",
        "tangential_rib_thin",
        "side_close",
        "winding_span",
        "speed_order",
    ]


def shaken(rng, design):
    """The design with one or two values multiplied by up to 20 or divided by it."""
    for _ in range(int(rng.integers(1, 3))):
        number = int(rng.integers(1, len(design.rotor.barrier) + 1))
        name = str(rng.choice(BARRIER_KEYS))
        value = getattr(design.rotor.barrier[number - 1], name)
        if value is not None:
            factor = math.exp(rng.normal())
            design = with_value(design, f"rotor.barrier[{number}].{name}", value * factor)
    return design


@pytest.mark.parametrize("count", [10, pytest.param(28, marks=pytest.mark.slow)])
def test_remedies_of_random_faults_mend_them(count):
    """Random designs with values shaken: each suggested range mends its finding.

    Both ends and the middle of the range are applied. A finding whose remedy is a choice of
    words (no single value mends it) suggests no number and is not counted.
    """
    rng, tried = np.random.default_rng(31), 0
    for _ in range(count):
        design = shaken(rng, drawn_design(rng))
        faults = rotor_faults(design)
        for finding in check_design(design):
            for value in suggested(finding.remedy):
                if not finding.key.startswith("rotor.barrier"):
                    continue
                (fault,) = [
                    one for one in faults if one.code == finding.code and one.text == finding.fault
                ]
                after = rotor_faults(with_value(design, finding.key, value))
                assert fault.identity not in {one.identity for one in after}
                tried += 1
    assert tried > 60 / 28 * count


def numbers_of(tree, path=()):
    if isinstance(tree, dict | list):
        items = tree.items() if isinstance(tree, dict) else enumerate(tree)
        return [leaf for key, value in items for leaf in numbers_of(value, (*path, key))]
    return [path] if isinstance(tree, int | float) else []


@pytest.mark.parametrize("count", [30, pytest.param(80, marks=pytest.mark.slow)])
def test_extreme_values_are_refused_or_drawn(count):
    """Any number a file may hold, 1e-9 to 1e9, on any key: findings or a cross-section, no crash.

    Designs with one to three numbers replaced; those that the tables themselves refuse
    (whole numbers out of range) do not count.
    """
    rng, refused, drawn = np.random.default_rng(32), 0, 0
    trees = [json.loads(random_design(rng).model_dump_json()) for _ in range(6)]
    for k in range(count):
        tree = json.loads(json.dumps(trees[k % len(trees)]))
        leaves = numbers_of(tree)
        for _ in range(int(rng.integers(1, 4))):
            *path, last = leaves[int(rng.integers(len(leaves)))]
            table = tree
            for key in path:
                table = table[key]
            if isinstance(table[last], int):
                table[last] = int(rng.choice([0, 1, 2, 3, 5, 7, 1000, 10**9]))
            else:
                table[last] = float(10.0 ** rng.uniform(-9.0, 9.0))
        try:
            design = MachineDesign.model_validate_json(json.dumps(tree))
        except ValidationError:
            continue
        if check_design(design):
            refused += 1
        else:
            drawn += 1
            cross_section(design)
    assert refused > count / 4
    assert drawn > count / 16
