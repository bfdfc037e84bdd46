"""Slots of every shape: areas by independent formulas, exact tiling, refusals with a range."""

import cmath
import json
import math
import re
from collections import Counter

import numpy as np
import pytest
from pydantic import ValidationError
from scipy.optimize import brentq
from shapely import Point, Polygon, box
from slot_shapes import DEMO, SHAPES, WINDINGS, slotted, table_of

from lamwright.geometry.checks import check_design
from lamwright.geometry.curves import area
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import read_design
from lamwright.geometry.errors import DesignError, GeometryError
from lamwright.geometry.remedies import with_value
from lamwright.geometry.slot_checks import stator_faults
from lamwright.geometry.slot_dimensions import slot_dimensions
from lamwright.geometry.slot_outline import slot_copper_area, slot_outline
from lamwright.geometry.stator import stator_regions, stator_ring

MM = 1e-3
JOINT = 2.3721052  # mm, by bisection of where the line ends
each_shape = pytest.mark.parametrize("shape", SHAPES, ids=" ".join)
each_winding = pytest.mark.parametrize("winding", WINDINGS, ids=str)
each_wedge = pytest.mark.parametrize("wedge", [0.0, 1.0])


def assert_tiles(design, sector_poles=1):
    """Areas positive, the sector filled, every inner edge once each way, outlines closed."""
    ring, regions = stator_ring(design), stator_regions(design, sector_poles)
    sweep = sector_poles * math.pi / ring.pole_pairs
    whole = 0.5 * sweep * (ring.outer_radius**2 - ring.circle_radius**2)
    areas = [area(r.outer) + sum(area(hole) for hole in r.holes) for r in regions]
    assert min(areas) > 0.0
    assert sum(areas) == pytest.approx(whole, rel=1e-13 * sector_poles)
    count = Counter()
    for region in regions:
        for path in (region.outer, *region.holes):
            edges = path.edges
            count.update((edge.start, edge.end, edge.bulge) for edge in edges)
            for edge, following in zip(edges, (*edges[1:], edges[0]), strict=True):
                assert edge.end == following.start
                assert edge.end != edge.start
    assert max(count.values()) == 1
    lone = [key for key in count if (key[1], key[0], -key[2]) not in count]
    # Two sides of gap and iron each; turning circle and outside, of several poles once a slot.
    arcs = 1 if sector_poles == 1 else sector_poles * ring.slots // (2 * ring.pole_pairs)
    assert len(lone) == 4 + 2 * arcs


@each_shape
@each_winding
@each_wedge
def test_regions_tile_the_sector(shape, winding, wedge):
    """One pole and a whole pole pair: closed form of the area, rounding; edges bit for bit."""
    design = slotted(shape, winding, wedge_depth_mm=wedge)
    assert stator_faults(design) == []
    assert_tiles(design)
    assert_tiles(design, 2)


def opened(shape, bottom, radius, flank):
    """The slot from the shaft axis to its bottom as a polygon; flank: half width of height."""
    reach = 1.2 * bottom
    low = 0.5 * bottom
    wedge = Polygon(
        [(low, flank(low)), (reach, flank(reach)), (reach, -flank(reach)), (low, -flank(low))]
    )
    if shape[1] == "round":
        # The circle through the bottom that touches both flanks, by root search.
        step = 1e-6

        def miss(r):
            slope = (flank(bottom + step) - flank(bottom)) / step
            return flank(bottom - r) / math.hypot(1.0, slope) - r

        r = brentq(miss, 0.0, flank(bottom), xtol=1e-15)
        slope = (flank(bottom + step) - flank(bottom)) / step
        touch = bottom - r - r * slope / math.hypot(1.0, slope)
        disc = Point(bottom - r, 0.0).buffer(r, quad_segs=4096)
        return wedge.intersection(box(0.0, -1.0, touch, 1.0)).union(disc)
    # Rounded by what a disc can reach: its centre keeps `radius` off flanks and bottom. A library
    # thins out curves that it shrinks, so the bottom is shrunk by hand.
    centres = wedge.buffer(-radius)
    if shape[1] == "concentric":
        centres = centres.intersection(Point(0.0, 0.0).buffer(bottom - radius, quad_segs=65536))
    else:
        centres = centres.intersection(box(0.0, -1.0, bottom - radius, 1.0))
    return centres.buffer(radius, quad_segs=4096)


