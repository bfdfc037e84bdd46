"""Reference machine "M24" (invented): 24 rectangular slots, 4 poles, with two rotors; steel S19.

Stator: outer radius 70, bore 40 mm; mouth 2.5 mm wide with parallel sides to r = 41 mm, then a
rectangle 6 mm wide to 56 mm along the slot's centre line, square corners, full of copper. Single
layer, full pitch, q = 2, 25 conductors a slot in series, stack 100 mm. Rotor radius 39.5 mm.
R0: round, solid. R1: two crossed bars 30 mm wide. R2: one open barrier a pole, no ribs.
B1: one round-ended arc barrier a pole, bore 12 mm of air, tangential rib 0.6 mm.
"""

import cmath
import math
from itertools import pairwise

import numpy as np

from lamwright.geometry.curves import Edge, Path, arc, line, reversed_edge
from lamwright.geometry.section import CrossSection, Region
from lamwright.geometry.winding import WindingTable

RIM, CIRCLE, BORE, OUTER = 39.5e-3, 39.75e-3, 40e-3, 70e-3  # m
SHAFT = 12e-3
POLE = math.pi / 2.0
SLOTS_A_POLE, SLOTS = 6, 24


def winding() -> WindingTable:
    """Phase belts of 60 el. degrees, phase A's axis at angle 0."""
    angle = 2.0 * (np.arange(SLOTS) + 0.5) * 2.0 * math.pi / SLOTS  # electrical
    towards = np.stack([np.sin(angle - 2.0 * math.pi / 3.0 * k) for k in range(3)], axis=-1)
    conductors = 25.0 * np.where(np.abs(towards) > 0.9, np.sign(towards), 0.0)
    return WindingTable(SLOTS, 4, 1, conductors[:, None, :], 0.0, 100.0)


def section(rotor: tuple[Region, ...], shaft_radius: float) -> CrossSection:
    """M24 with a rotor."""
    return CrossSection(
        pole_pairs=2,
        stack_length=0.1,
        rotor_radius=RIM,
        shaft_radius=shaft_radius,
        stator_bore_radius=BORE,
        stator_outer_radius=OUTER,
        slots=SLOTS,
        rotor=rotor,
        stator=stator_regions(),
        ribs=(),
    )


def r0() -> CrossSection:
    """The round solid rotor."""
    end = cmath.exp(1j * POLE)
    iron = Path((line(0j, RIM + 0j), about_shaft(RIM, 0.0, POLE), line(RIM * end, 0j)))
    return section((Region("rotor_iron", "rotor_steel", iron), gap_rotor()), 0.0)


def r1() -> CrossSection:
    """Two crossed bars: the disc cut by |x| < 15 mm or |y| < 15 mm, d along x."""
    end, half = cmath.exp(1j * POLE), 15e-3
    low = complex(math.sqrt(RIM**2 - half**2), half)
    high, inner = complex(low.imag, low.real), complex(half, half)
    angle = cmath.phase(low)
    cut = (line(low, inner), line(inner, high))
    mouth = about_shaft(RIM, angle, POLE - angle)
    first, last = about_shaft(RIM, 0.0, angle), about_shaft(RIM, POLE - angle, POLE)
    iron = Path((line(0j, RIM + 0j), first, *cut, last, line(RIM * end, 0j)))
    pocket = Path((mouth, *(reversed_edge(edge) for edge in reversed(cut))))
    regions = (
        Region("rotor_iron", "rotor_steel", iron),
        Region("barrier_1", "air", pocket),
        gap_rotor(first, mouth, last),
    )
    return section(regions, 0.0)


def r2() -> CrossSection:
    """Band of 25 to 31 mm about the point on the q axis at R sqrt 2, open at the rim."""
    end, centre = cmath.exp(1j * POLE), RIM * cmath.exp(0.25j * math.pi) * math.sqrt(2.0)
    # Angle from the q axis where a circle of radius r about the centre cuts the rim.
    near, far = (
        math.acos((abs(centre) ** 2 + RIM**2 - r**2) / (2.0 * abs(centre) * RIM))
        for r in (25e-3, 31e-3)
    )
    q = 0.25 * math.pi
    marks = [0.0, q - far, q - near, q + near, q + far, POLE]
    rim = [about_shaft(RIM, a, b) for a, b in pairwise(marks)]
    outer_arc = arc(rim[3].end, rim[1].start, centre, ccw=True)  # 31 mm, high side to low
    inner_arc = arc(rim[2].end, rim[2].start, centre, ccw=True)  # 25 mm
    main = (line(0j, RIM + 0j), rim[0], reversed_edge(outer_arc), rim[4], line(RIM * end, 0j))
    regions = (
        Region("rotor_iron", "rotor_steel", Path(main)),
        Region("rotor_iron_tip", "rotor_steel", Path((rim[2], inner_arc))),
        Region("barrier_1", "air", Path((outer_arc, rim[1], reversed_edge(inner_arc), rim[3]))),
        gap_rotor(*rim),
    )
    return section(regions, 0.0)


