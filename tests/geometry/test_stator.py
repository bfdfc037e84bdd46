"""The stator's regions against independent measures: quadrature, ruler, closed areas."""

import json
import math
import tomllib
from collections import Counter
from pathlib import Path as FilePath

import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

from lamwright.geometry.curves import Edge, area, line
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.section import Region
from lamwright.geometry.slot_dimensions import slot_dimensions
from lamwright.geometry.slot_outline import Compartment, Slot, slot_copper_area, slot_outline
from lamwright.geometry.stator import StatorRing, pole_regions, stator_regions, stator_ring

DEMO = FilePath(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"


def machine(winding: dict[str, int] | None = None, poles: int = 4, **stator: float):
    """The demonstration machine with some values changed."""
    table = tomllib.loads(DEMO.read_text(encoding="utf-8"))
    table["stator"].update(stator)
    table["winding"].update(winding or {})
    table["rotor"]["poles"] = poles
    return MachineDesign.model_validate_json(json.dumps(table))


TWO_LAYERS = {"layers": 2}
GALLERY = {
    "one layer": machine(),
    "two layers": machine(TWO_LAYERS),
    "sharp corners": machine(TWO_LAYERS, slot_corner_radius_mm=0.0),
    "no wedge": machine(wedge_depth_mm=0.0),
    "flat tip": machine(wedge_angle_deg=0.0),
    "flat tip, no wedge": machine(TWO_LAYERS, wedge_angle_deg=0.0, wedge_depth_mm=0.0),
    "nearly round bottom": machine(slot_corner_radius_mm=4.13),
    "36 slots, 6 poles": machine(TWO_LAYERS, poles=6, slots=36, tooth_width_mm=3.4),
    "12 slots, 2 poles": machine(poles=2, slots=12, tooth_width_mm=11.0),
}
each_design = pytest.mark.parametrize("design", GALLERY.values(), ids=GALLERY.keys())


def named(regions: tuple[Region, ...], prefix: str) -> list[Region]:
    return [region for region in regions if region.name.startswith(prefix)]


@each_design
def test_regions_tile_the_sector(design):
    """Areas add up to the sector between turning circle and outside: closed form, rounding."""
    ring = stator_ring(design)
    whole = 0.5 * math.pi / ring.pole_pairs * (ring.outer_radius**2 - ring.circle_radius**2)
    regions = stator_regions(design)
    assert min(area(region.outer) for region in regions) > 0.0
    assert sum(area(region.outer) for region in regions) == pytest.approx(whole, rel=1e-13)


@each_design
def test_touching_regions_share_their_edges_exactly(design):
    """Every edge but the sector's own boundary occurs once each way; outlines are closed."""
    regions = stator_regions(design)
    count = Counter()
    for region in regions:
        edges = region.outer.edges
        count.update((edge.start, edge.end, edge.bulge) for edge in edges)
        for edge, following in zip(edges, (*edges[1:], edges[0]), strict=True):
            assert edge.end == following.start
            assert abs(edge.end - edge.start) > 1e-6  # m, no sliver of an edge
    assert max(count.values()) == 1
    lone = [key for key in count if (key[1], key[0], -key[2]) not in count]
    # Two sides of gap and iron each, turning circle, outside.
    assert len(lone) == 6


@each_design
def test_copper_area_by_quadrature(design):
    """Width integrated over height, fillet found by root search; quadrature errs by 1e-11."""
    stator, dims = design.stator, slot_dimensions(design)
    half_tooth, bottom = 0.5e-3 * stator.tooth_width_mm, dims.bottom_radius
    radius, angle = 1e-3 * stator.slot_corner_radius_mm, math.pi / stator.slots

    def flank(x):  # where the distance to the tooth's centre line is half the tooth's width
        return brentq(
            lambda y: x * math.sin(angle) - y * math.cos(angle) - half_tooth, -0.1, 0.1, xtol=1e-15
        )

    def to_bottom(x):  # distance the fillet's centre at height x is too far out
        y = flank(x) - radius / math.cos(angle)
        return math.hypot(x, y) - (bottom - radius)

    centre_x = brentq(to_bottom, 0.5 * bottom, bottom, xtol=1e-15)
    centre_y = flank(centre_x) - radius / math.cos(angle)
    leave = centre_x - radius * math.sin(angle)  # foot of the centre on the flank
    reach = centre_x * bottom / (bottom - radius)  # where fillet and bottom touch

    def fillet(x):
        return centre_y + math.sqrt(max(radius**2 - (x - centre_x) ** 2, 0.0))

    def arc_bottom(x):
        return math.sqrt(max(bottom**2 - x**2, 0.0))

    pieces = [(flank, dims.copper_height, leave), (fillet, leave, reach)]
    pieces.append((arc_bottom, reach, bottom))
    half = sum(quad(f, a, b, epsabs=1e-15, epsrel=1e-11)[0] for f, a, b in pieces)
    layers = design.winding.layers
    assert slot_copper_area(design) == pytest.approx(2.0 * half / layers, rel=1e-9)
    for region in named(stator_regions(design), "slot_"):
        assert area(region.outer) == pytest.approx(2.0 * half / layers, rel=1e-9)


@each_design
def test_tooth_is_as_wide_as_stated_at_any_radius(design):
    """A ruler across the second tooth, normal to its centre line: rounding only."""
    stator, dims = design.stator, slot_dimensions(design)
    pitch = 2.0 * math.pi / stator.slots
    along = complex(math.cos(pitch), math.sin(pitch))
    iron = named(stator_regions(design), "stator_iron")[0]
    flanks = [edge for edge in iron.outer.edges if edge.is_line]
    first = dims.taper_height / math.cos(dims.half_pitch) + 1e-4
    last = dims.corner_height - 1e-4
    for share in (0.0, 0.3, 0.7, 1.0):
        foot = first + share * (last - first)
        across = [y for y in (crossing(edge, along, foot) for edge in flanks) if y is not None]
        above, below = min(y for y in across if y > 0), max(y for y in across if y < 0)
        assert above == pytest.approx(0.5e-3 * stator.tooth_width_mm, rel=1e-12)
        assert -below == pytest.approx(0.5e-3 * stator.tooth_width_mm, rel=1e-12)


def crossing(edge: Edge, along: complex, foot: float) -> float | None:
    """Where an edge crosses the normal to a tooth's centre line, measured from that line."""
    a, b = edge.start / along - foot, edge.end / along - foot
    if a.real * b.real >= 0.0:
        return None
    return (a + (b - a) * a.real / (a.real - b.real)).imag


@each_design
def test_half_teeth_on_the_sector_sides(design):
    """The first slot's lower flank is parallel to the side at angle 0, half a tooth away."""
    copper = named(stator_regions(design), "slot_0")[0]
    level = 0.5e-3 * design.stator.tooth_width_mm
    flat = [e for e in copper.outer.edges if e.is_line and abs(e.start.imag - e.end.imag) < 1e-15]
    assert len(flat) == 1
    assert flat[0].start.imag == pytest.approx(level, rel=1e-12)


def test_bore_alternates_between_teeth_and_mouths():
    """Seven tooth pieces and six mouths on the bore; chord of a mouth is the slot opening."""
    design = GALLERY["one layer"]
    gap = named(stator_regions(design), "gap_stator")[0]
    bore = [e for e in gap.outer.edges if abs(e.start) > 0.04099 and abs(e.end) > 0.04099]
    assert len(bore) == 13
    for k, edge in enumerate(bore):
        assert edge.radius == pytest.approx(0.041, rel=1e-12)
        assert abs(edge.centre) < 1e-15
        if k % 2:
            assert abs(edge.end - edge.start) == pytest.approx(2.4e-3, rel=1e-12)


def test_mouth_and_tip_as_stated():
    """Mouth's end 0.8 mm above the bore, underside 30 degrees off the tangential direction."""
    slot = slot_outline(GALLERY["one layer"])
    mouth, tip = slot.compartments[0].flank[0], slot.compartments[1].flank[0]
    assert mouth.end.real == pytest.approx(41.8e-3, rel=1e-12)
    assert mouth.start.imag == mouth.end.imag == pytest.approx(1.2e-3, rel=1e-12)
    direction = tip.direction(0.5)
    assert math.degrees(math.atan2(direction.real, direction.imag)) == pytest.approx(30.0)
    copper = slot.compartments[2].flank[0]
    assert copper.start.real - tip.end.real == pytest.approx(1.0e-3, rel=1e-12)


def test_corner_fillet_is_tangent():
    """Unit tangents agree where the fillet meets flank and bottom: rounding only."""
    slot = slot_outline(GALLERY["one layer"])
    flank, fillet = slot.compartments[-1].flank[-2:]
    assert fillet.radius == pytest.approx(1.5e-3, rel=1e-12)
    assert abs(flank.direction(1.0) - fillet.direction(0.0)) < 1e-12
    assert abs(fillet.direction(1.0) - slot.bottom.direction(0.0)) < 1e-12
    assert slot.bottom.radius == pytest.approx(56.5e-3, rel=1e-12)


def test_largest_corner_radius_leaves_no_bottom():
    """At the limit the two fillets meet on the centre line; just above, they cross."""
    limit = 1e3 * slot_dimensions(machine()).corner_radius_limit
    below = slot_outline(machine(slot_corner_radius_mm=limit - 1e-6)).bottom
    above = slot_outline(machine(slot_corner_radius_mm=limit + 1e-6)).bottom
    # The fillet end moves by the radius times d(angle) / d(radius), about the change itself.
    assert 0.0 < below.start.imag < 5e-9
    assert -5e-9 < above.start.imag < 0.0


def test_layers_are_equal_halves():
    """The parting line halves the copper: closed form, 1e-12; layer 0 lies at the bottom."""
    regions = named(stator_regions(GALLERY["two layers"]), "slot_3")
    by_name = {region.name: region for region in regions}
    bottom, top = by_name["slot_3_layer_0"], by_name["slot_3_layer_1"]
    assert area(bottom.outer) == pytest.approx(area(top.outer), rel=1e-12)
    assert max(abs(e.start) for e in bottom.outer.edges) > max(
        abs(e.start) for e in top.outer.edges
    )


def test_slots_repeat_by_the_slot_pitch():
    """Slot s is slot 0 turned by s pitches: rounding of one complex product."""
    regions = named(stator_regions(GALLERY["one layer"]), "wedge_")
    for s, region in enumerate(regions):
        turn = complex(math.cos(s * math.pi / 12), math.sin(s * math.pi / 12))
        for edge, first in zip(region.outer.edges, regions[0].outer.edges, strict=True):
            assert abs(edge.start - first.start * turn) < 1e-16 * 2
            assert edge.bulge == pytest.approx(first.bulge, abs=1e-15)


def test_parting_line_in_the_corner_is_drawn():
    """A shallow slot that is mostly fillet: two equal layers all the same, to rounding."""
    shallow = machine(TWO_LAYERS, slot_depth_mm=6.0, slot_corner_radius_mm=2.2)
    layers = named(stator_regions(shallow), "slot_0")
    assert len(layers) == 2
    assert area(layers[0].outer) == pytest.approx(area(layers[1].outer), rel=1e-12)


def test_dimensions_of_impossible_slots_stay_readable():
    """No exception where nothing can be drawn, so that a check can say what is wrong."""
    steep = machine(poles=2, slots=6, tooth_width_mm=11.0, wedge_angle_deg=60.0)
    assert slot_dimensions(steep).taper_height > 1.0  # m: tan 60 tan 30 = 1, to rounding
    assert slot_dimensions(machine(slot_corner_radius_mm=60.0)).corner_height == -math.inf
    wide = slot_dimensions(machine(tooth_width_mm=9.0))
    assert wide.tip_half_width < wide.opening_half_width


def test_rectangular_slot_of_the_reference_machine():
    """Slot of checks A10: mouth 2.5 x 1 mm, copper 6 x 15 mm; areas by hand, rounding."""
    mouth = line(complex(math.sqrt(40e-3**2 - 1.25e-3**2), 1.25e-3), 41e-3 + 1.25e-3j)
    step, flank = line(mouth.end, 41e-3 + 3e-3j), line(41e-3 + 3e-3j, 56e-3 + 3e-3j)
    parts = (
        Compartment("opening_{s}", "air", (mouth,)),
        Compartment("slot_{s}_layer_0", "copper", (step, flank)),
    )
    slot = Slot(parts, line(56e-3 + 3e-3j, 56e-3 - 3e-3j))
    regions = pole_regions(slot, StatorRing(39.75e-3, 40e-3, 70e-3, 24, 2))
    copper = named(regions, "slot_")
    assert [area(region.outer) for region in copper] == pytest.approx(6 * [90e-6], rel=1e-12)
    whole = 0.25 * math.pi * (70e-3**2 - 39.75e-3**2)
    assert sum(area(region.outer) for region in regions) == pytest.approx(whole, rel=1e-13)