@each_shape
@each_winding
@each_wedge
def test_copper_area_of_polygons(shape, winding, wedge):
    """Flanks, bottom and fillets as polygons of thousands of sides (a library's), cut off inside.

    1e-6: a circle's polygon of n sides misses (2 pi / n)^2 / 6 of its area, 1e-7 here.
    """
    design = slotted(shape, winding, wedge_depth_mm=wedge)
    stator = design.stator
    bore = 0.5 * MM * stator.bore_diameter_mm

    def flank(height):
        if shape[0] == "parallel_slot":
            return 0.5 * MM * stator.slot_width_mm
        half = math.pi / stator.slots
        return height * math.tan(half) - 0.5 * MM * stator.tooth_width_mm / math.cos(half)

    slot = opened(shape, bore + MM * stator.slot_depth_mm, MM * stator.slot_corner_radius_mm, flank)
    inner = bore + MM * (stator.bridge_mm or 0.0)
    if shape[2] == "semi_closed":
        # Along the tip's underside until it meets the flank, by root search.
        rise = math.tan(math.radians(stator.wedge_angle_deg))
        mouth, opening = bore + MM * stator.opening_depth_mm, 0.5 * MM * stator.slot_opening_mm
        inner = brentq(lambda h: flank(h) - opening - (h - mouth) / rise, mouth, 1.2 * bore)
    if shape[2] != "semi_closed" and wedge == 0.0:
        copper = slot.difference(Point(0.0, 0.0).buffer(inner, quad_segs=65536))
    else:
        copper = slot.intersection(box(inner + MM * wedge, -1.0, 1.0, 1.0))
    expected = copper.area / design.winding.layers
    assert slot_copper_area(design) == pytest.approx(expected, rel=1e-6)
    sides = [r for r in stator_regions(design) if r.name.startswith("slot_")]
    assert len(sides) == 6 * design.winding.layers
    assert [area(r.outer) for r in sides] == pytest.approx([expected] * len(sides), rel=1e-6)
    own = slot_copper_area(design)
    assert [area(r.outer) for r in sides] == pytest.approx([own] * len(sides), rel=1e-12)


def test_parallel_slot_by_hand():
    """5.5 mm wide, copper from 41 + 2 to 41 + 15.5 mm: flat and round bottom, rounding only."""
    keys = {"slot_depth_mm": 15.5, "wedge_depth_mm": 2.0}
    flat = slotted(("parallel_slot", "flat", "open"), slot_corner_radius_mm=1.5, **keys)
    expected = 5.5 * 13.5 - 2.0 * (1.0 - 0.25 * math.pi) * 1.5**2
    assert 1e6 * slot_copper_area(flat) == pytest.approx(expected, rel=1e-12)
    rounded = slotted(("parallel_slot", "round", "open"), **keys)
    expected = 5.5 * (13.5 - 2.75) + 0.125 * math.pi * 5.5**2
    assert 1e6 * slot_copper_area(rounded) == pytest.approx(expected, rel=1e-12)


@each_shape
def test_bridge_and_yoke_as_stated(shape):
    """Points all along the wall: nearest to the bore the bridge, furthest the yoke; rounding."""
    design = slotted(shape)
    slot, dims = slot_outline(design), slot_dimensions(design)
    wall = np.array([e.point(t) for e in slot.contour() for t in np.linspace(0.0, 1.0, 2001)])
    outer = 0.5 * MM * design.stator.outer_diameter_mm
    # A sample may miss the furthest point by a sagitta of a 2000th of an arc.
    assert outer - np.abs(wall).max() == pytest.approx(dims.yoke_depth, abs=2e-9)
    inner = np.array([e.point(t) for e in slot.near(0) for t in np.linspace(0.0, 1.0, 9)])
    bridge = 0.8 * MM if shape[2] == "closed" else 0.0
    bore = 0.5 * MM * design.stator.bore_diameter_mm
    assert np.abs(inner) - bore == pytest.approx(bridge, abs=1e-15)
    assert np.abs(wall).min() - bore == pytest.approx(bridge, abs=1e-15)


