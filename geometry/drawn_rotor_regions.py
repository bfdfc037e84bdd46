"""The regions and ribs of a drawn rotor's poles, in the rotor's frame."""

import cmath
import math

from .curves import Path, arc, line, reversed_edge, turned, turned_edge
from .drawn_pole import PoleDrawing, PolePart
from .drawn_rotor import RotorDrawing
from .section import Material, Region, Rib

Pole = tuple[tuple[Region, ...], tuple[Rib, ...]]


def drawn_rotor_regions(
    drawing: RotorDrawing, circle_radius: float, pole_pairs: int
) -> tuple[Pole, ...]:
    """Regions and ribs of each pole of the drawn rotor's period, each from its own d axis.

    Args:
        drawing: the rotor recognised.
        circle_radius: of the turning circle, m.
        pole_pairs: of the machine.
    """
    half = 0.5 * math.pi / pole_pairs
    return tuple(_pole(pole, circle_radius, half) for pole in drawing.poles)


def _pole(pole: PoleDrawing, circle_radius: float, half: float) -> Pole:
    turn = cmath.exp(1j * half)
    regions = [
        _region(pole.iron, "rotor_steel", half),
        *(_region(part, "air", half) for part in pole.air),
        _region(pole.shaft, "shaft", half),
        _gap(pole, circle_radius, half),
    ]
    ribs = [Rib(r.name, r.kind, r.barrier, r.start * turn, r.end * turn) for r in pole.ribs]
    return tuple(regions), tuple(ribs)


def _region(part: PolePart, material: Material, angle: float) -> Region:
    holes = tuple(turned(hole, angle) for hole in part.holes)
    return Region(part.name, material, turned(part.outer, angle), holes)


def _gap(pole: PoleDrawing, circle_radius: float, half: float) -> Region:
    inside = [turned_edge(edge, half) for edge in pole.rim]
    side = cmath.exp(2j * half)
    circle = arc(complex(circle_radius), circle_radius * side, 0j, ccw=True)
    path = Path(
        (
            line(inside[0].start, circle.start),
            circle,
            line(circle.end, inside[-1].end),
            *(reversed_edge(edge) for edge in reversed(inside)),
        )
    )
    return Region("gap_rotor", "air", path)
