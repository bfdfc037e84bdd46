"""Rotors recognised in drawings: a rotor drawn from a design is that design's rotor again."""

import cmath
import math
from pathlib import Path

import ezdxf
import pytest
from draughting import add_edge, moved, new_drawing, scaled

from lamwright.geometry.blunting import blunted
from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import arc, area
from lamwright.geometry.design_file import read_design
from lamwright.geometry.drawn_rotor import recognised_rotor
from lamwright.geometry.drawn_rotor_regions import drawn_rotor_regions
from lamwright.geometry.dxf_reader import read_pieces
from lamwright.geometry.errors import OutlineError
from lamwright.geometry.outline_edges import difference
from lamwright.geometry.section import Region

DESIGNS = Path(__file__).parent.parent.parent / "designs"
HEAL = 1e-5  # m
DEMOS = ("demo_24s4p_arc", "demo_36s4p_straight", "demo_36s6p_arc")


def lamination(name):
    section = cross_section(read_design(DESIGNS / f"{name}.toml"))
    return section, [e for c in lamination_contours(section) for e in c.path.edges]


def drawn(edges, folder, turn=1.0, shift=0j):
    drawing = new_drawing()
    for edge in edges:
        add_edge(drawing.modelspace(), moved(scaled(edge), turn, shift))
    drawing.saveas(folder / "rotor.dxf")
    return read_pieces(folder / "rotor.dxf")


def edges_of(regions: tuple[Region, ...]):
    return [e for r in regions for path in (r.outer, *r.holes) for e in path.edges]


@pytest.mark.parametrize("name", DEMOS)
def test_a_lamination_drawn_loose_is_the_original_rotor(name, tmp_path):
    """Turned and off its origin, all regions and ribs come back by name, to 1 nm (rounding)."""
    section, edges = lamination(name)
    turn = complex(math.cos(0.3), math.sin(0.3))
    pieces = drawn(edges, tmp_path, turn, 50.0 - 20.0j)
    drawing = recognised_rotor(pieces.edges, HEAL, section.poles)
    ((regions, ribs),) = drawn_rotor_regions(drawing, section.circle_radius, section.pole_pairs)
    assert {r.name: r.material for r in regions} == {r.name: r.material for r in section.rotor}
    assert difference(edges_of(regions), edges_of(section.rotor))[0] < 1e-9
    assert difference(edges_of(section.rotor), edges_of(regions))[0] < 1e-9
    assert drawing.is_symmetric
    assert [r.name for r in sorted(ribs, key=lambda r: r.name)] == sorted(
        r.name for r in section.ribs
    )
    widths = {rib.name: rib.width for rib in ribs}
    for rib in section.ribs:
        assert widths[rib.name] == pytest.approx(rib.width, abs=1e-9)


@pytest.mark.parametrize("name", DEMOS)
def test_the_q_axis_is_found(name, tmp_path):
    """The design's first q axis lies half a pole pitch from its d axis at angle 0 (exact)."""
    section, edges = lamination(name)
    pieces = drawn(edges, tmp_path, complex(math.cos(0.2), math.sin(0.2)))
    found = recognised_rotor(pieces.edges, HEAL, section.poles).q_axis
    expected = (0.5 * section.pole_angle + 0.2) % section.pole_angle
    assert found == pytest.approx(expected, abs=math.radians(1e-6))


def test_regions_of_the_measured_rotor_tile_their_poles():
    """Areas add up to rounding, cut-outs open to the gap and pockets across d axes included."""
    pieces = read_pieces(DESIGNS / "measured" / "rotor.dxf", 1.0)
    drawing = recognised_rotor(pieces.edges, HEAL, 4)
    poles = drawn_rotor_regions(drawing, 0.0845, 2)
    assert len(poles) == 2
    for regions, _ in poles:
        total = sum(area(r.outer) + sum(map(area, r.holes)) for r in regions)
        assert total == pytest.approx(math.pi / 4 * 0.0845**2, rel=1e-9)


def test_one_pole_drawn_is_the_whole_rotor(tmp_path):
    """The regions of one pole, sides and all, stand for the four poles."""
    section, _ = lamination("demo_24s4p_arc")
    iron = next(r for r in section.rotor if r.name == "rotor_iron")
    pieces = drawn([e for p in (iron.outer, *iron.holes) for e in p.edges], tmp_path)
    drawing = recognised_rotor(pieces.edges, HEAL, 4)
    assert drawing.sectors == 4
    ((regions, _),) = drawn_rotor_regions(drawing, section.circle_radius, 2)
    assert difference(edges_of(regions), edges_of(section.rotor))[0] < 1e-9


def test_an_odd_pole_is_refused_with_its_place(tmp_path):
    """One barrier's edge moved by 0.2 mm, four times what poles meant alike may differ."""
    section, edges = lamination("demo_24s4p_arc")
    contours = lamination_contours(section)
    barrier = contours[-1].path.edges
    odd = [moved(e, 1.0, 2e-4 + 0j) if e in barrier else e for e in edges]
    pieces = drawn(odd, tmp_path)
    with pytest.raises(OutlineError, match="alike neither one by one nor in pairs") as caught:
        recognised_rotor(pieces.edges, HEAL, 4)
    assert caught.value.place is not None


def test_a_rotor_in_pieces_is_refused(tmp_path):
    """A ring and a hub that do not touch are no lamination."""
    drawing = ezdxf.new()
    for radius in (10.0, 20.0, 30.0, 40.0):
        drawing.modelspace().add_circle((0, 0), radius)
    drawing.header["$INSUNITS"] = 4
    drawing.saveas(tmp_path / "rotor.dxf")
    pieces = read_pieces(tmp_path / "rotor.dxf")
    with pytest.raises(OutlineError, match="no q axis"):
        recognised_rotor(pieces.edges, HEAL, 4)


def test_a_rounding_that_runs_into_the_rim_gets_a_corner():
    """Within 1e-5 m: a chord of a rounding r rises c^2 / 8r, depth c^2 / 2r' (derived, small c).

    With r' = r R / (R - r) the rise is less than a quarter of the depth. The air's corner is open
    by half the sweep of the arc that the chord replaces, less the rim's: over 3 degrees here.
    """
    rim, radius = 0.084, 0.003
    centre = rim - radius
    start, end = complex(rim), complex(centre, radius)
    rounding = arc(start, end, complex(centre), ccw=True)
    along = arc(start, rim * cmath.exp(0.1j), 0j, ccw=True)
    before = arc(rim * cmath.exp(-0.1j), start, 0j, ccw=True)
    edges = blunted([rounding, along, before], rim)
    assert len(edges) == 4
    chord = next(e for e in edges if e.is_line)
    assert chord.start == start
    assert difference([rounding], edges)[0] < 1e-5
    assert cmath.phase(chord.direction(0.0) / along.direction(0.0)) > math.radians(3.0)
