"""The gallery's rotors read back from their own drawings: the same iron, cavities and ribs."""

from pathlib import Path

import ezdxf
import pytest

from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Edge, area, circle
from lamwright.geometry.design import NotchDesign
from lamwright.geometry.design_file import read_design, read_machine
from lamwright.geometry.drawn_rotor import recognised_rotor
from lamwright.geometry.drawn_rotor_regions import drawn_rotor_regions
from lamwright.geometry.dxf import write_contours
from lamwright.geometry.dxf_reader import read_pieces
from lamwright.geometry.dxf_release import write_release
from lamwright.geometry.errors import OutlineError
from lamwright.geometry.outline_edges import SAME_CURVE, made_symmetric, turned_edges
from lamwright.geometry.punch_layers import rotor_lamination
from lamwright.geometry.section import Region, base_name, pole_of

GALLERY = Path(__file__).parents[2] / "designs" / "gallery"
HEAL = 1e-5  # m
QUICK = (  # 0.1 to 0.5 s each
    "blower_36s2p",
    "bus_72s8p",
    "fan_12s4p",
    "mill_48s4p",
    "spindle_24s2p",
    "traction_54s6p",
    "washer_12s8p",
    "winder_72s12p",
)
REFUSED = "compressor_24s4p"  # its rim is no arc about the shaft axis
NAMES = sorted(path.stem for path in GALLERY.glob("*.toml") if path.stem != REFUSED)
KEPT = ("rotor_iron", "shaft")


def sizes(regions: tuple[Region, ...]) -> dict[str, tuple[float, float]]:
    """Area and length of the edges of iron, of the shaft, and of all else: cavities and gap.

    What fills a cavity, as magnets and rivets, counts as the cavity; a shaft's key as the shaft.
    """
    found: dict[str, tuple[float, float]] = {}
    for region in regions:
        name = base_name(region.name)
        name = "shaft" if name.startswith("key") else name if name in KEPT else "air"
        paths = (region.outer, *region.holes)
        size, around = found.get(name, (0.0, 0.0))
        length = sum(edge.length for path in paths for edge in path.edges)
        found[name] = (size + sum(map(area, paths)), around + length)
    return found


@pytest.mark.parametrize(
    "name", [pytest.param(n, marks=() if n in QUICK else pytest.mark.slow) for n in NAMES]
)
def test_a_rotors_own_drawing_is_that_rotor(name, tmp_path):
    """Areas to the width of what counts as one curve along their edges; ribs to rounding."""
    section = cross_section(read_design(GALLERY / f"{name}.toml"))
    write_contours(lamination_contours(section), tmp_path / "rotor.dxf")
    edges = read_pieces(tmp_path / "rotor.dxf").edges
    drawing = recognised_rotor(edges, HEAL, section.poles)
    regions, ribs = drawn_rotor_regions(drawing, section.circle_radius, section.pole_pairs)[0]
    own = tuple(region for region in section.rotor if pole_of(region.name) == 1)
    expected, found = sizes(own), sizes(regions)
    assert found.keys() == expected.keys()
    for part, (size, around) in expected.items():
        assert found[part][0] == pytest.approx(size, rel=1e-9, abs=SAME_CURVE * around), part
    widths = sorted(rib.width for rib in section.ribs if pole_of(rib.name) == 1)
    assert sorted(rib.width for rib in ribs) == pytest.approx(widths, abs=1e-9)


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


def test_a_rim_that_is_no_circle_is_refused(tmp_path):
    """The axis is the bore's, and the line names what is not round about it."""
    section = cross_section(read_design(GALLERY / f"{REFUSED}.toml"))
    write_contours(lamination_contours(section), tmp_path / "rotor.dxf")
    with pytest.raises(
        OutlineError,
        match=r"the rim is no circle about the shaft axis at \(0.000, 0.000\) mm: no arc",
    ):
        recognised_rotor(read_pieces(tmp_path / "rotor.dxf").edges, HEAL, 4)


