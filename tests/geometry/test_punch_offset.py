"""What is punched: parallels in closed form, against shapely's buffer, and there and back again.

Out and in by d returns the outline to the last bits wherever no arc is used up on the way: every
arc that bends away from the side it moves to has a radius above d, and corners are kept sharp.
Rolled corners come back too where they opened on the way out, but not where they closed.
"""

import cmath
import functools
import math
from pathlib import Path as FilePath

import numpy as np
import pytest
import shapely
from outlines import DESIGNS, polygon
from random_designs import random_design

from lamwright.geometry.contours import Contour, compare_contours
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
from lamwright.geometry.design_file import read_design
from lamwright.geometry.distances import distance
from lamwright.geometry.enclosure import encloses
from lamwright.geometry.errors import DesignError, OffsetError
from lamwright.geometry.offset_loops import offset_loops
from lamwright.geometry.outline_edges import distance_to
from lamwright.geometry.punch_layers import rotor_lamination, stator_lamination
from lamwright.geometry.punch_offset import punched
from lamwright.geometry.punch_options import Corners, PunchOptions
from lamwright.geometry.section import CrossSection

MM = 1e-3  # m
UM = 1e-6  # m
DEMOS = ("demo_24s4p_arc", "demo_36s4p_magnet", "demo_36s4p_straight", "demo_36s6p_arc")
# Every shipped design that is a machine; other files lie beside them.
MACHINES = sorted(p for p in DESIGNS.glob("**/*.toml") if "\n[stator]\n" in p.read_text())
SAG = 1e-7  # m of the polygons' chords: 1/20 of what is promised


@functools.cache
def section(name: str) -> CrossSection:
    return cross_section(read_design(DESIGNS / f"{name}.toml"))


def rectangle(width: float, height: float) -> Path:
    """A counter-clockwise rectangle of sharp corners, in mm given, about the origin."""
    a, b = 0.5 * MM * width, 0.5 * MM * height
    corners = [complex(-a, -b), complex(a, -b), complex(a, b), complex(-a, b)]
    return Path(tuple(line(p, q) for p, q in zip(corners, corners[1:] + corners[:1], strict=True)))


def only(loops: tuple[Path, ...]) -> Path:
    (loop,) = loops
    return loop


def difference(first: Path, second: Path) -> float:
    return compare_contours([Contour("", first)], [Contour("", second)])


@pytest.mark.parametrize("d", [0.3 * MM, -0.3 * MM])
def test_circles_and_rounded_shapes_grow_by_steiners_formula(d):
    """A smooth convex outline of area A and length L has a parallel of area A + L d + pi d^2."""
    slot = Path(
        (
            line(-3 * MM - 1j * MM, 3 * MM - 1j * MM),
            arc(3 * MM - 1j * MM, 3 * MM + 1j * MM, 3 * MM + 0j, ccw=True),
            line(3 * MM + 1j * MM, -3 * MM + 1j * MM),
            arc(-3 * MM + 1j * MM, -3 * MM - 1j * MM, -3 * MM + 0j, ccw=True),
        )
    )
    for path in (circle(2 * MM + 1j * MM, 4 * MM), slot):
        found = only(offset_loops(path, d, "sharp"))
        expected = area(path) + perimeter(path) * d + math.pi * d**2
        assert area(found) == pytest.approx(expected, rel=1e-12)
        assert len(found.edges) == len(path.edges)
        # Run the other way the same outline is a hole, which the steel's growth makes smaller.
        hole = only(offset_loops(reversed_path(path), -d, "sharp"))
        assert difference(reversed_path(hole), found) < 1e-15