@each_shape
def test_least_tooth(shape):
    """Width of the tooth's straight part, by points on the flank; rounding."""
    design = slotted(shape)
    dims = slot_dimensions(design)
    part = slot_outline(design).compartments[-1].flank
    middle = cmath.exp(1j * math.pi / design.stator.slots)
    start = dims.entry if shape[2] != "semi_closed" else None
    points = [start] if start else [complex(dims.taper_height, dims.taper_half_width)]
    points += [edge.point(t) for edge in part[:1] for t in (0.0, 0.5, 1.0)]
    widths = [2.0 * (point.conjugate() * middle).imag for point in points]
    assert min(widths) == pytest.approx(dims.tooth_width, rel=1e-12)


@pytest.mark.parametrize("bottom", ["concentric", "flat", "round"])
@pytest.mark.parametrize("sides", ["parallel_tooth", "parallel_slot"])
def test_layers_are_parted_on_the_fillet(sides, bottom):
    """A shallow slot, mostly fillet: equal halves to rounding, both pieces of one circle."""
    keys = {"slot_depth_mm": 6.0, "slot_corner_radius_mm": 2.4, "wedge_depth_mm": 1.0}
    if bottom == "round":
        del keys["slot_corner_radius_mm"]
        keys["slot_depth_mm"] = 6.2 if sides == "parallel_tooth" else 5.6
        keys["wedge_depth_mm"] = 0.0 if sides == "parallel_tooth" else 1.0
    design = slotted((sides, bottom, "semi_closed"), (2, 6), **keys)
    assert [fault.code for fault in stator_faults(design)] in ([], ["slot_fill"])
    inner, outer = slot_outline(design).compartments[-2:]
    assert len(inner.flank) == 2
    assert len(outer.flank) == 1
    assert inner.flank[1].centre == pytest.approx(outer.flank[0].centre, rel=1e-12)
    assert inner.flank[1].radius == pytest.approx(outer.flank[0].radius, rel=1e-12)
    sizes = [area(r.outer) for r in stator_regions(design) if r.name.startswith("slot_")]
    assert sizes == pytest.approx([sizes[0]] * 12, rel=1e-12)
    assert_tiles(design)


@pytest.mark.parametrize("off", [-0.02, -1e-3, 0.0, 1e-3, 0.02])
def test_a_line_that_ends_at_the_joint_is_bowed(off):
    """Corner radius, mm, that puts the line within 20 um of the joint: no short piece, like areas.

    The arc's area is a series to b^5; b < 0.01 leaves 1e-14. The joint is met at JOINT.
    """
    keys = {"slot_depth_mm": 7.0, "wedge_depth_mm": 1.0}
    design = slotted(
        ("parallel_slot", "flat", "semi_closed"), (2, 6), slot_corner_radius_mm=JOINT + off, **keys
    )
    inner, outer = slot_outline(design).compartments[-2:]
    assert len(inner.flank) == len(outer.flank) == 1
    assert abs(outer.bow) < 0.01
    assert_tiles(design)
    sizes = [area(r.outer) for r in stator_regions(design) if r.name.startswith("slot_")]
    assert sizes == pytest.approx([sizes[0]] * 12, rel=1e-9)


def test_layers_of_tooth_coils_lie_beside_their_teeth():
    """Layer 1, where a coil starts, in the counter-clockwise half of the slot: sign of y."""
    slot = slot_outline(slotted(("parallel_tooth", "flat", "open"), (2, 1)))
    ((upper, path), (lower, other)) = slot.paths(len(slot.compartments) - 1)
    assert (upper, lower) == ("slot_{s}_layer_1", "slot_{s}_layer_0")
    assert min(edge.start.imag for edge in path.edges) == 0.0
    assert max(edge.start.imag for edge in other.edges) == 0.0


