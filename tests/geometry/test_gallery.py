"""The gallery of designs/gallery: every kind is in it, and each machine is one of the trade."""

import math

import pytest

from lamwright.app.point import solve
from lamwright.app.run import assess
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.dxf import (
    compare_contours,
    lamination_contours,
    read_contours,
    write_lamination,
)
from lamwright.geometry.rotor import rotor_frame
from tests.gallery_pictures import DESIGNS, GALLERY, readme, specials

DXF_TOL = 1e-8  # m, a file's digits; a thousandth of a punch's 1e-5
LEAST_MARGIN = 1.2  # yield over greatest stress at overspeed
PICTURE_BYTES = 90_000
SOLVED = ("fan_12s4p", "servo_12s10p", "conveyor_36s6p")  # skewed; tooth coils; ferrites
POLES = (2, 16)
BORES = (40.0, 600.0)  # mm
STATOR_KINDS = {
    *("parallel_tooth", "parallel_slot"),
    *("concentric", "flat", "round"),
    *("semi_closed", "open", "closed"),
    "from a DXF",
}
FAMILIES = {"arc", "straight", "vee", "hyperbolic", "streamline"}
ENDS = {"round", "flat", "square"}
SPECIALS = {
    *("thinning barriers", "ribs thicker inward", "inclined ribs"),
    *("unlike halves", "unlike poles", "skew"),
    *("notches", "holes", "slotted holes", "rivets", "keyways", "dog-bone keys"),
    *("eccentric rim", "stepped rim", "ferrite magnets", "rare-earth magnets"),
    *("tooth coils", "fractional slots"),
}
by_name = pytest.mark.parametrize("path", DESIGNS, ids=lambda path: path.stem)


def test_the_gallery_holds_every_kind():
    """Each family, end, rib and stator kind is used, from 2 to 16 poles, 40 to 600 mm bore."""
    designs = [read_machine(path).design for path in DESIGNS]
    barriers = [b for d in designs for b in (*d.rotor.barrier, *d.rotor.alternate_barrier)]
    assert len(designs) >= 16
    assert {b.shape for b in barriers} == FAMILIES
    assert {b.end_shape for b in barriers} == ENDS
    assert {b.radial_ribs for b in barriers} == {0, 1, 2, 3, 4}
    assert {word for d in designs for word in specials(d)} == SPECIALS
    kinds = {
        kind
        for d in designs
        for kind in (("from a DXF",) if d.stator.outline_dxf else d.stator.slot_choices)
    }
    assert kinds == STATOR_KINDS
    assert {d.winding.layers for d in designs} == {1, 2}
    for found, ends in (
        ([d.rotor.poles for d in designs], POLES),
        ([d.stator.bore_diameter_mm for d in designs], BORES),
    ):
        assert (min(found), max(found)) == ends


def test_the_gallery_says_what_is_invented_and_what_it_shows():
    """The README is that of these files, with a picture of each of modest size."""
    assert (GALLERY / "README.md").read_text(encoding="utf-8") == readme()
    for path in DESIGNS:
        assert read_machine(path).design.note.startswith("invented: ")
        assert 5_000 < (GALLERY / "pictures" / f"{path.stem}.png").stat().st_size < PICTURE_BYTES
    pictured = {path.stem for path in (GALLERY / "pictures").glob("*.png")}
    assert pictured == {path.stem for path in DESIGNS}


@by_name
def test_each_is_drawn_whole(path):
    """The regions tile the sector: their exact areas add up to it, to rounding."""
    section = cross_section(read_machine(path).design)
    share = section.sector_poles / (2.0 * section.pole_pairs)
    for regions, inner, outer in (
        (section.rotor, 0.0, section.circle_radius),
        (section.stator, section.circle_radius, section.stator_outer_radius),
    ):
        total = sum(area(r.outer) + sum(map(area, r.holes)) for r in regions)
        assert total == pytest.approx(share * math.pi * (outer**2 - inner**2), rel=1e-9)


@by_name
def test_each_keeps_its_carriers_wider_than_its_ribs(path):
    """What a designer looks for: ends near the gap, carriers that feed teeth, iron at the bore.

    The barriers on the q axis take a tenth to half of the iron from bore to rim (common practice,
    no source), every tangential rib is under a twentieth of the rotor's radius.
    """
    design = read_machine(path).design
    frame = rotor_frame(design)
    iron = 1e3 * (frame.rotor_radius - frame.shaft_radius)
    air = sum(barrier.thickness_mm for barrier in design.rotor.barrier)
    assert 0.1 < air / iron < 0.5
    for barrier in design.rotor.barrier:
        assert barrier.tangential_rib_mm < 0.05 * 1e3 * frame.rotor_radius


@by_name
def test_each_goes_to_dxf_and_back(path, tmp_path):
    """The whole lamination as a DXF, read again: the same lines and arcs to the file's digits."""
    section = cross_section(read_machine(path).design)
    written = tmp_path / "lamination.dxf"
    write_lamination(section, written)
    assert compare_contours(lamination_contours(section), read_contours(written)) < DXF_TOL


@pytest.mark.parametrize("name", SOLVED)
def test_a_field_point_of_a_few(name):
    """A motoring current at 57 electrical degrees makes motoring torque.

    Half to twice the limit, which is nine tenths of the most mean torque: one position has ripple
    in it, and another current angle than the best.
    """
    machine = read_machine(GALLERY / f"{name}.toml")
    rated, limits = machine.design.duty.rated_current_a, machine.design.limits
    field = solve(machine, i_d=0.55 * rated, i_q=0.83 * rated, angle_deg=0.0)
    assert 0.5 * limits.least_torque_nm < field.torque < 2.0 * limits.least_torque_nm


@pytest.mark.slow
@by_name
def test_each_passes_its_assessment(path, tmp_path):
    """Every limit holds, every rib with a margin of 1.2 to yield at overspeed."""
    verdict = assess(path, tmp_path / "out", pictures=False)
    assert verdict.passes
    assert verdict.stress.yield_margin >= LEAST_MARGIN