def test_corners_stay_sharp_or_are_rolled():
    """A rectangle a by b: (a + 2 d)(b + 2 d) with sharp corners, less (4 - pi) d^2 rolled."""
    d, box = 0.2 * MM, rectangle(8.0, 5.0)
    sharp, rolled = (only(offset_loops(box, d, c)) for c in ("sharp", "round"))
    assert area(sharp) == pytest.approx(8.4 * 5.4 * MM**2, rel=1e-12)
    assert area(rolled) == pytest.approx(8.4 * 5.4 * MM**2 - (4 - math.pi) * d**2, rel=1e-12)
    assert [len(p.edges) for p in (sharp, rolled)] == [4, 8]
    for corners in ("sharp", "round"):
        shrunk = only(offset_loops(box, -d, corners))
        assert area(shrunk) == pytest.approx(7.6 * 4.6 * MM**2, rel=1e-12)


def test_rolled_corners_come_back_where_they_opened_and_not_where_they_closed():
    """The rule of the module's head; a corner closed and opened again is an arc of radius d."""
    d, box = 0.2 * MM, rectangle(8.0, 5.0)
    out_and_in = only(offset_loops(only(offset_loops(box, d, "round")), -d, "round"))
    assert difference(out_and_in, box) < 1e-12
    in_and_out = only(offset_loops(only(offset_loops(box, -d, "round")), d, "round"))
    assert area(in_and_out) == pytest.approx(area(box) - (4 - math.pi) * d**2, rel=1e-12)
    assert difference(only(offset_loops(only(offset_loops(box, -d, "sharp")), d, "sharp")), box) < (
        1e-12
    )


def test_small_arcs_are_used_up_and_the_sides_meet():
    """Corners of 0.3 mm shrunk by 0.5 mm are sharp: what is left is the plain rectangle."""
    box = rectangle(8.0, 5.0)
    rounded = only(offset_loops(only(offset_loops(box, -0.3 * MM, "round")), 0.3 * MM, "round"))
    assert len(rounded.edges) == 8
    shrunk = only(offset_loops(rounded, -0.5 * MM, "sharp"))
    assert difference(shrunk, rectangle(7.0, 4.0)) < 1e-12


def test_a_waist_falls_apart_and_a_narrow_shape_goes():
    """A dumb-bell with a neck of 1 mm is two at -0.6 mm, and nothing at -3.5 mm."""
    neck, end = 0.5 * MM, 3.0 * MM
    at = math.sqrt(end**2 - neck**2)
    right, left = 6.0 * MM - at, -6.0 * MM + at
    bell = Path(
        (
            line(complex(left, -neck), complex(right, -neck)),
            arc(complex(right, -neck), complex(right, neck), 6.0 * MM + 0j, ccw=True),
            line(complex(right, neck), complex(left, neck)),
            arc(complex(left, neck), complex(left, -neck), -6.0 * MM + 0j, ccw=True),
        )
    )
    assert len(offset_loops(bell, -0.4 * MM, "sharp")) == 1
    parts = offset_loops(bell, -0.6 * MM, "round")
    rough = polygon(bell, SAG).buffer(-0.6 * MM, quad_segs=200)
    # The polygon lies up to `SAG` inside its arcs of 15 mm in all: 8e-5 of the area.
    assert [area(p) for p in parts] == pytest.approx([g.area for g in rough.geoms], rel=1e-4)
    # Kept sharp, the corners of the neck meet across it, and there is nothing whole to tell.
    assert len(offset_loops(bell, -0.6 * MM, "sharp")) != 1
    assert offset_loops(bell, -3.5 * MM, "sharp") == ()


@pytest.mark.parametrize("name", DEMOS[:1])
@pytest.mark.parametrize("tool_mm", [0.1, -0.1])
def test_out_and_in_returns_the_shipped_laminations(name, tool_mm):
    """To 1 um as promised, measured 1e-5 um: no arc of these has a radius of 0.1 mm or less."""
    for contours in (rotor_lamination(section(name)), stator_lamination(section(name))):
        out = punched(contours, PunchOptions(tool_mm))
        assert compare_contours(contours, out) == pytest.approx(abs(tool_mm) * MM, rel=0.5)
        assert compare_contours(contours, punched(out, PunchOptions(-tool_mm))) < 1e-10


