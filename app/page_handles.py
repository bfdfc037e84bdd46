"""Handles: where on the drawing a key of the design file can be taken hold of and moved.

A handle says where it stands, in which direction its key grows, and by how much for each mm it is
dragged. On halves that mirror each other a key has a handle on either side. Left is the
counter-clockwise half. A rotor that is a drawing has none: its barriers have no keys.
"""

import cmath
import math
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal

from lamwright.geometry.barrier_sides import seat_of
from lamwright.geometry.curves import Point
from lamwright.geometry.design import BarrierDesign, MachineDesign
from lamwright.geometry.design_keys import key_name
from lamwright.geometry.remedies import value_of
from lamwright.geometry.rib_groups import members, rib_groups
from lamwright.geometry.rotor import following
from lamwright.geometry.rotor_frame import rotor_frame
from lamwright.geometry.section import CrossSection, pole_of
from lamwright.geometry.unlike_poles import clockwise_half

from .page_drawing import MM, Record, directed, placed, upright

Kind = Literal["end angle", "depth", "thickness", "tangential rib", "radial rib"]
Side = Literal["left", "right", "middle"]
STEPS = {"deg": 0.1, "mm": 0.05}  # of a key press


@dataclass(frozen=True, slots=True)
class Handle:
    """Where a key can be taken hold of, in the rotor's frame."""

    key: str
    kind: Kind
    barrier: int  # from 1 at the rim
    side: Side
    place: Point  # m
    direction: complex  # in which the value grows
    per_mm: float  # of the key's unit, for each mm along the direction


def handles(design: MachineDesign, section: CrossSection) -> list[Handle]:
    """The handles of the first pole."""
    if design.rotor.outline is not None:
        return []
    found: list[Handle] = []
    for number, barrier in enumerate(following(design).rotor.barrier, start=1):
        found += _of_barrier(design, number, barrier)
    return [*found, *_of_ribs(design, section)]


def handle_records(design: MachineDesign, section: CrossSection) -> list[Record]:
    """The handles of the first pole as the page gets them, each with a name of its own."""
    seen: Counter[str] = Counter()
    found = []
    for handle in handles(design, section):
        name = f"{handle.key} {handle.side}"
        seen[name] += 1
        found.append(_record(design, handle, section, name, seen[name]))
    return found


def _record(
    design: MachineDesign, handle: Handle, section: CrossSection, name: str, number: int
) -> Record:
    turn, unit = upright(section), "deg" if handle.key.endswith("_deg") else "mm"
    (x, y), (dx, dy) = placed(handle.place, turn), directed(handle.direction, turn)
    return {
        "id": name if number == 1 else f"{name} {number}",
        "number": number,  # of a barrier's radial ribs, counter-clockwise
        "key": handle.key,
        "kind": handle.kind,
        "barrier": handle.barrier,
        "side": handle.side,
        **{"x": x, "y": y, "dx": dx, "dy": dy},
        "per_mm": round(handle.per_mm, 6),
        "value": value_of(design, handle.key),
        "unit": unit,
        "step": STEPS[unit],
    }


def _of_barrier(design: MachineDesign, number: int, barrier: BarrierDesign) -> Iterator[Handle]:
    frame, table = rotor_frame(design), f"rotor.barrier[{number}]"
    axis = cmath.exp(1j * frame.q_axis)
    rim = frame.rotor_radius - barrier.depth_mm / MM
    middle: Side = "middle"
    yield Handle(f"{table}.depth_mm", "depth", number, middle, rim * axis, -axis, 1.0)
    inner = rim - barrier.thickness_mm / MM
    yield Handle(f"{table}.thickness_mm", "thickness", number, middle, inner * axis, -axis, 1.0)
    other = barrier.other_half
    is_unlike = other is not None and other.end_angle_deg is not None
    sides: tuple[tuple[Side, BarrierDesign, str], ...] = (
        ("left", barrier, f"{table}.end_angle_deg"),
        (
            "right",
            clockwise_half(barrier),
            f"{table}.other_half.end_angle_deg" if is_unlike else f"{table}.end_angle_deg",
        ),
    )
    for side, half, key in sides:
        cap = seat_of(half, frame.rotor_radius, frame.pole_pairs).cap
        growing = 1j * cap
        if side == "right":
            cap, growing = cap.conjugate(), growing.conjugate()
        per_mm = math.degrees(1.0 / (MM * abs(cap)))
        yield Handle(key, "end angle", number, side, cap * axis, growing * axis, per_mm)


def _of_ribs(design: MachineDesign, section: CrossSection) -> Iterator[Handle]:
    """Ribs of the first pole by the key that states each; one that is stated elsewhere has none."""
    for group in rib_groups(design):
        if group.is_alternate:
            continue
        for k in members(design, group, section.ribs):
            rib = section.ribs[k]
            if pole_of(rib.name) != 1:
                continue
            name = rib.name.rpartition("_")[2]
            side: Side = "left" if name == "left" else "right" if name == "right" else "middle"
            across = rib.end - rib.start
            if rib.kind == "tangential":
                # The rim stays where it is: a wider rib moves the barrier's end inward.
                yield Handle(
                    group.keys[0], "tangential rib", rib.barrier, side, rib.start, -across, 1.0
                )
            else:  # both sides of it move, by half
                yield Handle(group.keys[0], "radial rib", rib.barrier, side, rib.end, across, 2.0)


def unit_of(key: str) -> str:
    """The unit of a key of the design file, by its name; empty where it has none."""
    name = key_name(key)
    for ending, unit in UNITS.items():
        if name.endswith(ending):
            return unit
    return ""


UNITS = {
    "_mm2": "mm\u00b2",
    "_mm": "mm",
    "_deg": "deg",
    "_a": "A",
    "_v": "V",
    "_rpm": "1/min",
    "_nm": "N m",
    "_percent": "%",
    "_c": "\u00b0C",
    "_um": "\u00b5m",
}
