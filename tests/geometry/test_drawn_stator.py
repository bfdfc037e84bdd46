"""Stators recognised in drawings: whatever the form, the outline is the original's."""

import math
from pathlib import Path

import pytest
from draughting import FORMS, add_edge, new_drawing, scaled, sheet, write_form

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area
from lamwright.geometry.design_file import read_design
from lamwright.geometry.drawn_slot import SlotHints, layered
from lamwright.geometry.drawn_stator import recognised_stator
from lamwright.geometry.drawn_stator_regions import drawn_stator_regions
from lamwright.geometry.dxf_reader import read_pieces
from lamwright.geometry.outline_edges import difference
from lamwright.geometry.outline_report import stator_measures
from lamwright.geometry.slot_outline import slot_copper_area

DEMO = Path(__file__).parent.parent.parent / "designs" / "demo_24s4p_arc.toml"
HEAL = 1e-5  # m


@pytest.fixture(scope="module")
def design():
    return read_design(DEMO)


def drawing_of(name, design, folder):
    path = write_form(name, sheet(design), folder)
    pieces = read_pieces(path, 1.0 if name == "loose" else None)
    return recognised_stator(pieces.edges, HEAL, SlotHints())


def edges_of(regions):
    return [e for r in regions for path in (r.outer, *r.holes) for e in path.edges]


@pytest.mark.parametrize("name", FORMS)
def test_every_form_gives_the_original_outline(name, design, tmp_path):
    """All edges of the drawn pole lie on edges of the parametric one.

    To 1 nm where the drawing is exact; splines are fitted to 2 um; the gaps are shifts up to
    2.5 um of each edge, and a point between two such edges is no further off than that.
    """
    drawing = drawing_of(name, design, tmp_path)
    section = cross_section(design)
    regions = drawn_stator_regions(drawing, 1, section.circle_radius, 4, 1)
    tolerance = {"gaps": 2.5e-6, "splines": 2e-6}.get(name, 1e-9)
    assert difference(edges_of(regions), edges_of(section.stator))[0] < tolerance
    assert (drawing.slots, drawing.is_symmetric) == (24, True)
    assert drawing.sectors == (24 if name == "one_pitch" else 1)


@pytest.mark.parametrize("layers", [1, 2])
def test_regions_tile_the_sector(layers, design, tmp_path):
    """Areas add up to the ring's (closed form, rounding only); two layers are equal halves."""
    drawing = drawing_of("loose", design, tmp_path)
    regions = drawn_stator_regions(drawing, layers, 0.0408, 4, 1)
    total = sum(area(r.outer) + sum(map(area, r.holes)) for r in regions)
    assert total == pytest.approx(math.pi / 4 * (0.07**2 - 0.0408**2), rel=1e-12)
    sides = [part.area for part in layered(drawing.slot, layers).copper]
    assert sides == pytest.approx([slot_copper_area(design) / layers] * layers, rel=1e-9)


SHAPES = {
    "round": {"slot_sides": "parallel_slot", "slot_bottom": "round", "slot_width_mm": 5.0},
    "flat": {"slot_bottom": "flat", "slot_corner_radius_mm": 0.8},
    "closed": {"slot_mouth": "closed", "bridge_mm": 0.7, "wedge_depth_mm": 0.0},
    "open": {"slot_mouth": "open", "slot_sides": "parallel_slot", "slot_width_mm": 5.0},
}


@pytest.mark.parametrize("shape", SHAPES)
def test_slot_shapes_come_back_from_a_sector(shape, design, tmp_path):
    """One pole's iron alone, as a closed contour with its sides: same iron, same copper.

    Edges to 1 nm (rounding); copper to 1e-6, as the wedge's end is stated, not drawn.
    """
    keys = {"slot_opening_mm": 2.4, "opening_depth_mm": 0.8, "tooth_width_mm": 5.4}
    if SHAPES[shape].get("slot_mouth"):
        keys = {"tooth_width_mm": 5.4}
    if SHAPES[shape].get("slot_sides"):
        del keys["tooth_width_mm"]
    idle = ("slot_opening_mm", "opening_depth_mm", "tooth_width_mm", "slot_corner_radius_mm")
    bare = {k: v for k, v in design.stator.model_dump().items() if k not in idle}
    stator = type(design.stator)(**{**bare, **keys, **SHAPES[shape]})
    winding = design.winding.model_copy(update={"turns_per_coil": 20})
    original = design.model_copy(update={"stator": stator, "winding": winding})
    section = cross_section(original)
    iron = next(r for r in section.stator if r.name == "stator_iron")
    drawing = new_drawing()
    for edge in edges_of([iron]):
        add_edge(drawing.modelspace(), scaled(edge))
    drawing.saveas(tmp_path / "stator.dxf")
    depth = 1e-3 * stator.wedge_depth_mm
    hints = SlotHints(0.0, depth) if shape == "open" else SlotHints(None, depth)
    found = recognised_stator(read_pieces(tmp_path / "stator.dxf").edges, HEAL, hints)
    assert found.sectors == 4
    assert (found.slot.mouth is None) == (shape == "closed")
    regions = drawn_stator_regions(found, 1, section.circle_radius, 4, 1)
    drawn_iron = next(r for r in regions if r.name == "stator_iron")
    assert difference(edges_of([drawn_iron]), edges_of([iron]))[0] < 1e-9
    assert difference(edges_of([iron]), edges_of([drawn_iron]))[0] < 1e-9
    copper = layered(found.slot, 1).copper[0].area
    assert copper == pytest.approx(slot_copper_area(original), rel=1e-6)


def test_measures_are_the_dimensions_drawn(design, tmp_path):
    """The original's keys come back; the drawing is exact, so to rounding."""
    measures = stator_measures(drawing_of("rotated", design, tmp_path))
    for key in (
        "outer_diameter_mm",
        "bore_diameter_mm",
        "slots",
        "slot_opening_mm",
        "slot_depth_mm",
        "tooth_width_mm",
    ):
        assert measures[key] == pytest.approx(getattr(design.stator, key), abs=1e-6)


def test_copper_is_found_in_a_slot_drawn_in_one_piece(design, tmp_path):
    """Without lines in the slot, copper begins at the tooth tip plus the stated wedge depth.

    The original's wedge ends 1 mm above the tip; the tip's corner is found to the bit, as it is a
    corner of the wall.
    """
    whole = sheet(design)
    bare = type(whole)(whole.slots, whole.outer, whole.wall, whole.tooth, ())
    pieces = read_pieces(write_form("inches", bare, tmp_path))
    hints = SlotHints(wedge_depth=1e-3)
    drawing = recognised_stator(pieces.edges, HEAL, hints)
    copper = layered(drawing.slot, 1).copper[0].area
    assert copper == pytest.approx(slot_copper_area(design), rel=1e-6)
    assert [part.kind for part in drawing.slot.parts] == ["opening", "wedge", "copper"]