@pytest.mark.parametrize(
    "name",
    [
        "lift_27s6p",
        "spindle_24s2p",
        *(pytest.param(n, marks=pytest.mark.slow) for n in NAMES),
    ],
)
def test_a_released_rotor_tells_its_own_q_axis(name, tmp_path):
    """By its layer DATUM, without a hint, wherever the lamination was moved and turned to.

    Ribs to 1 um, as asked: turned points are rounded to the file's digits.
    """
    section = cross_section(read_design(GALLERY / f"{name}.toml"))
    axis = 0.5 * section.pole_angle
    write_release(rotor_lamination(section), tmp_path / "rotor.dxf", "R2018", ["note"], axis)
    document = ezdxf.readfile(tmp_path / "rotor.dxf")
    for entity in document.modelspace():
        entity.transform(ezdxf.math.Matrix44.z_rotate(0.3) @ ezdxf.math.Matrix44.translate(7, 3, 0))
    document.saveas(tmp_path / "moved.dxf")
    for file, turned in (("rotor.dxf", 0.0), ("moved.dxf", 0.3)):
        pieces = read_pieces(tmp_path / file)
        assert pieces.datum == pytest.approx(axis + turned, abs=1e-9)
        drawing = recognised_rotor(pieces.edges, HEAL, section.poles, pieces.datum)
        _, ribs = drawn_rotor_regions(drawing, section.circle_radius, section.pole_pairs)[0]
        widths = sorted(rib.width for rib in section.ribs if pole_of(rib.name) == 1)
        assert sorted(rib.width for rib in ribs) == pytest.approx(widths, abs=1e-6)


@pytest.mark.parametrize("bottom", ["round", "flat"])
def test_a_notch_on_the_q_axis_is_no_barrier(bottom):
    """The barriers keep their numbers and ribs; the notch is one more hole."""
    design = read_design(GALLERY / "fan_12s4p.toml")
    notch = NotchDesign(angle_deg=0.0, width_mm=2.0, depth_mm=0.6, bottom=bottom)
    rotor = design.rotor.model_copy(update={"notch": (notch,)})
    found = []
    for one in (design, design.model_copy(update={"rotor": rotor})):
        contours = lamination_contours(cross_section(one))
        edges = [edge for contour in contours for edge in contour.path.edges]
        found.append(recognised_rotor(edges, HEAL, 4).poles[0])
    plain, notched = found
    names = [part.name for part in plain.air if part.name.startswith("barrier")]
    assert [part.name for part in notched.air if part.name.startswith("barrier")] == names
    assert len(notched.air) == len(plain.air) + 1
    assert [rib.width for rib in notched.ribs] == pytest.approx([rib.width for rib in plain.ribs])


@pytest.mark.parametrize("is_round", [True, False])
def test_a_weight_hole_on_the_q_axis_is_no_barrier(is_round):
    """Round or square, between the bore and the last barrier: that is one more hole, no rib."""
    section = cross_section(read_design(GALLERY / "fan_12s4p.toml"))
    edges = [edge for c in lamination_contours(section) for edge in c.path.edges]
    plain = recognised_rotor(edges, HEAL, 4).poles[0]
    bore = min(abs(edge.start) for edge in edges)
    lowest = min(
        abs(e.point(0.5)) for r in section.rotor if "barrier" in r.name for e in r.outer.edges
    )
    middle, size = 0.5 * (bore + lowest), 0.2 * (lowest - bore)
    corners = [middle + size * 1j**k for k in range(4)]
    square = [Edge(a, b) for a, b in zip(corners, corners[1:] + corners[:1], strict=True)]
    hole = circle(complex(middle), size).edges if is_round else square
    for k in range(4):
        edges += turned_edges(hole, (k + 0.5) * section.pole_angle)
    pole = recognised_rotor(edges, HEAL, 4).poles[0]
    assert [part.name for part in pole.air] == [*(part.name for part in plain.air), "hole_1"]
    assert [rib.width for rib in pole.ribs] == pytest.approx([r.width for r in plain.ribs])


def test_a_chord_and_its_arc_stay_apart_when_made_symmetric():
    """Half a disc: the arc keeps its bulge and the chord none, though their ends are the same."""
    half = [Edge(-1j, 1j, 1.0), Edge(1j, -1j)]
    made = made_symmetric([Edge(e.start + 1e-6, e.end, e.bulge) for e in half], 1e-5)
    assert [e.bulge for e in made or ()] == [1.0, 0.0]