@pytest.mark.parametrize("corners", ["sharp", "round"])
@pytest.mark.parametrize("tool_mm", [0.15, -0.15])
def test_shapelys_buffer_agrees(corners: Corners, tool_mm):
    """To 2 um as promised, both ways; of polygons with chords within 0.1 um of their arcs."""
    name = "demo_36s4p_straight"
    contours = rotor_lamination(section(name))
    # One pole's barriers, the bore and the rim.
    _agree([c for c in contours if _is_of_first_pole(c, section(name))], corners, tool_mm)


def _is_of_first_pole(contour: Contour, of: CrossSection) -> bool:
    angle = cmath.phase(contour.path.edges[0].start) % (2.0 * math.pi)
    return contour.layer != "BARRIERS" or angle < of.pole_angle


@pytest.mark.slow
@pytest.mark.parametrize("corners", ["sharp", "round"])
def test_shapelys_buffer_agrees_on_a_stator_with_sharp_corners(corners: Corners):
    """A tooth's tip has corners that open and others that close, whichever way it moves."""
    slots = [c for c in stator_lamination(section("demo_24s4p_arc")) if c.layer == "SLOTS"]
    for tool_mm in (0.1, -0.1):
        _agree(slots, corners, tool_mm)


def _agree(contours, corners: Corners, tool_mm: float) -> None:
    for contour in contours:
        grown = tool_mm if contour.layer == "OUTER_CONTOUR" else -tool_mm
        rough = polygon(contour.path, SAG).buffer(
            grown * MM,
            quad_segs=32,
            join_style="mitre" if corners == "sharp" else "round",
            mitre_limit=5.0,
        )
        path = only(offset_loops(contour.path, tool_mm * MM, corners))
        fine = polygon(path, SAG)
        # Symmetric difference by its greatest width: every vertex of one on the other.
        for first, second in ((rough, fine), (fine, rough)):
            points = shapely.points(shapely.get_coordinates(first))
            assert shapely.distance(points, second.exterior).max() < 2.0 * UM
        assert abs(rough.area - fine.area) < 2.0 * UM * fine.length


@pytest.mark.parametrize(
    "seed", [*range(2), *(pytest.param(n, marks=pytest.mark.slow) for n in range(2, 40))]
)
def test_random_rotors_keep_the_laws_of_parallels(seed):
    """Every point of a parallel is at d from the outline; it comes back; strips have their area."""
    rng = np.random.default_rng(seed)
    contours = rotor_lamination(cross_section(random_design(rng)))
    least = min(e.radius for c in contours for e in c.path.edges if not e.is_line)
    d = min(float(rng.uniform(0.02, 0.1)), 0.4 * least / MM)
    for tool_mm in (d, -d):
        out = punched(contours, PunchOptions(tool_mm))
        assert compare_contours(contours, punched(out, PunchOptions(-tool_mm))) < 1e-9
        for before, after in zip(contours, out, strict=True):
            for edge in after.path.edges:
                gap = min(distance_to(other, edge.point(0.5)) for other in before.path.edges)
                assert gap == pytest.approx(d * MM, abs=1e-9)
            strip = area(after.path) - area(before.path)
            assert strip == pytest.approx(tool_mm * MM * perimeter(before.path), rel=0.2)


def test_what_would_close_is_refused_with_place_and_limit():
    """The thinnest barrier of the demo is 2.6 mm thick: its halves meet at 1.3 mm."""
    contours = rotor_lamination(section("demo_24s4p_arc"))
    barriers = [c for c in contours if c.layer == "BARRIERS"]
    widths = sorted(2.0 * _inner_radius(c.path) / MM for c in barriers)
    wide = [c for c in barriers if 2.0 * _inner_radius(c.path) / MM < widths[0] + 1e-6]
    limit = 0.5 * widths[0]
    assert limit > 1.0  # what the options accept: so scaled to a thinner rotor
    share = 0.5 / limit
    small = [_scaled(c, share) for c in contours]
    with pytest.raises(OffsetError, match=r"tool_offset_mm = 0.6: would close a contour of layer "):
        punched(small, PunchOptions(0.6))
    with pytest.raises(OffsetError) as caught:
        punched(small, PunchOptions(0.6))
    assert "at most 0.4999 is possible" in str(caught.value) or (
        "at most 0.5 is possible" in str(caught.value)
    )
    assert any(encloses(_scaled(c, share).path, caught.value.place) for c in wide)
    punched(small, PunchOptions(0.4999))


