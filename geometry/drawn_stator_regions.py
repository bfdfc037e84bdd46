"""The regions of a sector of a drawn stator: its one slot copied, edges shared to the last bit."""

import cmath
import math
from collections.abc import Sequence
from itertools import pairwise

from .curves import Edge, Path, arc, line, reversed_edge
from .drawn_slot import DrawnSlot, layered, wall_path
from .drawn_stator import StatorDrawing
from .section import Material, Region

MATERIALS: dict[str, Material] = {"opening": "air", "wedge": "air", "copper": "copper"}


def drawn_stator_regions(
    drawing: StatorDrawing, layers: int, circle_radius: float, poles: int, sector_poles: int
) -> tuple[Region, ...]:
    """The regions of a sector of poles: the middle of a tooth lies at angle 0.

    Args:
        drawing: the stator recognised.
        layers: of the winding.
        circle_radius: of the turning circle, m.
        poles: of the machine.
        sector_poles: of the sector; its slots must be a whole number.

    Returns:
        `gap_stator`, the parts of each slot, `stator_iron`, as `section.CrossSection` names them.

    Raises:
        OutlineError: where the drawing's coil sides do not suit the layers.
    """
    slot = layered(drawing.slot, layers)
    slots = drawing.slots * sector_poles // poles
    turns = [cmath.exp(2j * math.pi * (s + 0.5) / drawing.slots) for s in range(slots)]
    # One arc a pole, so that none goes round the whole circle.
    sides = [cmath.exp(2j * math.pi * k / poles) for k in range(sector_poles + 1)]
    side = sides[-1]
    bore = _bore(drawing, slot, turns, side)
    inner, outer = complex(circle_radius), complex(drawing.outer_radius)
    first, last = bore[0].start, bore[-1].end
    circle = [arc(inner * b, inner * a, 0j, ccw=False) for a, b in pairwise(sides)]
    gap = Path((line(inner, first), *bore, line(last, inner * side), *reversed(circle)))
    rim = [arc(outer * a, outer * b, 0j, ccw=True) for a, b in pairwise(sides)]
    iron = [line(first, outer), *rim, line(outer * side, last), reversed_edge(bore[-1])]
    holes: list[Path] = []
    for s in reversed(range(slots)):
        if slot.mouth is None:
            holes.append(_turned(wall_path(slot), turns[s]))
            if s > 0:
                iron.append(reversed_edge(bore[s]))
            continue
        iron += _turned(Path(slot.wall), turns[s]).edges
        iron.append(reversed_edge(bore[2 * s]))
    if slot.mouth is None:
        iron.append(reversed_edge(bore[0]))
    regions = [region for s, turn in enumerate(turns) for region in _slot_regions(slot, s, turn)]
    return (
        Region("gap_stator", "air", gap),
        *regions,
        Region("stator_iron", "stator_steel", Path(tuple(iron)), tuple(holes)),
    )


def _bore(
    drawing: StatorDrawing, slot: DrawnSlot, turns: Sequence[complex], side: complex
) -> list[Edge]:
    """Counter-clockwise along the bore: half a tooth, mouth, tooth, mouth, ..., half a tooth."""
    ends = [complex(drawing.bore_radius)]
    for turn in turns:
        if slot.mouth is None:  # no mouth: a point in the middle of the slot parts the arcs
            ends.append(drawing.bore_radius * turn)
        else:
            ends += [slot.mouth.start * turn, slot.mouth.end * turn]
    ends.append(drawing.bore_radius * side)
    edges = [arc(start, end, 0j, ccw=True) for start, end in pairwise(ends)]
    if slot.mouth is not None:  # the same bits as in the opening's own outline
        for s, turn in enumerate(turns):
            edges[2 * s + 1] = _turned(Path((slot.mouth,)), turn).edges[0]
    return edges


def _slot_regions(slot: DrawnSlot, s: int, turn: complex) -> list[Region]:
    names: list[str] = []
    count = {"opening": 0, "wedge": 0, "copper": 0}
    for part in slot.parts:
        k = count[part.kind]
        count[part.kind] += 1
        if part.kind == "copper":
            names.append(f"slot_{s}_layer_{k}")
        else:
            names.append(f"{part.kind}_{s}" if k == 0 else f"{part.kind}_{s}_{k + 1}")
    return [
        Region(
            name,
            MATERIALS[part.kind],
            _turned(part.outer, turn),
            tuple(_turned(hole, turn) for hole in part.holes),
        )
        for name, part in zip(names, slot.parts, strict=True)
    ]


def _turned(path: Path, turn: complex) -> Path:
    return Path(tuple(Edge(e.start * turn, e.end * turn, e.bulge) for e in path.edges))
