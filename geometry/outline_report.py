"""What was recognised in a drawing, as it is listed before use, and the dimensions it shows."""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from .curves import Edge, Path, area, turned
from .distances import distance
from .outline_places import place_text

if TYPE_CHECKING:
    from .drawn_rotor import RotorDrawing
    from .drawn_slot import DrawnSlot
    from .drawn_stator import StatorDrawing
    from .dxf_reader import DrawnPieces

MM = 1e-3  # m
UM = 1e-6  # m
ON_TOL = 1e-6  # m, ends of a part's edge on the wall

Lines = tuple[tuple[str, str], ...]  # label and text


@dataclass(frozen=True, slots=True)
class OutlineSource:
    """The file that a part was drawn in, and how it was read."""

    file: str
    sha256: str
    unit: str
    kinds: tuple[tuple[str, int], ...]
    left_out: tuple[tuple[str, int], ...]


@dataclass(frozen=True, slots=True)
class StatorOutline:
    """A stator from a drawing."""

    drawing: "StatorDrawing"
    source: OutlineSource


@dataclass(frozen=True, slots=True)
class RotorOutline:
    """A rotor from a drawing."""

    drawing: "RotorDrawing"
    source: OutlineSource


def source_of(file: str, pieces: "DrawnPieces") -> OutlineSource:
    """How the pieces were read."""
    return OutlineSource(file, pieces.sha256, pieces.unit_source, pieces.kinds, pieces.left_out)


def source_lines(source: OutlineSource) -> Lines:
    """How the file was read, as it is listed."""
    lines = [
        ("file", source.file),
        ("unit", source.unit),
        ("read", ", ".join(f"{count} {kind}" for kind, count in source.kinds)),
    ]
    if source.left_out:
        lines.append(("left out", ", ".join(f"{count} {why}" for why, count in source.left_out)))
    return tuple(lines)


def stator_lines(outline: StatorOutline) -> Lines:
    """What was recognised of a stator, as it is listed."""
    drawing = outline.drawing
    measures = stator_measures(drawing)
    sides = ", ".join(f"{part.area / MM**2:.4g}" for part in drawing.slot.copper)
    symmetric = "about its centre line" if drawing.is_symmetric else "not symmetric"
    return (
        *_drawing_lines(outline),
        ("outer diameter", f"{measures['outer_diameter_mm']:.4f} mm"),
        ("bore diameter", f"{measures['bore_diameter_mm']:.4f} mm"),
        ("slots", f"{drawing.slots}, {symmetric}, alike to {drawing.unlikeness / UM:.3g} um"),
        ("first slot", f"at {math.degrees(drawing.turn) % (360.0 / drawing.slots):.4f} degrees"),
        (
            "slot",
            f"closed by {measures['bridge_mm']:.4f} mm of iron"
            if drawing.slot.mouth is None
            else f"mouth {measures['slot_opening_mm']:.4f} mm wide at the bore",
        ),
        ("slot depth", f"{measures['slot_depth_mm']:.4f} mm"),
        ("tooth", f"{measures['tooth_width_mm']:.4f} mm at its thinnest"),
        ("coil sides", f"{len(drawing.slot.copper)} drawn, {sides} mm2"),
    )


def rotor_lines(outline: RotorOutline) -> Lines:
    """What was recognised of a rotor, as it is listed."""
    drawing = outline.drawing
    period = len(drawing.poles)
    alike = "all alike" if period == 1 else f"alike every {period}"
    lines = [
        *_drawing_lines(outline),
        ("rotor diameter", f"{2.0 * drawing.rotor_radius / MM:.4f} mm"),
        ("bore diameter", f"{2.0 * drawing.shaft_radius / MM:.4f} mm"),
        ("poles", f"{alike}, to {drawing.unlikeness / UM:.3g} um"),
        (
            "q axis",
            f"at {math.degrees(drawing.q_axis):.4f} degrees, the poles "
            f"{'' if drawing.is_symmetric else 'not '}symmetric about theirs",
        ),
    ]
    if drawing.left_out:
        lines.append(("inside cavities", f"{drawing.left_out} contours, left out"))
    for number, pole in enumerate(drawing.poles, start=1):
        of_pole = f"pole {number}, " if period > 1 else ""
        sizes = [f"{part.name} {area(part.outer) / MM**2:.4g}" for part in pole.air]
        lines.append((f"{of_pole}cavities", f"{', '.join(sizes)} mm2"))
        widths = [f"{rib.name} {rib.width / MM:.4f}" for rib in pole.ribs]
        lines.append((f"{of_pole}ribs", f"{', '.join(widths)} mm" if widths else "none"))
    return tuple(lines)


def _drawing_lines(outline: StatorOutline | RotorOutline) -> Lines:
    """What is listed first of any lamination's drawing."""
    drawing, sectors = outline.drawing, outline.drawing.sectors
    share = "the whole lamination" if sectors == 1 else f"one of {sectors} equal sectors"
    return (
        *source_lines(outline.source),
        ("drawn", share),
        ("axis", place_text(drawing.axis)),
        ("joined", f"gaps up to {drawing.healed / UM:.3g} um, {drawing.doubles} pieces twice"),
    )


def stator_measures(drawing: "StatorDrawing") -> dict[str, float]:
    """Dimensions that the drawing shows, by the design's keys (mm)."""
    from .drawn_slot import slot_reach

    slot = drawing.slot
    opening = 0.0 if slot.mouth is None else abs(slot.mouth.end - slot.mouth.start)
    depths = [e.point(1.0).real for p in slot.parts if p.kind == "opening" for e in p.outer.edges]
    bore = drawing.bore_radius
    if slot.mouth is None:
        nearest = min(abs(e.point(k / 4)) for e in slot.wall for k in range(4))
        mouth = {"bridge_mm": (nearest - bore) / MM}
    else:
        mouth = {
            "slot_opening_mm": opening / MM,
            "opening_depth_mm": (max(depths, default=bore) - bore) / MM,
        }
    return {
        "outer_diameter_mm": 2.0 * drawing.outer_radius / MM,
        "bore_diameter_mm": 2.0 * bore / MM,
        "slots": float(drawing.slots),
        **mouth,
        "slot_depth_mm": (slot_reach(slot) - bore) / MM,
        "tooth_width_mm": tooth_width(slot, drawing.slots) / MM,
    }


def tooth_width(slot: "DrawnSlot", slots: int) -> float:
    """The thinnest place in m of the iron between the copper of two neighbouring slots."""
    sides = _copper_sides(slot)
    half = math.pi / slots
    upper = turned(Path(tuple(sides)), -half).edges
    lower = turned(Path(tuple(sides)), half).edges
    return distance(upper, lower)


def _copper_sides(slot: "DrawnSlot") -> Sequence[Edge]:
    on_wall = {cmath.rect(*cmath.polar(p)) for e in slot.wall for p in (e.start, e.end)}
    sides = [
        edge
        for part in slot.copper
        for edge in part.outer.edges
        if all(any(abs(p - q) < ON_TOL for q in on_wall) for p in (edge.start, edge.end))
    ]
    return sides or slot.wall