def _scaled(contour: Contour, share: float) -> Contour:
    edges = (Edge(share * e.start, share * e.end, e.bulge) for e in contour.path.edges)
    return Contour(contour.layer, Path(tuple(edges)))


def _inner_radius(path: Path) -> float:
    """Least radius of the round ends of an arc barrier: half its thickness."""
    return min(edge.radius for edge in path.edges)


def test_what_would_split_is_refused():
    """The dumb-bell again, as a hole of a lamination."""
    outer = Contour("OUTER_CONTOUR", circle(0j, 20 * MM))
    neck, at = 0.3 * MM, math.sqrt((2.0 * MM) ** 2 - (0.3 * MM) ** 2)
    bell = Path(
        (
            line(complex(-5 * MM + at, -neck), complex(5 * MM - at, -neck)),
            arc(complex(5 * MM - at, -neck), complex(5 * MM - at, neck), 5 * MM + 0j, ccw=True),
            line(complex(5 * MM - at, neck), complex(-5 * MM + at, neck)),
            arc(complex(-5 * MM + at, neck), complex(-5 * MM + at, -neck), -5 * MM + 0j, ccw=True),
        )
    )
    hole = Contour("BARRIERS", turned(reversed_path(bell), 0.3))
    with pytest.raises(
        OffsetError, match="would split a contour of layer BARRIERS near "
    ) as caught:
        punched([hole, outer], PunchOptions(0.35))
    assert abs(caught.value.place) < 5 * MM  # in the neck, or between the two that are left
    assert re_limit(caught.value) == pytest.approx(0.3, abs=2e-4)
    punched([hole, outer], PunchOptions(re_limit(caught.value)))


def re_limit(error: OffsetError) -> float:
    return float(str(error).split("at most ")[1].split()[0])


@pytest.mark.parametrize("name", DEMOS)
def test_what_would_cut_a_rib_is_refused_at_the_thinnest_rib(name):
    """Half the width of the thinnest rib, which the section states for itself, is the limit."""
    contours = rotor_lamination(section(name))
    thinnest = min(section(name).ribs, key=lambda rib: rib.width)
    width = thinnest.width / MM
    with pytest.raises(OffsetError, match="of steel at") as caught:
        punched(contours, PunchOptions(-0.5 * width - 0.01))
    assert re_limit(caught.value) == pytest.approx(-0.5 * width, abs=2e-4)
    cut = punched(contours, PunchOptions(re_limit(caught.value)))
    gaps = [
        distance(a.path.edges, b.path.edges, 1.0 * MM)
        for n, a in enumerate(cut)
        for b in cut[n + 1 :]
    ]
    assert 0.0 < min(gaps) < 0.5 * UM


def test_a_grinding_allowance_grows_the_rim_and_runs_notches_on():
    """A plain rim is a circle of half the allowance more; notches keep their walls and bottoms."""
    contours = rotor_lamination(section("demo_24s4p_arc"))
    ground = punched(contours, PunchOptions(grinding_allowance_mm=0.3))
    (before,), (after,) = ([c for c in s if c.layer == "OUTER_CONTOUR"] for s in (contours, ground))
    radius = abs(before.path.edges[0].start)
    assert difference(after.path, circle(0j, radius + 0.15 * MM)) < 1e-12
    others = [c for c in contours if c.layer != "OUTER_CONTOUR"]
    assert [c for c in ground if c.layer != "OUTER_CONTOUR"] == others

    notched = rotor_lamination(section("gallery/conveyor_36s6p"))
    ground = punched(notched, PunchOptions(grinding_allowance_mm=0.3))
    (before,), (after,) = ([c for c in s if c.layer == "OUTER_CONTOUR"] for s in (notched, ground))
    radius = max(abs(e.start) for e in before.path.edges)
    assert len(after.path.edges) == len(before.path.edges)
    for old, new in zip(before.path.edges, after.path.edges, strict=True):
        if abs(abs(old.start) - radius) < 1e-9 and abs(abs(old.end) - radius) < 1e-9:
            assert abs(new.start) == pytest.approx(radius + 0.15 * MM, abs=1e-12)
            assert abs(new.centre) < 1e-12
        elif old.is_line:
            # On the same straight line as before.
            way = old.direction(0.5).conjugate()
            assert abs(((new.start - old.start) * way).imag) < 1e-12
            assert abs(((new.end - old.start) * way).imag) < 1e-12


