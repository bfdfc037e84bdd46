"""The gallery's rotors read back from their own drawings: the same iron, cavities and ribs."""

from pathlib import Path

import pytest

from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Edge, area
from lamwright.geometry.design_file import read_design, read_machine
from lamwright.geometry.drawn_rotor import recognised_rotor
from lamwright.geometry.drawn_rotor_regions import drawn_rotor_regions
from lamwright.geometry.dxf import write_contours
from lamwright.geometry.dxf_reader import read_pieces
from lamwright.geometry.outline_edges import SAME_CURVE, made_symmetric
from lamwright.geometry.section import Region

GALLERY = Path(__file__).parents[2] / "designs" / "gallery"
HEAL = 1e-5  # m
QUICK = ("blower_36s2p", "fan_12s4p", "ropeway_48s8p", "spindle_24s2p")  # 0.07 to 0.3 s each


def sizes(regions: tuple[Region, ...]) -> dict[str, tuple[float, float]]:
    """Area and circumference of a pole's iron, shaft and gap, and of its air as one."""
    found: dict[str, tuple[float, float]] = {}
    for region in regions:
        kept = region.name in ("rotor_iron", "shaft", "gap_rotor")
        name = region.name if kept else "air"
        paths = (region.outer, *region.holes)
        size, around = found.get(name, (0.0, 0.0))
        length = sum(edge.length for path in paths for edge in path.edges)
        found[name] = (size + sum(map(area, paths)), around + length)
    return found


@pytest.mark.parametrize("name", QUICK)
def test_a_rotors_own_drawing_is_that_rotor(name, tmp_path):
    """Areas to the width of what counts as one curve along their edges; ribs to rounding."""
    section = cross_section(read_design(GALLERY / f"{name}.toml"))
    write_contours(lamination_contours(section), tmp_path / "rotor.dxf")
    edges = read_pieces(tmp_path / "rotor.dxf").edges
    drawing = recognised_rotor(edges, HEAL, section.poles)
    regions, ribs = drawn_rotor_regions(drawing, section.circle_radius, section.pole_pairs)[0]
    own = tuple(r for r in section.rotor if not r.name.startswith("p2_"))
    expected, found = sizes(own), sizes(regions)
    assert found.keys() == expected.keys()
    for part, (size, around) in expected.items():
        assert found[part][0] == pytest.approx(size, rel=1e-9, abs=SAME_CURVE * around), part
    widths = sorted(rib.width for rib in section.ribs if not rib.name.startswith("p2_"))
    assert sorted(rib.width for rib in ribs) == pytest.approx(widths, abs=1e-9)
    # A q axis is known up to whole poles.
    turns = (drawing.q_axis - 0.5 * section.pole_angle) / section.pole_angle
    assert turns == pytest.approx(round(turns), abs=1e-6)


def test_a_design_of_two_poles_may_name_its_drawing(tmp_path):
    """Both d axes lie on one line: gap and bore come from the drawing, and the iron is the same."""
    text = (GALLERY / "spindle_24s2p.toml").read_text()
    original = read_design(GALLERY / "spindle_24s2p.toml")
    section = cross_section(original)
    write_contours(lamination_contours(section), tmp_path / "rotor.dxf")
    before, rest = text.split("[rotor]\n")
    after = rest[rest.index("[steel]") :].replace("../steel", str(GALLERY.parent / "steel"))
    rotor = 'outline_dxf = "rotor.dxf"\npoles = 2\nsheet_thickness_mm = 0.35\n'
    path = tmp_path / "drawn.toml"
    path.write_text(f"{before}[rotor]\n{rotor}\n{after}")
    design = read_machine(path).design
    assert design.rotor.gap_mm == pytest.approx(original.rotor.gap_mm, abs=1e-6)
    assert design.rotor.shaft_diameter_mm == pytest.approx(16.0, abs=1e-6)
    found, expected = sizes(cross_section(design).rotor), sizes(section.rotor)
    assert found["rotor_iron"][0] == pytest.approx(expected["rotor_iron"][0], rel=1e-6)
    assert len(cross_section(design).ribs) == len(section.ribs)


def test_a_chord_and_its_arc_stay_apart_when_made_symmetric():
    """Half a disc: the arc keeps its bulge and the chord none, though their ends are the same."""
    half = [Edge(-1j, 1j, 1.0), Edge(1j, -1j)]
    made = made_symmetric([Edge(e.start + 1e-6, e.end, e.bulge) for e in half], 1e-5)
    assert [e.bulge for e in made or ()] == [1.0, 0.0]
