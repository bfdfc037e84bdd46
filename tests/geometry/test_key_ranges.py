"""Ranges of keys against the checks themselves and against closed forms."""

from pathlib import Path

import pytest

from lamwright.geometry.checks import shape_faults
from lamwright.geometry.design_details import HoleDesign
from lamwright.geometry.design_file import read_design
from lamwright.geometry.key_ranges import key_range, key_ranges
from lamwright.geometry.remedies import value_of, with_value

DESIGN = read_design(Path("designs/demo_24s4p_arc.toml"))
KEYS = (
    "rotor.barrier[1].end_angle_deg",
    "rotor.barrier[2].depth_mm",
    "rotor.barrier[3].thickness_mm",
    "rotor.shaft_diameter_mm",
    "stator.tooth_width_mm",
)


@pytest.mark.parametrize("key", KEYS)
def test_ends_fit_and_what_lies_beyond_does_not(key):
    """The exact check is clean at both ends and at nine values between, and not 0.002 beyond.

    Ends are rounded inward to 0.001, so the limit lies less than 0.002 further out.
    """
    found = key_range(DESIGN, key)
    low, high = found.least.value, found.most.value
    for share in range(11):
        assert not shape_faults(with_value(DESIGN, key, low + 0.1 * share * (high - low)))
    for end, beyond in ((found.least, low - 0.002), (found.most, high + 0.002)):
        if end.code:
            codes = [fault.code for fault in shape_faults(with_value(DESIGN, key, beyond))]
            assert end.code in codes


@pytest.mark.parametrize(
    ("name", "key"),
    [
        ("gallery/ropeway_48s8p", "rotor.barrier[2].radial_rib_mm"),
        ("gallery/extruder_45s6p", "rotor.barrier[1].depth_mm"),
    ],
)
def test_a_round_number_that_does_not_fit_is_no_end(name, key):
    """Here all values before a round one fit, and it does not: the end is the thousandth before."""
    design = read_design(Path(f"designs/{name}.toml"))
    found = key_range(design, key)
    for end in (found.least.value, found.most.value):
        assert not shape_faults(with_value(design, key, end))


def test_closed_forms():
    """Carriers of 0.5 mm on the q axis and ribs of the sheet's thickness: sums of the file."""
    depth = key_range(DESIGN, "rotor.barrier[2].depth_mm")
    assert depth.least.value == pytest.approx(3.6 + 2.6 + 0.5, abs=1e-9)
    assert depth.most.value == pytest.approx(18.0 - 3.4 - 0.5, abs=1e-9)
    assert (depth.least.code, depth.most.code) == ("carrier_thin", "carrier_thin")
    rib = key_range(DESIGN, "rotor.barrier[1].tangential_rib_mm")
    assert rib.least.value == pytest.approx(0.5, abs=1e-9)
    shaft = key_range(DESIGN, "rotor.shaft_diameter_mm")
    assert shaft.most.value == pytest.approx(2.0 * (40.6 - 18.0 - 3.6 - 0.5), abs=1e-9)


def test_holes_move_between_barriers():
    """A hole on the q axis between barriers 1 and 2: half a sheet of web to either side."""
    hole = HoleDesign(place_radius_mm=32.5, angle_deg=0.0, diameter_mm=2.0)
    rotor = DESIGN.rotor.model_copy(update={"hole": (hole,)})
    design = DESIGN.model_copy(update={"rotor": rotor})
    found = key_range(design, "rotor.hole[1].place_radius_mm")
    assert found.least.value == pytest.approx(40.6 - 10.2 + 1.0 + 0.5, abs=1e-3)
    assert found.most.value == pytest.approx(40.6 - 3.6 - 2.6 - 1.0 - 0.5, abs=1e-3)
    assert found.least.code == found.most.code == "web_barrier"


def test_ranges_hold_the_value_itself():
    """Every range reaches at least from the value to the value."""
    for found in key_ranges(DESIGN, KEYS):
        assert found.least.value <= value_of(DESIGN, found.key) <= found.most.value
