"""Checks of what is punched: every fault made on purpose is found once, with its place."""

import functools
import math
import re

import pytest
from outlines import DESIGNS

from lamwright.geometry.contours import Contour
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Edge, Path, circle, line, reversed_path
from lamwright.geometry.design_file import read_design
from lamwright.geometry.errors import Finding
from lamwright.geometry.punch_checks import FAULTS, punch_findings
from lamwright.geometry.punch_layers import rotor_lamination, stator_lamination
from lamwright.geometry.punch_webs import air_throats, steel_webs
from lamwright.geometry.section import CrossSection

MM = 1e-3  # m
SHEET = 0.5  # mm
OUTER = Contour("OUTER_CONTOUR", circle(0j, 20 * MM))
BORE = Contour("BORE", reversed_path(circle(0j, 5 * MM)))


@functools.cache
def section(name: str) -> CrossSection:
    return cross_section(read_design(DESIGNS / f"{name}.toml"))


def hole(x: float, y: float, radius: float, layer: str = "HOLES") -> Contour:
    return Contour(layer, reversed_path(circle(complex(x, y) * MM, radius * MM)))


def only(findings: tuple[Finding, ...]) -> Finding:
    (finding,) = findings
    assert "\n" not in finding.text
    return finding


def place_of(finding: Finding) -> complex:
    found = re.search(r"\((-?[\d.]+), (-?[\d.]+)\) mm", finding.text)
    assert found is not None
    return complex(float(found[1]), float(found[2]))


@pytest.mark.parametrize("name", ["demo_24s4p_arc", "demo_36s4p_magnet", "gallery/mill_48s4p"])
def test_what_is_shipped_can_be_cut(name):
    """Rotors have nothing to ask about; stators only sharp corners beside their wedges."""
    sheet = read_design(DESIGNS / f"{name}.toml").rotor.sheet_thickness_mm
    assert punch_findings(rotor_lamination(section(name)), sheet) == ()
    found = punch_findings(stator_lamination(section(name)), sheet)
    assert {finding.code for finding in found} <= {"radius_small"}


@pytest.mark.parametrize("name", ["demo_24s4p_arc", "demo_36s6p_arc", "gallery/spindle_24s2p"])
def test_the_thinnest_steel_is_the_thinnest_rib(name):
    """The section states its ribs where they were made, independently of any search."""
    least = min(rib.width for rib in section(name).ribs)
    found = steel_webs(rotor_lamination(section(name)), 1.001 * least)
    assert found[0].width == pytest.approx(least, rel=1e-9)


def test_teeth_are_steel_and_mouths_are_gaps():
    """One contour runs round all slots: its narrow steel is a tooth, its narrow gap a mouth."""
    design = read_design(DESIGNS / "demo_24s4p_arc.toml")
    contours = stator_lamination(section("demo_24s4p_arc"))
    assert design.stator.tooth_width_mm is not None
    assert design.stator.slot_opening_mm is not None
    tooth = MM * design.stator.tooth_width_mm
    webs = steel_webs(contours, 1.001 * tooth)
    assert webs[0].width == pytest.approx(tooth, rel=1e-9)
    (slots,) = (c for c in contours if c.layer == "SLOTS")
    mouth = MM * design.stator.slot_opening_mm
    throats = air_throats(slots, 1.001 * mouth)
    assert throats[0].width == pytest.approx(mouth, rel=1e-9)
    assert abs(throats[0].place) == pytest.approx(
        0.5 * MM * design.stator.bore_diameter_mm, abs=MM * 1.0
    )


def test_a_thin_web_is_found_and_named():
    """Holes 0.3 mm apart in a sheet of 0.5 mm, and just as thick as the sheet is accepted."""
    near = (hole(-10.15, 0.0, 2.0), hole(-14.45, 0.0, 2.0), BORE, OUTER)
    finding = only(punch_findings(near, SHEET))
    assert finding.code == "web_thin"
    assert finding.code not in FAULTS
    assert finding.value == pytest.approx(0.3, abs=1e-9)
    assert place_of(finding) == pytest.approx(-12.3 + 0j, abs=1e-3)
    assert "HOLES 1 and HOLES 2" in finding.text
    assert "thinner than the sheet (0.5); accepted 0.5 or more" in finding.text
    just = (hole(-10.0, 0.0, 2.0), hole(-14.5, 0.0, 2.0), BORE, OUTER)
    assert punch_findings(just, SHEET) == ()


