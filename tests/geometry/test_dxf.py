"""The punch outline: joined from the pole, written, read back by two readers, compared."""

import cmath
import json
import math
import os
import subprocess
import sys
import tomllib
from pathlib import Path as FilePath

import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import (
    Edge,
    Path,
    arc,
    area,
    circle,
    line,
    perimeter,
    reversed_path,
    turned,
)
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_details import HoleDesign, KeywayDesign
from lamwright.geometry.design_file import read_design
from lamwright.geometry.dxf import (
    Contour,
    compare_contours,
    lamination_contours,
    read_contours,
    write_contours,
    write_lamination,
)
from lamwright.geometry.errors import DesignError
from lamwright.geometry.section import CrossSection, Region

DEMO = FilePath(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"
MM = 1e-3


@pytest.fixture(scope="module")
def section() -> CrossSection:
    table = tomllib.loads(DEMO.read_text(encoding="utf-8"))
    return cross_section(MachineDesign.model_validate_json(json.dumps(table)))


@pytest.fixture
def written(section, tmp_path) -> FilePath:
    path = tmp_path / "rotor.dxf"
    write_lamination(section, path)
    return path


def groups(path: FilePath) -> list[tuple[int, str]]:
    """The file as pairs of group code and value, read without any library."""
    rows = path.read_text(encoding="ascii").splitlines()
    return [(int(code), value) for code, value in zip(rows[::2], rows[1::2], strict=True)]


def iron_of(section: CrossSection) -> Region:
    return next(region for region in section.rotor if region.name == "rotor_iron")


def test_area_and_perimeter_are_those_of_the_analysed_iron(section, written):
    """All poles: area of iron; perimeter without the sector's two sides. Demanded 1e-6."""
    contours, iron, poles = read_contours(written), iron_of(section), 2 * section.pole_pairs
    analysed = poles * (area(iron.outer) + sum(area(hole) for hole in iron.holes))
    assert sum(area(contour.path) for contour in contours) == pytest.approx(analysed, rel=1e-13)
    sides = 2.0 * (section.rotor_radius - section.shaft_radius)
    cut = perimeter(iron.outer) - sides + sum(perimeter(hole) for hole in iron.holes)
    assert sum(perimeter(c.path) for c in contours) == pytest.approx(poles * cut, rel=1e-13)


def test_every_vertex_survives(section, written):
    """Vertices and arc middles, written and read back: demanded 1 um, rounding is 1e-17 m."""
    deviation = compare_contours(lamination_contours(section), read_contours(written))
    assert deviation < 1e-15


def test_contours_of_the_demonstration_rotor(section):
    """One rim, one bore, three cavities on each of four poles; sheet left of every contour."""
    contours = lamination_contours(section)
    layers = [contour.layer for contour in contours]
    assert layers == ["OUTER_CONTOUR", "BORE"] + 12 * ["BARRIERS"]
    assert [area(contour.path) > 0.0 for contour in contours] == [True] + 13 * [False]
    assert area(contours[0].path) == pytest.approx(math.pi * section.rotor_radius**2, rel=1e-14)
    assert area(contours[1].path) == pytest.approx(-math.pi * section.shaft_radius**2, rel=1e-14)
    for contour in contours:
        edges = contour.path.edges
        for edge, following in zip(edges, (*edges[1:], edges[0]), strict=True):
            assert edge.end == following.start
            assert abs(edge.end - edge.start) > 1e-6  # m, no doubled vertex


def test_no_contour_is_cut_twice(section):
    """Means of the barriers' vertices are all different places; each barrier on each pole once."""
    barriers = [c for c in lamination_contours(section) if c.layer == "BARRIERS"]
    places = [sum(e.start for e in c.path.edges) / len(c.path.edges) for c in barriers]
    apart = [abs(a - b) for k, a in enumerate(places) for b in places[:k]]
    assert min(apart) > 1e-3
    for k in range(3):
        on_poles = places[k::3]
        for pole, place in enumerate(on_poles):
            assert place == pytest.approx(on_poles[0] * cmath.exp(0.5j * math.pi * pole))


def test_the_file_read_without_a_library(section, written):
    """Group codes of the DXF reference: R2010, millimetres, closed polylines on the cut layers."""
    pairs = groups(written)
    header = {pairs[k][1]: pairs[k + 1] for k, pair in enumerate(pairs) if pair[0] == 9}
    assert header["$ACADVER"] == (1, "AC1024")
    assert header["$INSUNITS"] == (70, "4")
    assert header["$MEASUREMENT"] == (70, "1")
    assert pairs[0] == (999, "Lamwright: lamination outline, millimetres, shaft axis at 0 0")
    first = pairs.index((2, "ENTITIES"))
    last = pairs.index((0, "ENDSEC"), first)
    body = pairs[first + 1 : last]
    starts = [k for k, (code, _) in enumerate(body) if code == 0]
    contours = lamination_contours(section)
    assert len(starts) == len(contours)
    for contour, start, end in zip(contours, starts, [*starts[1:], len(body)], strict=True):
        entity = body[start:end]
        assert entity[0] == (0, "LWPOLYLINE")
        assert (8, contour.layer) in entity
        assert int(dict(entity)[70]) & 1 == 1
        x, y = ([float(v) for code, v in entity if code == group] for group in (10, 20))
        points = [complex(*xy) for xy in zip(x, y, strict=True)]
        vertices = [edge.start / MM for edge in contour.path.edges]
        assert points == pytest.approx(vertices, abs=1e-12)  # mm
        bulges = [float(value) for code, value in entity if code == 42]
        given = [edge.bulge for edge in contour.path.edges]
        assert bulges == pytest.approx(given, abs=1e-15)


def test_other_readers_find_nothing_to_repair(written):
    """The library's own audit of the file; the layers are named and no other entity is there."""
    import ezdxf

    document = ezdxf.readfile(written)
    auditor = document.audit()
    assert not auditor.errors
    assert not auditor.fixes
    layers = {layer.dxf.name for layer in document.layers} - {"0", "Defpoints"}
    assert layers == {"OUTER_CONTOUR", "BORE", "BARRIERS"}
    assert len(document.paperspace()) == 0
    reach = document.modelspace().dxf.extmax[0]
    assert reach == pytest.approx(40.6, abs=1e-9)


BULGES = [(90.0, 0.414214), (60.0, 0.267949), (45.0, 0.198912), (30.0, 0.131652), (180.0, 1.0)]


@pytest.mark.parametrize(("sweep", "bulge"), BULGES)
def test_bulge_of_an_arc(sweep, bulge, tmp_path):
    """DXF reference, group 42: tan(sweep / 4), negative clockwise; six digits given.

    The pair of arc and chord encloses R^2/2 (a - sin a): closed form, rounding.
    """
    a, radius = math.radians(sweep), 7e-3
    start, end = radius + 0j, radius * cmath.exp(1j * a)
    segment = Path((arc(start, end, 0j, ccw=True), line(end, start)))
    path = tmp_path / "segment.dxf"
    both = [Contour("OUTER_CONTOUR", segment), Contour("BARRIERS", reversed_path(segment))]
    write_contours(both, path)
    positive, negative = read_contours(path)
    assert positive.path.edges[0].bulge == pytest.approx(bulge, abs=5e-7)
    assert negative.path.edges[1].bulge == pytest.approx(-bulge, abs=5e-7)
    enclosed = 0.5 * radius**2 * (a - math.sin(a))
    assert area(positive.path) == pytest.approx(enclosed, rel=1e-12)
    assert area(negative.path) == pytest.approx(-enclosed, rel=1e-12)
    assert positive.path.edges[0].radius == pytest.approx(radius, rel=1e-12)


def test_square_with_round_sides_is_a_circle(tmp_path):
    """Square of 10 mm, 90 degree bulges: pi 50 mm2, circumference 2 pi 7.07107 mm, rounding."""
    corners = [5 + 5j, -5 + 5j, -5 - 5j, 5 - 5j]
    bulge = math.tan(math.pi / 8)
    ends = [*corners[1:], corners[0]]
    edges = [Edge(MM * a, MM * b, bulge) for a, b in zip(corners, ends, strict=True)]
    path = tmp_path / "square.dxf"
    write_contours([Contour("OUTER_CONTOUR", Path(tuple(edges)))], path)
    (contour,) = read_contours(path)
    assert area(contour.path) == pytest.approx(math.pi * 50e-6, rel=1e-12)
    assert perimeter(contour.path) == pytest.approx(44.4288e-3, rel=2e-6)
    assert contour.path.edges[2].centre == pytest.approx(0j, abs=1e-15)


def slotted(pole_pairs: int, side: complex | None = None) -> CrossSection:
    """A rotor with a round hole on every d axis, half of it on either side of the sector."""
    side = cmath.exp(1j * math.pi / pole_pairs) if side is None else side
    bore, hole, rim = 5.0 * MM, 2.0 * MM, 30.0 * MM
    place = 20.0 * MM
    outer = (
        line(bore + 0j, place - hole + 0j),
        arc(place - hole + 0j, place + hole + 0j, place + 0j, ccw=False),
        line(place + hole + 0j, rim + 0j),
        arc(rim + 0j, rim * side, 0j, ccw=True),
        line(rim * side, (place + hole) * side),
        arc((place + hole) * side, (place - hole) * side, place * side, ccw=False),
        line((place - hole) * side, bore * side),
        arc(bore * side, bore + 0j, 0j, ccw=False),
    )
    inner = reversed_path(turned(circle(12.0 * MM + 0j, 1.0 * MM), 0.5 * math.pi / pole_pairs))
    iron = Region("rotor_iron", "rotor_steel", Path(outer), (inner,))
    return CrossSection(
        pole_pairs, 0.1, rim, bore, rim + MM, 60 * MM, 6 * pole_pairs, (iron,), (), ()
    )


# The far side of one pole pair is the negative x axis, where a phase is pi or -pi.
@pytest.mark.parametrize(
    ("pole_pairs", "side"),
    [(1, None), (1, complex(-1.0, 0.0)), (1, complex(-1.0, -0.0)), (2, None), (6, None)],
)
def test_holes_across_the_sector_sides_become_whole(pole_pairs, side, tmp_path):
    """Half holes of neighbouring poles join: 2p whole circles of 2 mm, 2p of 1 mm; rounding."""
    path = tmp_path / "slotted.dxf"
    write_lamination(slotted(pole_pairs, side), path)
    contours = read_contours(path)
    assert [c.layer for c in contours[:2]] == ["OUTER_CONTOUR", "BORE"]
    holes = sorted(-area(c.path) for c in contours if c.layer == "BARRIERS")
    small, large = 2 * pole_pairs * [math.pi * 1e-6], 2 * pole_pairs * [math.pi * 4e-6]
    assert holes == pytest.approx(small + large, rel=1e-12)
    assert area(contours[0].path) == pytest.approx(math.pi * 900e-6, rel=1e-12)
    assert area(contours[1].path) == pytest.approx(-math.pi * 25e-6, rel=1e-12)


def test_holes_have_a_layer_of_their_own(tmp_path):
    """Holes inside the pole, on its q axis and across its sides; keyways stay with the bore.

    Areas are the circles'; what is read back is what was written.
    """
    holes = (
        HoleDesign(place_radius_mm=25.0, angle_deg=45.0, diameter_mm=4.0, material="rivet"),
        HoleDesign(place_radius_mm=17.0, angle_deg=20.0, diameter_mm=3.0),
        HoleDesign(place_radius_mm=32.5, angle_deg=0.0, diameter_mm=2.0),
    )
    key = KeywayDesign(count=2, width_mm=4.0, depth_mm=2.0)
    design = read_design(DEMO)
    rotor = design.rotor.model_copy(update={"hole": holes, "keyway": key})
    section = cross_section(design.model_copy(update={"rotor": rotor}))
    path = tmp_path / "holes.dxf"
    write_lamination(section, path)
    contours = read_contours(path)
    layers = [contour.layer for contour in contours]
    assert layers == ["OUTER_CONTOUR", "BORE"] + 12 * ["BARRIERS"] + 16 * ["HOLES"]
    areas = sorted(-area(c.path) / MM**2 for c in contours if c.layer == "HOLES")
    circles = [4 * [math.pi], 8 * [2.25 * math.pi], 4 * [4.0 * math.pi]]
    assert areas == pytest.approx([one for same in circles for one in same], rel=1e-12)
    assert compare_contours(lamination_contours(section), contours) < 1e-15


def test_an_outline_that_does_not_close_is_an_error():
    """A chain that meets no other on the next pole cannot be joined."""
    whole = slotted(2)
    edges = list(whole.rotor[0].outer.edges)
    far = 1.0001 * edges[1].end
    edges[1:3] = [Edge(edges[1].start, far, edges[1].bulge), line(far, edges[2].end)]
    iron = Region("rotor_iron", "rotor_steel", Path(tuple(edges)))
    broken = CrossSection(2, 0.1, 30 * MM, 5 * MM, 31 * MM, 60 * MM, 12, (iron,), (), ())
    with pytest.raises(ValueError, match=r"outline of rotor iron open at radius 0\.022"):
        lamination_contours(broken)


def test_comparison_sees_what_a_die_would(section):
    """A vertex moved 2 um, a bulge of the same vertices, a lost contour; not start or direction."""
    contours = lamination_contours(section)
    assert compare_contours(contours, contours) == 0.0
    barrier = contours[5]
    first, *rest = barrier.path.edges
    last = rest[-1]

    def changed(path: Path) -> tuple[Contour, ...]:
        return (*contours[:5], Contour(barrier.layer, path), *contours[6:])

    moved = first.start + 2e-6
    shifted = Path(
        (Edge(moved, first.end, first.bulge), *rest[:-1], Edge(last.start, moved, last.bulge))
    )
    # The arcs' middles move by less than the vertex does.
    assert compare_contours(contours, changed(shifted)) == pytest.approx(2e-6, rel=1e-6)
    bent = Path((Edge(first.start, first.end, 1.01 * first.bulge), *rest))
    # Sagitta = bulge times half the chord (definition of the bulge).
    sagitta = 0.01 * abs(first.bulge) * 0.5 * abs(first.end - first.start)
    assert compare_contours(contours, changed(bent)) == pytest.approx(sagitta, rel=1e-9)
    assert compare_contours(contours, contours[:-1]) == math.inf
    assert compare_contours(contours[:-1], contours) == math.inf
    elsewhere = (*contours[:5], Contour("BORE", barrier.path), *contours[6:])
    assert compare_contours(contours, elsewhere) == math.inf
    same = reversed_path(Path((*rest, first)))
    assert compare_contours(contours, changed(same)[::-1]) < 1e-15


def test_same_outline_same_bytes(section, written, tmp_path):
    """Two saves in one run are the same file; another outline has another identifier."""
    again = tmp_path / "again.dxf"
    write_lamination(section, again)
    assert again.read_bytes() == written.read_bytes()
    write_lamination(slotted(2), again)

    def identifier(path: FilePath) -> str:
        pairs = groups(path)
        return pairs[pairs.index((9, "$VERSIONGUID")) + 1][1]

    assert identifier(again) != identifier(written)
    assert "$TDUPDATE" not in written.read_text(encoding="ascii")


def test_same_bytes_in_another_process(tmp_path):
    """The order of sets differs between hash seeds; the file must not."""
    code = (
        "import sys; from pathlib import Path as P;"
        "from lamwright.geometry.curves import circle;"
        "from lamwright.geometry.dxf import Contour, write_contours;"
        "write_contours([Contour('BORE', circle(0j, 0.01))], P(sys.argv[1]))"
    )
    # Seeds 3 and 4 order the library's set of classes differently (Python 3.11).
    files = [tmp_path / f"{seed}.dxf" for seed in ("3", "4")]
    for file in files:
        environment = {**os.environ, "PYTHONHASHSEED": file.stem}
        subprocess.run([sys.executable, "-c", code, str(file)], check=True, env=environment)
    assert len({file.read_bytes() for file in files}) == 1


def test_a_failed_write_leaves_the_old_file(section, written, monkeypatch):
    """The new file takes the old one's place only when complete; nothing else is left behind."""
    before = written.read_bytes()

    def refuse(self: FilePath, target: FilePath) -> None:
        raise OSError("disk full")

    monkeypatch.setattr(FilePath, "replace", refuse)
    with pytest.raises(OSError, match="disk full"):
        write_lamination(slotted(2), written)
    assert written.read_bytes() == before
    assert [file.name for file in written.parent.iterdir()] == ["rotor.dxf"]


def test_unreadable_files_are_refused(tmp_path):
    """Missing, empty, junk, half a file, not text: one line that names the file."""
    good = tmp_path / "good.dxf"
    write_lamination(slotted(2), good)
    text = good.read_text(encoding="ascii")
    contents = {"empty": b"", "junk": b"no such thing\n" * 20, "bytes": bytes(range(256)) * 8}
    contents["half"] = text[: len(text) // 2].encode()
    contents["half line"] = text[: text.index("LWPOLYLINE") - 1].encode()
    contents["number"] = text.replace("\n 42\n1.0\n", "\n 42\n1.O\n", 1).encode()
    contents["infinite"] = text.replace("\n 42\n1.0\n", "\n 42\ninf\n", 1).encode()
    contents["character"] = text.replace("\n 42\n", "\n 4\xe9\n", 1).encode("latin-1")
    for name, content in contents.items():
        file = tmp_path / f"{name}.dxf"
        file.write_bytes(content)
        with pytest.raises(DesignError, match=rf"{name}\.dxf: ") as raised:
            read_contours(file)
        assert "\n" not in str(raised.value)
    with pytest.raises(DesignError, match=r"none\.dxf: not a readable DXF file"):
        read_contours(tmp_path / "none.dxf")


def test_what_is_not_our_outline_is_refused(tmp_path):
    """Inches, an open polyline, a loose line, no contour at all."""
    import ezdxf

    def saved(units: int, *, closed: bool | None, loose: bool = False) -> FilePath:
        document = ezdxf.new("R2010")
        document.units = units
        model = document.modelspace()
        if closed is not None:
            model.add_lwpolyline([(0, 0), (1, 0), (1, 1)], close=closed)
        if loose:
            model.add_line((0, 0), (1, 1), dxfattribs={"layer": "BORE"})
        path = tmp_path / "other.dxf"
        document.saveas(path)
        return path

    assert len(read_contours(saved(4, closed=True))) == 1
    with pytest.raises(DesignError, match=r"\$INSUNITS is not 4; millimetres needed"):
        read_contours(saved(1, closed=True))
    with pytest.raises(DesignError, match="LWPOLYLINE on layer 0 is no closed polyline"):
        read_contours(saved(4, closed=False))
    with pytest.raises(DesignError, match="LINE on layer BORE is no closed polyline"):
        read_contours(saved(4, closed=True, loose=True))
    with pytest.raises(DesignError, match="no contour in the file"):
        read_contours(saved(4, closed=None))
