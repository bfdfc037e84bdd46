"""The rotor of a first design: spreads of barrier ends tried in their order until one can be built.

Each spread is laid out with less and less air. Ribs and barriers depend on each other (a thicker
rib moves the barrier's end inward, which changes the load) and are found in turns.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from .checks import shape_faults
from .design import BarrierDesign, MachineDesign, RotorDesign
from .first_barriers import PlacedBarrier, PoleRoom, placed_barriers
from .first_ribs import RibLaw, RibLoad, RibWidths, rib_loads, rib_stresses, rib_widths
from .first_spread import Spread, spreads

INSULATIONS = (0.40, 0.36, 0.32, 0.28)  # tried in this order
MOST_TRIED = 16  # spreads
TURNS = 4  # of ribs and barriers
THINNEST = 1.5  # sheets, of a barrier or carrier on the q axis; common practice, no source
DEPTH_OF_BARRIER = 7e-3  # m of pole depth for each barrier; common practice, no source


@dataclass(frozen=True, slots=True)
class RotorNeeds:
    """What the barriers and ribs of a first rotor follow from, SI."""

    speed: float  # overspeed, rad/s
    density: float  # kg/m^3
    most_stress: float  # Pa, that ribs may reach by the rib law
    least_rib: float  # m
    barriers: int | None  # of a pole; None to choose


@dataclass(frozen=True, slots=True)
class FirstBarrier:
    """One barrier with what its ribs bear."""

    table: BarrierDesign
    load: RibLoad
    widths: RibWidths
    stress: float  # Pa, greatest by the rib law


@dataclass(frozen=True, slots=True)
class FirstRotor:
    """The barriers of a pole, and what they follow from."""

    spread: Spread
    insulation: float
    barriers: tuple[FirstBarrier, ...]
    refused: tuple[str, ...]  # spreads tried before, with why they were not taken


def first_rotor(design: MachineDesign, needs: RotorNeeds) -> FirstRotor | tuple[str, ...]:
    """The first rotor that passes every check of shape, or why none does.

    Args:
        design: the machine, whose barriers are replaced.
        needs: speed, steel and ribs.
    """
    slots = Fraction(design.stator.slots, design.pole_pairs)
    choices = spreads(slots, wished_barriers(design, needs))[:MOST_TRIED]
    refused: list[str] = []
    for spread in choices:
        why = ""
        for insulation in INSULATIONS:
            laid = laid_out(design, needs, spread, insulation)
            if not isinstance(laid, str):
                return FirstRotor(spread, insulation, laid, tuple(refused))
            why = why or laid
        ends = ", ".join(f"{math.degrees(e):.1f}" for e in spread.ends)
        refused.append(f"ends at {ends} el deg: {why}")
    return tuple(refused)


def wished_barriers(design: MachineDesign, needs: RotorNeeds) -> tuple[int, ...]:
    """Numbers of barriers to choose from, the most welcome first."""
    if needs.barriers is not None:
        return (needs.barriers,)
    room = pole_room(design)
    reach = math.pi / (2.0 * room.pole_pairs)
    usable = room.depth
    if room.pole_pairs > 1:  # an arc square to the rim at the d axis goes no deeper
        usable = min(usable, room.rotor_radius * (1.0 - (1.0 - math.sin(reach)) / math.cos(reach)))
    best = min(4, max(2, round(usable / DEPTH_OF_BARRIER)))
    return tuple(sorted((2, 3, 4, 5), key=lambda count: abs(count - best)))


def pole_room(design: MachineDesign) -> PoleRoom:
    """Radii of the design's rotor."""
    rotor = design.rotor
    radius = 0.5e-3 * design.stator.bore_diameter_mm - 1e-3 * rotor.gap_mm
    return PoleRoom(radius, 0.5e-3 * rotor.shaft_diameter_mm, design.pole_pairs)


