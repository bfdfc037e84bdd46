"""The rotor of one pole: iron, cavities, shaft and the rotor's half of the air gap.

Everything is drawn in the q axis's frame and turned by half a pole pitch into the rotor's frame,
where the d axis lies at angle 0.
"""

import cmath
from collections.abc import Sequence
from functools import lru_cache

from .bands import band_of
from .cavities import cut_barrier
from .curves import Edge, Path, arc, line, reversed_edge, reversed_path, turned
from .design import BarrierDesign, MachineDesign
from .detail_places import Places, key_places, rotor_period
from .half_barrier import HalfBarrier
from .magnets import with_magnets
from .rib_cuts import rib_cuts
from .rotor_contour import contour, followed, ribs_to_rim
from .rotor_frame import RotorFrame
from .rotor_frame import rotor_frame as rotor_frame
from .rotor_outline import RotorOutline, rotor_outline
from .section import Region, Rib
from .unlike_poles import alternate_pole, halves

MM = 1e-3  # m
LETTERS = "abcde"


def rotor_poles(
    design: MachineDesign,
) -> tuple[tuple[tuple[Region, ...], tuple[Rib, ...]], ...]:
    """Regions and ribs of each pole of the rotor's period, each drawn from its own d axis.

    The far side of a pole has the same edges as the near side of the next one, the last pole's
    as that of the first.
    """
    outline = design.rotor.outline
    if outline is not None:
        from .drawn_rotor_regions import drawn_rotor_regions

        radius = rotor_frame(design).circle_radius
        return drawn_rotor_regions(outline.drawing, radius, design.pole_pairs)
    other = alternate_pole(design) or design
    return tuple(
        rotor_regions(other if pole % 2 else design, pole) for pole in range(rotor_period(design))
    )


def rotor_regions(
    design: MachineDesign, number: int = 0
) -> tuple[tuple[Region, ...], tuple[Rib, ...]]:
    """Regions and ribs of one pole of the rotor, sector 0 to pi / pole_pairs, in m.

    Args:
        design: with the barriers of this pole.
        number: of the pole, from 0; not every one holds a keyway.

    Returns:
        Regions `rotor_iron`, each cavity and its magnets, `shaft`, `gap_rotor`, tiling the sector;
        and the ribs.

    Raises:
        ValueError: for a shape that `checks.check_design` would have refused.
    """
    frame = rotor_frame(design)
    design = following(design)
    air: list[Region] = []
    ribs: list[Rib] = []
    bare = cavities(design)
    for place, barrier in enumerate(design.rotor.barrier, start=1):
        own = [region for at, region in bare if at == place]
        air += with_magnets(place, barrier.magnet, own, frame.q_axis)
        ribs += _barrier(place, barrier, frame)[1]
    pole = bare_pole(design, number)
    holes = tuple(reversed_path(region.outer) for region in air if region.material == "air")
    return (
        Region("rotor_iron", "rotor_steel", pole.iron, (*holes, *pole.iron_holes)),
        *air,
        *(cut_out.region for cut_out in pole.cut_outs),
        Region("shaft", "shaft", pole.shaft),
        *_gap(frame, pole.gap_side),
    ), tuple(ribs_to_rim(ribs, air, rim_of(design)))


def cavities(design: MachineDesign) -> tuple[tuple[int, Region], ...]:
    """Cavities of one pole with their barrier's number, from 1, as without magnets.

    Args:
        design: as `following` gives it.

    Raises:
        ValueError: for a barrier that cannot be drawn.
    """
    frame = rotor_frame(design)
    found = []
    for place, barrier in enumerate(design.rotor.barrier, start=1):
        paths, _ = _barrier(place, barrier, frame)
        names = cavity_names(place, len(paths))
        found += [
            (place, Region(name, "air", path)) for name, path in zip(names, paths, strict=True)
        ]
    return tuple(found)


def cavity_names(number: int, count: int) -> tuple[str, ...]:
    """Names of the cavities of a barrier, counter-clockwise; one cavity has no letter."""
    if count == 1:
        return (f"barrier_{number}",)
    return tuple(f"barrier_{number}_{letter}" for letter in LETTERS[:count])