def test_a_rim_that_is_no_circle_cannot_be_ground():
    """An eccentric rim has no arc about the shaft axis: one line says so."""
    contours = rotor_lamination(section("gallery/compressor_24s4p"))
    with pytest.raises(DesignError, match=r"grinding_allowance_mm = 0.3: the rim is no circle"):
        punched(contours, PunchOptions(grinding_allowance_mm=0.3))


def test_a_magnet_clearance_widens_the_pockets_only():
    """Every point of a pocket moves by the clearance into the steel; no magnets are an error."""
    contours = rotor_lamination(section("demo_36s4p_magnet"))
    wide = punched(contours, PunchOptions(magnet_clearance_mm=0.05))
    for before, after in zip(contours, wide, strict=True):
        if before.layer != "MAGNET_POCKETS":
            assert after == before
            continue
        grown = area(after.path) - area(before.path)
        strip = 0.05 * MM * perimeter(before.path) + math.pi * (0.05 * MM) ** 2
        assert grown == pytest.approx(-strip, rel=1e-6)
    bare = rotor_lamination(section("demo_24s4p_arc"))
    with pytest.raises(DesignError, match=r"magnet_clearance_mm = 0.05: no magnet lies in this"):
        punched(bare, PunchOptions(magnet_clearance_mm=0.05))
    # With the tool's offset on top each contour moves by the sum.
    both = punched(contours, PunchOptions(tool_offset_mm=0.05, magnet_clearance_mm=0.05))
    pockets = [c for c in contours if c.layer == "MAGNET_POCKETS"]
    assert compare_contours(pockets, [c for c in both if c.layer == "MAGNET_POCKETS"]) < 1e-12


@pytest.mark.parametrize(
    ("options", "text"),
    [
        ({"tool_offset_mm": 2.0}, "tool_offset_mm = 2: outside its range; accepted -1 to 1"),
        ({"tool_offset_mm": math.nan}, "tool_offset_mm = nan: outside"),
        ({"grinding_allowance_mm": -0.1}, "grinding_allowance_mm = -0.1: outside"),
        ({"magnet_clearance_mm": 3.0}, "magnet_clearance_mm = 3: outside"),
        ({"corners": "chamfered"}, "corners = chamfered: not known; accepted sharp or round"),
    ],
)
def test_options_no_shop_would_mean_are_refused(options, text):
    """Each with its key, value and range on one line."""
    with pytest.raises(DesignError, match=text):
        PunchOptions(**options)


@pytest.mark.slow
@pytest.mark.parametrize("path", MACHINES, ids=lambda p: p.stem)
def test_out_and_in_returns_every_shipped_design(path: FilePath):
    """Rotors and stators of all kinds, drawn ones too, to 1 um as promised; measured 1e-7 um."""
    of = section(str(path.relative_to(DESIGNS).with_suffix("")))
    for contours in (rotor_lamination(of), stator_lamination(of)):
        for tool_mm in (0.05, -0.05):
            out = punched(contours, PunchOptions(tool_mm))
            back = punched(out, PunchOptions(-tool_mm))
            assert compare_contours(contours, back) < 1.0 * UM
