"""The rotor of one pole: iron, cavities, shaft and the rotor's half of the air gap.

Everything is drawn in the q axis's frame and turned by half a pole pitch into the rotor's frame,
where the d axis lies at angle 0.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass

from .bands import band_of
from .cavities import cut_barrier
from .curves import Edge, Path, arc, line, reversed_edge, reversed_path, turned
from .design import BarrierDesign, MachineDesign
from .drawn_rotor_regions import drawn_rotor_regions
from .half_barrier import HalfBarrier
from .magnets import with_magnets
from .rib_cuts import rib_cuts
from .rotor_outline import RotorOutline, rotor_outline
from .section import Region, Rib
from .unlike_poles import alternate_pole, halves

MM = 1e-3  # m
LETTERS = "abcde"


@dataclass(frozen=True, slots=True)
class RotorFrame:
    """Radii (m) and angles that the whole rotor shares."""

    rotor_radius: float
    shaft_radius: float
    circle_radius: float
    pole_pairs: int

    @property
    def q_axis(self) -> float:
        """Angle of the q axis, half a pole pitch, in rad."""
        return 0.5 * math.pi / self.pole_pairs


def rotor_frame(design: MachineDesign) -> RotorFrame:
    """Radii of the design's rotor in m; the turning circle lies in the middle of the gap."""
    bore = 0.5 * MM * design.stator.bore_diameter_mm
    rotor = bore - MM * design.rotor.gap_mm
    return RotorFrame(
        rotor_radius=rotor,
        shaft_radius=0.5 * MM * design.rotor.shaft_diameter_mm,
        # The same expression as CrossSection.circle_radius.
        circle_radius=0.5 * (bore + rotor),
        pole_pairs=design.pole_pairs,
    )


def rotor_poles(
    design: MachineDesign,
) -> tuple[tuple[tuple[Region, ...], tuple[Rib, ...]], ...]:
    """Regions and ribs of each pole of the rotor's period, each drawn from its own d axis.

    The far side of a pole has the same edges as the near side of the next one, the last pole's
    as that of the first.
    """
    outline = design.rotor.outline
    if outline is not None:
        radius = rotor_frame(design).circle_radius
        return drawn_rotor_regions(outline.drawing, radius, design.pole_pairs)
    other = alternate_pole(design)
    return tuple(rotor_regions(pole) for pole in (design, other) if pole is not None)


def rotor_regions(design: MachineDesign) -> tuple[tuple[Region, ...], tuple[Rib, ...]]:
    """Regions and ribs of one pole of the rotor, sector 0 to pi / pole_pairs, in m.

    Returns:
        Regions `rotor_iron`, each cavity and its magnets, `shaft`, `gap_rotor`, tiling the sector;
        and the ribs.

    Raises:
        ValueError: for a shape that `checks.check_design` would have refused.
    """
    frame = rotor_frame(design)
    air: list[Region] = []
    ribs: list[Rib] = []
    for number, barrier in enumerate(design.rotor.barrier, start=1):
        paths, barrier_ribs = _barrier(number, barrier, frame)
        names = cavity_names(number, len(paths))
        own = [Region(name, "air", path) for name, path in zip(names, paths, strict=True)]
        air += with_magnets(number, barrier.magnet, own, frame.q_axis)
        ribs += barrier_ribs
    pole = bare_pole(design)
    holes = tuple(reversed_path(region.outer) for region in air if region.material == "air")
    return (
        Region("rotor_iron", "rotor_steel", pole.iron, (*holes, *pole.iron_holes)),
        *air,
        *(cut_out.region for cut_out in pole.cut_outs),
        Region("shaft", "shaft", pole.shaft),
        Region("gap_rotor", "air", _gap(frame, pole.gap_side)),
    ), tuple(ribs)


def cavity_names(number: int, count: int) -> tuple[str, ...]:
    """Names of the cavities of a barrier, counter-clockwise; one cavity has no letter."""
    if count == 1:
        return (f"barrier_{number}",)
    return tuple(f"barrier_{number}_{letter}" for letter in LETTERS[:count])


def _barrier(
    number: int, barrier: BarrierDesign, frame: RotorFrame
) -> tuple[list[Path], list[Rib]]:
    upper, lower = halves(barrier, frame.rotor_radius, frame.pole_pairs)
    cut = cut_barrier(band_of(upper, lower), rib_cuts(barrier))
    ribs = _tangential_ribs(number, upper, lower) + [
        Rib(f"radial_{number}_{letter}", "radial", number, start, end)
        for letter, (start, end) in zip(LETTERS, cut.ribs, strict=False)
    ]
    turn = cmath.exp(1j * frame.q_axis)
    placed = [Rib(r.name, r.kind, r.barrier, r.start * turn, r.end * turn) for r in ribs]
    return [turned(path, frame.q_axis) for path in cut.cavities], placed


def _tangential_ribs(number: int, upper: HalfBarrier, lower: HalfBarrier) -> list[Rib]:
    right, left = [point.conjugate() for point in lower.rib], upper.rib
    return [
        Rib(f"tangential_{number}_right", "tangential", number, right[0], right[1]),
        Rib(f"tangential_{number}_left", "tangential", number, left[0], left[1]),
    ]


def bare_pole(design: MachineDesign) -> RotorOutline:
    """One pole of the rotor with its details, before barriers are cut, in the rotor's frame."""
    frame = rotor_frame(design)
    rim = _arc_about_shaft(frame.rotor_radius, frame)
    return rotor_outline(design, (rim,), frame.shaft_radius, 2.0 * frame.q_axis)


def _gap(frame: RotorFrame, inside: Sequence[Edge]) -> Path:
    """The rotor's half of the gap."""
    circle = _arc_about_shaft(frame.circle_radius, frame)
    return Path(
        (
            line(inside[0].start, circle.start),
            circle,
            line(circle.end, inside[-1].end),
            *(reversed_edge(edge) for edge in reversed(inside)),
        )
    )


def _arc_about_shaft(radius: float, frame: RotorFrame) -> Edge:
    side = cmath.exp(2j * frame.q_axis)
    return arc(complex(radius), radius * side, 0j, ccw=True)