IDLE = [
    ("parallel_slot", "tooth_width_mm", 5.0, 'only with slot_sides = "parallel_tooth"'),
    ("parallel_tooth", "slot_width_mm", 5.0, 'only with slot_sides = "parallel_slot"'),
    ("open", "slot_opening_mm", 2.0, 'only with slot_mouth = "semi_closed"'),
    ("closed", "opening_depth_mm", 2.0, 'only with slot_mouth = "semi_closed"'),
    ("open", "wedge_angle_deg", 20.0, 'only with slot_mouth = "semi_closed"'),
    ("open", "bridge_mm", 0.5, 'only with slot_mouth = "closed"'),
    ("round", "slot_corner_radius_mm", 2.0, 'only with slot_bottom = "concentric" or "flat"'),
]


def shape_with(choice):
    """Some shape that has the choice."""
    return next(shape for shape in reversed(SHAPES) if choice in shape)


@pytest.mark.parametrize(("choice", "key", "value", "text"), IDLE, ids=[k for _, k, _, _ in IDLE])
def test_a_key_that_would_do_nothing_is_refused(choice, key, value, text):
    """By the reader, which says what the key goes with."""
    tree = json.dumps(table_of(shape_with(choice), **{key: value}))
    with pytest.raises(ValidationError) as caught:
        MachineDesign.model_validate_json(tree)
    (detail,) = caught.value.errors()
    ((found, fault),) = detail["ctx"]["found"]
    assert found == key
    assert fault == f"does nothing; accepted {text}"


@pytest.mark.parametrize(
    ("choice", "key"),
    [
        ("parallel_tooth", "tooth_width_mm"),
        ("parallel_slot", "slot_width_mm"),
        ("semi_closed", "slot_opening_mm"),
        ("semi_closed", "opening_depth_mm"),
        ("closed", "bridge_mm"),
    ],
)
def test_a_key_that_the_shape_needs_is_asked_for(choice, key):
    """By the reader, as for any missing key."""
    tree = table_of(shape_with(choice))
    del tree["stator"][key]
    with pytest.raises(ValidationError) as caught:
        MachineDesign.model_validate_json(json.dumps(tree))
    assert caught.value.errors()[0]["ctx"]["found"] == (
        (key, "missing; accepted a number above 0"),
    )


def test_the_reader_places_such_faults(tmp_path):
    """File and line of a key that does nothing, of the table for one that is missing."""
    text = DEMO.read_text(encoding="utf-8")
    path = tmp_path / "design.toml"
    idle = text.replace("[stator]\n", "[stator]\nbridge_mm = 0.5\n", 1)
    path.write_text(idle, encoding="utf-8")
    line = idle.splitlines().index("bridge_mm = 0.5") + 1
    with pytest.raises(DesignError) as caught:
        read_design(path)
    assert str(caught.value) == (
        f'{path}:{line}: stator.bridge_mm: does nothing; accepted only with slot_mouth = "closed"'
    )
    missing = re.sub(r"\ntooth_width_mm = [^\n]*", "", text)
    path.write_text(missing, encoding="utf-8")
    line = missing.splitlines().index("[stator]") + 1
    with pytest.raises(DesignError) as caught:
        read_design(path)
    expected = f"{path}:{line}: stator.tooth_width_mm: missing; accepted a number above 0"
    assert str(caught.value) == expected


FAULTS = [
    (("parallel_tooth", "flat", "closed"), {"bridge_mm": 0.3}, "bridge_thin", "bridge_mm"),
    (("parallel_tooth", "flat", "closed"), {"bridge_mm": 14.5}, "slot_shallow", None),
    (("parallel_tooth", "flat", "open"), {"tooth_width_mm": 10.5}, "slot_narrow", "tooth_width_mm"),
    (("parallel_slot", "flat", "open"), {"slot_width_mm": 10.5}, "tooth_thin", "slot_width_mm"),
    (("parallel_slot", "flat", "open"), {"slot_width_mm": 0.3}, "slot_narrow", "slot_width_mm"),
    (("parallel_slot", "round", "open"), {"wedge_depth_mm": 0.02}, "wedge_thin", "wedge_depth_mm"),
    (
        ("parallel_slot", "flat", "semi_closed"),
        {"slot_corner_radius_mm": 3.0},
        "corner_large",
        "slot_corner_radius_mm",
    ),
    (("parallel_slot", "flat", "semi_closed"), {"slot_opening_mm": 7.0}, "opening_wide", None),
]