@lru_cache(maxsize=64)  # while one key is tried, most barriers stay
def _barrier(
    number: int, barrier: BarrierDesign, frame: RotorFrame
) -> tuple[tuple[Path, ...], tuple[Rib, ...]]:
    upper, lower = halves(barrier, frame.rotor_radius, frame.pole_pairs)
    cut = cut_barrier(band_of(upper, lower), rib_cuts(barrier))
    ribs = _tangential_ribs(number, upper, lower) + [
        Rib(f"radial_{number}_{letter}", "radial", number, start, end)
        for letter, (start, end) in zip(LETTERS, cut.ribs, strict=False)
    ]
    turn = cmath.exp(1j * frame.q_axis)
    placed = tuple(Rib(r.name, r.kind, r.barrier, r.start * turn, r.end * turn) for r in ribs)
    return tuple(turned(path, frame.q_axis) for path in cut.cavities), placed


def _tangential_ribs(number: int, upper: HalfBarrier, lower: HalfBarrier) -> list[Rib]:
    right, left = [point.conjugate() for point in lower.rib], upper.rib
    return [
        Rib(f"tangential_{number}_right", "tangential", number, right[0], right[1]),
        Rib(f"tangential_{number}_left", "tangential", number, left[0], left[1]),
    ]


def bare_pole(design: MachineDesign, number: int = 0) -> RotorOutline:
    """Pole `number`, from 0, with its details, before barriers are cut, in the rotor's frame."""
    rotor = design.rotor.model_copy(update={"barrier": (), "alternate_barrier": ()})
    keys = key_places(design, number)
    return _bare_pole(design.model_copy(update={"rotor": rotor}), keys)


@lru_cache(maxsize=8)  # while a barrier's key is tried, what is round it stays
def _bare_pole(design: MachineDesign, keys: Places) -> RotorOutline:
    frame = rotor_frame(design)
    return rotor_outline(design, _rim(design), frame.shaft_radius, 2.0 * frame.q_axis, keys)


def following(design: MachineDesign) -> MachineDesign:
    """The design with its barriers' ends moved to follow a rim that is no circle."""
    rim = rim_of(design)
    if rim is None:
        return design
    frame = rotor_frame(design)
    return followed(design, frame.rotor_radius, turned(Path(rim), -frame.q_axis).edges)


def rim_of(design: MachineDesign) -> tuple[Edge, ...] | None:
    """The rim of one pole without notches; None for the circle of the rotor's radius."""
    return None if design.rotor.contour is None else _rim(design)


def _rim(design: MachineDesign) -> tuple[Edge, ...]:
    frame, shape = rotor_frame(design), design.rotor.contour
    if shape is None:
        return (_arc_about_shaft(frame.rotor_radius, frame),)
    gap = MM * design.rotor.gap_mm
    return tuple(contour(shape, frame.rotor_radius, gap, 2.0 * frame.q_axis))


def _gap(frame: RotorFrame, inside: Sequence[Edge]) -> list[Region]:
    """The rotor's half of the gap, and the air between a rim that is no circle and its ring."""
    circle = _arc_about_shaft(frame.circle_radius, frame)
    if frame.ring_radius == frame.rotor_radius:
        return [Region("gap_rotor", "air", _between(inside, (circle,)))]
    ring = (_arc_about_shaft(frame.ring_radius, frame),)
    return [
        Region("rim_air", "air", _between(inside, ring)),
        Region("gap_rotor", "air", _between(ring, (circle,))),
    ]


def _between(inside: Sequence[Edge], outside: Sequence[Edge]) -> Path:
    """The area between two chains that run from d axis to d axis."""
    return Path(
        (
            line(inside[0].start, outside[0].start),
            *outside,
            line(outside[-1].end, inside[-1].end),
            *(reversed_edge(edge) for edge in reversed(inside)),
        )
    )


def _arc_about_shaft(radius: float, frame: RotorFrame) -> Edge:
    side = cmath.exp(2j * frame.q_axis)
    return arc(complex(radius), radius * side, 0j, ccw=True)
