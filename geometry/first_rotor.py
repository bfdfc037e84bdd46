"""The rotor of a first design: the spread of barrier ends with the least ripple that can be built.

Spreads that the published rule advises against are taken only where the estimate says that all
others have far more ripple. Torque counts too: what is lost of it is charged to the ripple.

Each spread is laid out with less and less air. Ribs and barriers depend on each other (a thicker
rib moves the barrier's end inward, which changes the load) and are found in turns.
"""

import math
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from .design import BarrierDesign, MachineDesign, RotorDesign
from .errors import DesignError
from .first_barriers import PlacedBarrier, PoleRoom, placed_barriers
from .first_ribs import RibLaw, RibLoad, RibWidths, rib_loads, rib_stresses, rib_widths
from .first_ripple import TorqueEstimate, estimated_torque_of, gap_model
from .first_spread import EvenEnds, Spread, is_avoided, spreads
from .rotor_checks import rotor_faults

INSULATIONS = (0.40, 0.36, 0.32, 0.28)  # tried in this order
ANGLE = math.radians(55.0)  # current angle from the d axis of most torque, assumed
# Merits; common practice, no source.
AGAINST_RULE = 1.6  # times the ripple of a spread that the published rule is against
TORQUE_POWER = 2.0  # of the torque lost to the best
PER_BARRIER = 0.1  # of the ripple for each barrier more or fewer than usual
TURNS = 6  # of ribs and barriers
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
class Candidate:
    """A spread laid out."""

    spread: Spread
    insulation: float
    barriers: tuple[FirstBarrier, ...]
    estimate: TorqueEstimate
    is_avoided: bool  # by the published rule


@dataclass(frozen=True, slots=True)
class FirstRotor:
    """The candidate taken, and the best others."""

    taken: Candidate
    others: tuple[Candidate, ...]  # from the best


def first_rotor(design: MachineDesign, needs: RotorNeeds) -> FirstRotor:
    """The best rotor that passes every check of shape.

    Args:
        design: the machine, whose barriers are replaced.
        needs: speed, steel and ribs.

    Raises:
        DesignError: there is none; the text says why the first spread cannot be.
    """
    slots = Fraction(design.stator.slots, design.pole_pairs)
    best, counts = wished_barriers(design, needs)
    gap = gap_model(design)
    found: list[Candidate] = []
    refused: list[str] = []
    for spread in spreads(counts):
        laid = first_that_fits(design, needs, spread)
        if isinstance(laid, str):
            refused.append(laid)
            continue
        insulation, barriers = laid
        tables = [one.table for one in barriers]
        estimate = estimated_torque_of(gap, design, tables, ANGLE)
        avoided = is_avoided(spread, slots)
        found.append(Candidate(spread, insulation, barriers, estimate, avoided))
    if not found:
        raise DesignError(Counter(refused).most_common(1)[0][0] if refused else "no room for ends")
    most = max(one.estimate.mean for one in found)
    ranked = sorted(found, key=lambda one: _demerit(one, most, best))
    return FirstRotor(ranked[0], tuple(ranked[1:]))


def first_that_fits(
    design: MachineDesign, needs: RotorNeeds, spread: Spread | EvenEnds
) -> tuple[float, tuple[FirstBarrier, ...]] | str:
    """The most air with which a spread passes the checks of shape, or why none does."""
    why = ""
    for insulation in INSULATIONS:
        laid = laid_out(design, needs, spread, insulation)
        if not isinstance(laid, str):
            return insulation, laid
        why = why or laid
    return why


def _demerit(one: Candidate, most_torque: float, usual: int) -> float:
    """Ripple, with torque lost, unusual numbers of barriers and the published rule charged."""
    ripple = one.estimate.ripple * (AGAINST_RULE if one.is_avoided else 1.0)
    if one.estimate.mean <= 0.0:
        return math.inf
    lost = math.pow(most_torque / one.estimate.mean, TORQUE_POWER)
    return ripple * lost * (1.0 + PER_BARRIER * abs(one.spread.barriers - usual))


def wished_barriers(design: MachineDesign, needs: RotorNeeds) -> tuple[int, tuple[int, ...]]:
    """The usual number of barriers, and the numbers to choose from."""
    room = pole_room(design)
    reach = math.pi / (2.0 * room.pole_pairs)
    usable = room.depth
    if room.pole_pairs > 1:  # an arc square to the rim at the d axis goes no deeper
        usable = min(usable, room.rotor_radius * (1.0 - (1.0 - math.sin(reach)) / math.cos(reach)))
    usual = min(4, max(2, round(usable / DEPTH_OF_BARRIER)))
    return usual, (2, 3, 4, 5) if needs.barriers is None else (needs.barriers,)


def pole_room(design: MachineDesign) -> PoleRoom:
    """Radii of the design's rotor."""
    rotor = design.rotor
    radius = 0.5e-3 * design.stator.bore_diameter_mm - 1e-3 * rotor.gap_mm
    return PoleRoom(radius, 0.5e-3 * rotor.shaft_diameter_mm, design.pole_pairs)


def laid_out(
    design: MachineDesign, needs: RotorNeeds, spread: Spread | EvenEnds, insulation: float
) -> tuple[FirstBarrier, ...] | str:
    """Barriers and ribs for one spread, or why they cannot be."""
    room, law = pole_room(design), RibLaw()
    widths = [RibWidths(needs.least_rib, 0.0)] * spread.barriers
    for _ in range(TURNS):
        tables = _tables(design, spread, insulation, widths)
        if isinstance(tables, str):
            return tables
        loads = rib_loads(tables, room.rotor_radius, room.pole_pairs, needs.density, needs.speed)
        found = [rib_widths(load, needs.least_rib, needs.most_stress, law) for load in loads]
        sound = [one for one in found if one is not None]
        if len(sound) < len(found):
            return f"no rib of usual width holds barrier {found.index(None) + 1} at overspeed"
        # Wider of both turns, so that it comes to an end.
        wider = [
            RibWidths(max(old.tangential, new.tangential), max(old.radial, new.radial))
            for old, new in zip(widths, sound, strict=True)
        ]
        if wider == widths:
            break
        widths = wider
    else:
        return "ribs and barriers do not settle"
    stresses = [
        rib_stresses(load, width.tangential, width.radial, law).greatest
        for load, width in zip(loads, widths, strict=True)
    ]
    rows = zip(tables, loads, widths, stresses, strict=True)
    return tuple(FirstBarrier(*row) for row in rows)


def _tables(
    design: MachineDesign,
    spread: Spread | EvenEnds,
    insulation: float,
    widths: Sequence[RibWidths],
) -> tuple[BarrierDesign, ...] | str:
    """Barriers with ribs of given widths, checked, or the first reason why they cannot be."""
    room = pole_room(design)
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
    rotor = with_barriers(design.rotor, tables)
    faults = rotor_faults(design.model_copy(update={"rotor": rotor}))
    return f"{faults[0].keys[0]}: {faults[0].text}" if faults else tables


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