def test_places_alike_are_one_finding():
    """A web of 0.3 mm on every pole is one line with a count, the first one named."""
    spots = [complex(math.cos(a), math.sin(a)) for a in (0.1, 0.1 + math.pi / 2, 0.1 + math.pi)]
    holes = [hole(17.7 * s.real, 17.7 * s.imag, 2.0) for s in spots]
    finding = only(punch_findings((*holes, BORE, OUTER), SHEET))
    assert "and 2 places alike" in finding.text
    assert place_of(finding) == pytest.approx(19.85 * spots[0], abs=2e-3)


def test_an_open_contour_is_found():
    """A gap of 1 um, at its place."""
    square = [8 + 8j, 8 + 10j, 10 + 10j, 10 + 8j]
    edges = [line(MM * p, MM * q) for p, q in zip(square, square[1:] + square[:1], strict=True)]
    edges[1] = Edge(edges[1].start, edges[1].end - 1e-6)
    found = punch_findings((Contour("HOLES", Path(tuple(edges))), BORE, OUTER), SHEET, 0.0)
    finding = only(tuple(f for f in found if f.code in FAULTS))
    assert finding.code == "contour_open"
    assert finding.value == pytest.approx(1e-3)
    assert place_of(finding) == 10 + 10j


@pytest.mark.parametrize(
    ("contours", "code", "words"),
    [
        ((hole(10, 0, 2), hole(13, 0, 2)), "contours_touch", "HOLES 1 and HOLES 2"),
        ((hole(10, 0, 2), hole(14, 0, 2)), "contours_touch", "cross or touch"),
        ((hole(19, 0, 2),), "contours_touch", "HOLES and OUTER_CONTOUR"),
        ((hole(10, 0, 2), hole(10, 0, 2)), "contour_doubled", "drawn twice"),
        ((hole(10, 0, 2), hole(10, 0, 0.5)), "contour_nested", "HOLES 2 .* inside HOLES 1"),
        ((hole(30, 0, 2),), "contour_outside", "outside the outer contour"),
        ((hole(10, 0, 0.007),), "contour_short", "too short to cut; accepted 0.05 or more"),
        ((Contour("HOLES", circle(10 * MM, 2 * MM)),), "contour_direction", "turn it round"),
    ],
)
def test_faults_that_cannot_be_cut(contours, code, words):
    """Each made on purpose, found as itself and as a fault."""
    found = punch_findings((*contours, BORE, OUTER), SHEET, 0.0)
    finding = only(tuple(f for f in found if f.code in FAULTS))
    assert finding.code == code
    assert re.search(words, finding.text)
    assert place_of(finding)


def test_a_contour_that_crosses_itself_is_found():
    """A bow tie of lines, at its knot."""
    corners = [8 + 8j, 10 + 10j, 10 + 8j, 8 + 10j]
    tie = Path(
        tuple(line(MM * p, MM * q) for p, q in zip(corners, corners[1:] + corners[:1], strict=True))
    )
    found = punch_findings((Contour("HOLES", tie), BORE, OUTER), SHEET, 0.0)
    (finding,) = (f for f in found if f.code == "contours_touch")
    assert "crosses or touches itself" in finding.text
    assert place_of(finding) == 9 + 9j


def test_tight_inner_corners_are_found_and_outer_ones_are_not():
    """A hole's corner is an inner one; the same radius on the outer contour is not."""
    found = punch_findings((hole(10, 0, 0.2), BORE, OUTER), SHEET)
    finding = only(found)
    assert finding.code == "radius_small"
    assert finding.value == pytest.approx(0.2)
    assert punch_findings((hole(10, 0, 0.2), BORE, OUTER), SHEET, 0.2) == ()
    square = [-20 - 20j, 20 - 20j, 20 + 20j, -20 + 20j]
    sharp = Path(
        tuple(line(MM * p, MM * q) for p, q in zip(square, square[1:] + square[:1], strict=True))
    )
    assert punch_findings((BORE, Contour("OUTER_CONTOUR", sharp)), SHEET) == ()