@pytest.mark.parametrize(("shape", "keys", "code", "key"), FAULTS, ids=[f[2] for f in FAULTS])
def test_what_cannot_be_drawn_is_refused_with_a_range_that_mends(shape, keys, code, key):
    """Ends and middle of the range stated, tried: the fault is gone and no other has come."""
    design = slotted(shape, **keys)
    matching = [one for one in check_design(design) if one.code == code]
    assert len(matching) == 1
    if key is not None:
        assert matching[0].key == f"stator.{key}"
    assert "accepted" in matching[0].remedy
    words = matching[0].remedy.replace(",", " ").split()
    numbers = [float(word) for word in words if word.replace(".", "").isdigit()]
    assert numbers
    for value in (*numbers, sum(numbers) / len(numbers)):
        after = check_design(with_value(design, matching[0].key, value))
        assert code not in {one.code for one in after}


def drawn(rng):
    """Dimensions at random about those of the demonstration machine, often beyond what fits."""
    shape = SHAPES[int(rng.integers(len(SHAPES)))]
    slots, layers = int(rng.choice([12, 24, 36, 48])), int(rng.integers(1, 3))
    pitch = math.pi * 82.0 / slots
    keys = {
        "slots": slots,
        "slot_depth_mm": rng.uniform(3.0, 20.0),
        "wedge_depth_mm": float(rng.choice([0.0, rng.uniform(0.02, 3.0)])),
    }
    if shape[0] == "parallel_tooth":
        keys["tooth_width_mm"] = pitch * rng.uniform(0.1, 1.0)
    else:
        keys["slot_width_mm"] = pitch * rng.uniform(0.1, 1.0)
    if shape[1] != "round":
        keys["slot_corner_radius_mm"] = float(rng.choice([0.0, rng.uniform(0.05, 0.4 * pitch)]))
    if shape[2] == "semi_closed":
        keys["slot_opening_mm"] = pitch * rng.uniform(0.1, 0.8)
        keys["opening_depth_mm"] = rng.uniform(0.2, 2.0)
        keys["wedge_angle_deg"] = float(rng.choice([0.0, rng.uniform(0.0, 60.0)]))
    if shape[2] == "closed":
        keys["bridge_mm"] = rng.uniform(0.3, 3.0)
    span = 1 if layers == 2 and rng.random() < 0.3 else slots // 4
    return slotted(shape, (layers, span), **keys)


def test_random_slots_are_drawn_or_refused():
    """400 slots of all shapes: tiled exactly, or every fault with key and reason."""
    rng = np.random.default_rng(20)
    valid = 0
    for _ in range(400):
        design = drawn(rng)
        faults = stator_faults(design)
        if faults:
            assert all(one.text and one.keys and one.lack > 0.0 for one in faults)
            assert all(math.isfinite(one.lack) for one in faults)
            continue
        valid += 1
        assert_tiles(design)
        sides = [area(r.outer) for r in stator_regions(design) if r.name.startswith("slot_")]
        assert sides == pytest.approx([slot_copper_area(design)] * len(sides), rel=1e-9)
    assert valid > 100


def test_a_line_that_meets_the_bottom_is_refused():
    """A wide slot a millimetre deep under a bore of 82 mm: half its area lies beyond its ends."""
    shape = ("parallel_slot", "concentric", "open")
    design = slotted(
        shape, (2, 3), slots=12, slot_width_mm=18.0, slot_depth_mm=1.5, slot_corner_radius_mm=0.0
    )
    with pytest.raises(GeometryError, match=r"stator\.slot_depth_mm = 1\.5: the line between"):
        slot_outline(design)
