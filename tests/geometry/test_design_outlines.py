"""Design files that name drawings: keys filled, checked, hashed, and refused where they clash."""

import math
import pickle
from pathlib import Path

import pytest
from draughting import add_edge, moved, new_drawing, scaled, sheet, write_form

from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import design_hash, read_design
from lamwright.geometry.errors import DesignError
from lamwright.geometry.outline_edges import difference
from lamwright.solver.design_motion import shape_keys

DEMO = Path(__file__).parent.parent.parent / "designs" / "demo_24s4p_arc.toml"
STATOR = 'outline_dxf = "stator.dxf"\nstack_length_mm = 100.0\n'
ROTOR = 'outline_dxf = "rotor.dxf"\npoles = 4\nsheet_thickness_mm = 0.5\n'


def write_rotor(folder, turn=1.0, magnets=False):
    section = cross_section(read_design(DEMO))
    drawing = new_drawing()
    for contour in lamination_contours(section):
        for edge in contour.path.edges:
            add_edge(drawing.modelspace(), moved(scaled(edge), turn))
    if magnets:  # a block inside a barrier that does not touch its walls
        barrier = next(r for r in section.rotor if r.name == "barrier_3")
        long = sorted(barrier.outer.edges, key=lambda e: -e.length)[:2]
        at = 0.5e3 * (long[0].point(0.5) + long[1].point(0.5))
        drawing.modelspace().add_circle((at.real, at.imag), 0.8)
    drawing.saveas(folder / "rotor.dxf")


def design_with(folder, stator=None, rotor=None):
    """The demo with tables replaced; None leaves a table as it is."""
    text = DEMO.read_text()
    head, rest = text.split("[stator]\n")
    own_stator, rest = rest.split("\n[winding]", 1)
    winding, rest = rest.split("[rotor]\n", 1)
    own_rotor, tail = rest.split("\n[steel]", 1)
    stator = own_stator if stator is None else stator
    rotor = own_rotor if rotor is None else rotor
    path = folder / "drawn.toml"
    path.write_text(f"{head}[stator]\n{stator}\n[winding]{winding}[rotor]\n{rotor}\n[steel]{tail}")
    return path


def test_both_parts_drawn_are_the_original(tmp_path):
    """Every edge within 1 nm (rounding); the keys hold what the drawings show."""
    original = read_design(DEMO)
    write_form("polylines", sheet(original), tmp_path)
    write_rotor(tmp_path)
    design = read_design(design_with(tmp_path, STATOR, ROTOR))
    for key in ("outer_diameter_mm", "bore_diameter_mm", "tooth_width_mm", "slot_opening_mm"):
        expected = getattr(original.stator, key)
        assert getattr(design.stator, key) == pytest.approx(expected, abs=1e-6)
    assert design.rotor.gap_mm == pytest.approx(0.4, abs=1e-6)
    assert design.rotor.shaft_diameter_mm == pytest.approx(26.0, abs=1e-6)
    assert design.rotor.barrier == ()
    section, expected = cross_section(design), cross_section(original)
    for mine, theirs in ((section.rotor, expected.rotor), (section.stator, expected.stator)):
        edges, others = (
            [e for r in part for path in (r.outer, *r.holes) for e in path.edges]
            for part in (mine, theirs)
        )
        assert difference(edges, others)[0] < 1e-9


def test_a_design_with_drawings_goes_to_other_processes_whole(tmp_path):
    """What was recognised is part of the design, in copies and in workers."""
    write_form("loose", sheet(read_design(DEMO)), tmp_path)
    keys = STATOR + "outline_unit_mm = 1.0\n"
    design = read_design(design_with(tmp_path, keys))
    copy = pickle.loads(pickle.dumps(design))
    assert copy == design
    assert copy.stator.outline == design.stator.outline != None  # noqa: E711


def test_the_hash_follows_the_drawing(tmp_path, monkeypatch):
    """Two files of one sheet are two states of the design; a known one is not read again."""
    hashes = set()
    for name in ("polylines", "mirror_image"):
        write_form(name, sheet(read_design(DEMO)), tmp_path)
        hashes.add(design_hash(read_design(design_with(tmp_path, STATOR)), ()))
    assert len(hashes) == 2
    monkeypatch.setattr("lamwright.geometry.dxf_reader.read_pieces", None)
    assert design_hash(read_design(design_with(tmp_path, STATOR)), ()) in hashes


def test_only_what_can_be_moved_has_a_slope(tmp_path):
    """A drawn stator has its stack alone; the drawn rotor nothing."""
    write_form("polylines", sheet(read_design(DEMO)), tmp_path)
    write_rotor(tmp_path)
    stator_drawn = shape_keys(read_design(design_with(tmp_path, STATOR)))
    both_drawn = shape_keys(read_design(design_with(tmp_path, STATOR, ROTOR)))
    assert [key for key in stator_drawn if key.startswith("stator.")] == ["stator.stack_length_mm"]
    assert "rotor.barrier[1].depth_mm" in stator_drawn
    assert both_drawn == ("stator.stack_length_mm",)


@pytest.mark.parametrize("pole", range(4))
def test_the_q_axis_may_be_told(pole, tmp_path):
    """Any of the four, at 45 + 90 k degrees here, gives the same rotor as the one found."""
    write_rotor(tmp_path)
    told = read_design(design_with(tmp_path, None, ROTOR + f"q_axis_deg = {45.0 + 90.0 * pole}\n"))
    assert told.rotor.outline is not None
    assert math.degrees(told.rotor.outline.drawing.q_axis) == pytest.approx(45.0)


def test_contours_inside_cavities_are_left_out(tmp_path):
    """A circle drawn in a barrier is told and is no iron."""
    write_rotor(tmp_path, magnets=True)
    design = read_design(design_with(tmp_path, None, ROTOR))
    assert design.rotor.outline is not None
    assert design.rotor.outline.drawing.left_out == 1
    names = {region.name for region in cross_section(design).rotor}
    assert names == {region.name for region in cross_section(read_design(DEMO)).rotor}


CLASHES = {
    "heal_um = 5.0": (None, "rotor.heal_um: only with outline_dxf; leave it out"),
    "q_axis_deg = 3.0": (None, "rotor.q_axis_deg: only with outline_dxf; leave it out"),
    ROTOR + "gap_mm = 0.6": ("", r"rotor.gap_mm = 0.6: the drawing has 0.4; leave it out"),
    ROTOR + "keyway = {}": ("", "rotor.keyway: the drawing gives the rotor; leave it out"),
    ROTOR.replace("rotor.dxf", "../x.dxf"): ("", 'rotor.outline_dxf = "../x.dxf": no such file'),
    ROTOR + "heal_um = 0.0": (
        "",
        "rotor.heal_um = 0.0: too small; accepted a number from 0.1 to 100",
    ),
    ROTOR + "q_axis_deg = true": ("", "rotor.q_axis_deg = true: this is true or false"),
}


@pytest.mark.parametrize("keys", CLASHES)
def test_clashing_keys_are_refused(keys, tmp_path):
    """One clear line each, with its place in the file."""
    whole, text = CLASHES[keys]
    write_rotor(tmp_path)
    rotor = (
        keys
        if whole == ""
        else keys + "\n" + DEMO.read_text().split("[rotor]\n")[1].split("\n[steel]")[0]
    )
    with pytest.raises(DesignError, match=text) as caught:
        read_design(design_with(tmp_path, None, rotor))
    assert "\n" not in str(caught.value)