def laid_out(
    design: MachineDesign, needs: RotorNeeds, spread: Spread, insulation: float
) -> tuple[FirstBarrier, ...] | str:
    """Barriers and ribs for one spread, or why they cannot be."""
    room, law = pole_room(design), RibLaw()
    widths = [RibWidths(needs.least_rib, 0.0)] * spread.barriers
    tables: tuple[BarrierDesign, ...] = ()
    for _ in range(TURNS):
        sides = [width.tangential for width in widths]
        placed = placed_barriers(room, spread.ends, insulation, sides)
        if not placed:
            return "arcs to these ends do not fit between rim and shaft"
        thin = _thin(design, room, placed)
        if thin:
            return thin
        sheet = 1e-3 * design.rotor.sheet_thickness_mm
        tables = tuple(
            barrier_table(one, width, sheet) for one, width in zip(placed, widths, strict=True)
        )
        try:
            loads = rib_loads(
                tables, room.rotor_radius, room.pole_pairs, needs.density, needs.speed
            )
        except ValueError as error:
            return str(error)
        found = [rib_widths(load, needs.least_rib, needs.most_stress, law) for load in loads]
        if None in found:
            k = found.index(None) + 1
            return f"no rib of usual width holds barrier {k} at overspeed"
        # Wider of both turns, so that it comes to an end.
        widths = [
            RibWidths(max(old.tangential, new.tangential), max(old.radial, new.radial))
            for old, new in zip(widths, (w for w in found if w is not None), strict=True)
        ]
    tables = tuple(
        barrier_table(one, width, sheet) for one, width in zip(placed, widths, strict=True)
    )
    rotor = with_barriers(design.rotor, tables)
    faults = shape_faults(design.model_copy(update={"rotor": rotor}))
    if faults:
        return f"{faults[0].keys[0]}: {faults[0].text}"
    stresses = [
        rib_stresses(load, width.tangential, width.radial, law).greatest
        for load, width in zip(loads, widths, strict=True)
    ]
    rows = zip(tables, loads, widths, stresses, strict=True)
    return tuple(FirstBarrier(*row) for row in rows)


def with_barriers(rotor: RotorDesign, barriers: Sequence[BarrierDesign]) -> RotorDesign:
    """The rotor with other barriers."""
    return rotor.model_copy(update={"barrier": tuple(barriers)})


def barrier_table(placed: PlacedBarrier, widths: RibWidths, sheet: float) -> BarrierDesign:
    """One barrier as a design file states it: mm with two decimals, degrees."""
    thickness, end = _mm(placed.thickness), _mm(placed.end_thickness)
    values: dict[str, object] = {
        "shape": "arc",
        "end_angle_deg": round(math.degrees(placed.end), 2),
        "thickness_mm": thickness,
        "depth_mm": _mm(placed.depth),
        "tangential_rib_mm": _mm(widths.tangential),
    }
    if end < thickness:
        values["end_thickness_mm"] = end
    if widths.radial > 0.0:
        values |= {"radial_ribs": 1, "radial_rib_mm": _mm(widths.radial)}
        values["fillet_mm"] = radial_fillet(thickness, 1e3 * sheet)
    return BarrierDesign.model_validate(values)


def radial_fillet(thickness: float, sheet: float) -> float:
    """Fillet beside a radial rib in mm: a third of the thickness, a full round where that is small.

    Args:
        thickness: of the barrier in mm.
        sheet: thickness in mm.
    """
    third = round(thickness / 3.0, 2)
    return third if third >= 0.5 * sheet else round(0.5 * thickness, 4)


def _thin(design: MachineDesign, room: PoleRoom, placed: Sequence[PlacedBarrier]) -> str:
    """Whether barriers or the carriers between them are too thin on the q axis."""
    least = THINNEST * 1e-3 * design.rotor.sheet_thickness_mm
    if min(one.thickness for one in placed) < least:
        return f"a barrier would be thinner than {_mm(least):g} mm"
    edge = 0.0
    for one in placed:
        if one.depth - edge < least:
            return f"a carrier would be thinner than {_mm(least):g} mm"
        edge = one.depth + one.thickness
    return ""


def _mm(length: float) -> float:
    return round(1e3 * length, 2)