def b1() -> CrossSection:
    """The rotor with one barrier a pole."""
    end = cmath.exp(1j * POLE)
    barrier = b1_barrier()
    iron = Path(
        (
            line(SHAFT + 0j, RIM + 0j),
            about_shaft(RIM, 0.0, POLE),
            line(RIM * end, SHAFT * end),
            reversed_edge(about_shaft(SHAFT, 0.0, POLE)),
        )
    )
    hole = Path(tuple(reversed_edge(edge) for edge in reversed(barrier.edges)))
    bore = Path((line(0j, SHAFT + 0j), about_shaft(SHAFT, 0.0, POLE), line(SHAFT * end, 0j)))
    regions = (
        Region("rotor_iron", "rotor_steel", iron, (hole,)),
        Region("barrier_1", "air", barrier),
        Region("shaft", "air", bore),
        gap_rotor(),
    )
    return section(regions, SHAFT)


def b1_barrier() -> Path:
    """Band of 25 to 30 mm about the point on the q axis at R sqrt 2, ends full round."""
    turn = cmath.exp(0.25j * math.pi)  # the q axis
    centre, cap = RIM * math.sqrt(2.0), complex(33.0211e-3, 15.3156e-3)
    middle = abs(cap - centre)
    along = (cap - centre) / middle  # from the barrier's centre to the upper cap
    low, high = (centre + r * along.conjugate() for r in (middle - 2.5e-3, middle + 2.5e-3))
    upper_low, upper_high = (centre + r * along for r in (middle - 2.5e-3, middle + 2.5e-3))
    edges = (
        arc(upper_high * turn, high * turn, centre * turn, ccw=True),
        arc(high * turn, low * turn, cap.conjugate() * turn, ccw=True),
        arc(low * turn, upper_low * turn, centre * turn, ccw=False),
        arc(upper_low * turn, upper_high * turn, cap * turn, ccw=True),
    )
    return Path(edges)


def gap_rotor(*rim: Edge) -> Region:
    """From the rim, in pieces by growing angle, to the turning circle."""
    end = cmath.exp(1j * POLE)
    rim = rim or (about_shaft(RIM, 0.0, POLE),)
    path = Path(
        (
            line(RIM + 0j, CIRCLE + 0j),
            about_shaft(CIRCLE, 0.0, POLE),
            line(CIRCLE * end, RIM * end),
            *(reversed_edge(edge) for edge in reversed(rim)),
        )
    )
    return Region("gap_rotor", "air", path)


def stator_regions() -> tuple[Region, ...]:
    """Gap, mouths, slots and iron of one pole."""
    end = cmath.exp(1j * POLE)
    bore: list[Edge] = []  # by growing angle, as the gap sees it
    inside: list[Edge] = []  # by growing angle, as the iron's boundary runs
    regions: list[Region] = []
    angle = 0.0
    for s in range(SLOTS_A_POLE):
        turn = cmath.exp(1j * (s + 0.5) * 2.0 * math.pi / SLOTS)
        half = math.asin(1.25e-3 / BORE)
        centre = (s + 0.5) * 2.0 * math.pi / SLOTS
        tip = about_shaft(BORE, angle, centre - half)
        mouth = about_shaft(BORE, centre - half, centre + half)
        angle = centre + half
        bore += [tip, mouth]
        # Corners on the slot's low side, then their mirror images on its high side.
        neck, shoulder, bottom = (
            z * turn for z in (41e-3 - 1.25e-3j, 41e-3 - 3e-3j, 56e-3 - 3e-3j)
        )
        neck_2, shoulder_2, bottom_2 = (
            z * turn for z in (41e-3 + 1.25e-3j, 41e-3 + 3e-3j, 56e-3 + 3e-3j)
        )
        low_side, high_side = line(mouth.start, neck), line(neck_2, mouth.end)
        walls = (
            line(neck, shoulder),
            line(shoulder, bottom),
            line(bottom, bottom_2),
            line(bottom_2, shoulder_2),
            line(shoulder_2, neck_2),
        )
        across = line(neck_2, neck)
        inside += [tip, low_side, *walls, high_side]
        opening = (reversed_edge(mouth), low_side, reversed_edge(across), high_side)
        regions.append(Region(f"opening_{s}", "air", Path(opening)))
        regions.append(Region(f"slot_{s}_layer_0", "copper", Path((*walls, across))))
    last = about_shaft(BORE, angle, POLE)
    bore.append(last)
    inside.append(last)
    gap = Path(
        (
            line(CIRCLE + 0j, BORE + 0j),
            *bore,
            line(BORE * end, CIRCLE * end),
            reversed_edge(about_shaft(CIRCLE, 0.0, POLE)),
        )
    )
    iron = Path(
        (
            line(BORE + 0j, OUTER + 0j),
            about_shaft(OUTER, 0.0, POLE),
            line(OUTER * end, BORE * end),
            *(reversed_edge(edge) for edge in reversed(inside)),
        )
    )
    return (
        Region("gap_stator", "air", gap),
        *regions,
        Region("stator_iron", "stator_steel", iron),
    )


def about_shaft(radius: float, start: float, end: float) -> Edge:
    """Arc about the shaft's axis between two angles in rad."""
    return arc(radius * cmath.exp(1j * start), radius * cmath.exp(1j * end), 0j, ccw=True)
