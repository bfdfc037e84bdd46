"""Why a first design's rotor is as it is: the tables of its barriers with their comments."""

import math
from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction

from .design import MachineDesign
from .first_barriers import shares
from .first_rotor import Candidate, FirstBarrier, FirstRotor, RotorNeeds, pole_room
from .first_spread import AVOIDED, BEST_DISTANCE
from .first_text import DesignTable, Line
from .first_wishes import RPM, Wishes

SHOWN_OTHERS = 3


def barrier_tables(
    design: MachineDesign, wishes: Wishes, needs: RotorNeeds, rotor: FirstRotor
) -> tuple[DesignTable, ...]:
    """The tables of the barriers with the reasons of their numbers."""
    taken = rotor.taken
    share = shares(taken.spread.ends)
    tables = []
    for k, one in enumerate(taken.barriers):
        why = {
            "end_angle_deg": f"{math.degrees(taken.spread.ends[k]):.2f} el deg / "
            f"{design.pole_pairs} pole pairs.",
            "thickness_mm": f"{share.barriers[k]:.3f} of the air, its share of the q-axis mmf "
            "drop.",
            "depth_mm": f"The carrier outside has {share.carriers[k]:.3f} of the iron, its share "
            "of the d axis's flux, and more where the arc would lie flatter to the rim than 45 "
            "degrees.",
            "end_thickness_mm": "At most half the places at the rim, so that flux gets in between.",
            "tangential_rib_mm": _rib_reason(wishes, needs, one),
            "radial_ribs": "Tangential ribs alone would be too thick: one on the q axis.",
            "fillet_mm": "A third of the thickness, or a full round.",
        }
        values = one.table.model_dump(exclude_unset=True)
        lines = tuple(Line(key, value, why.get(key, "")) for key, value in values.items())
        about = _spread_reason(design, rotor) if k == 0 else ""
        tables.append(DesignTable("rotor.barrier", lines, about))
    return tuple(tables)


def _rib_reason(wishes: Wishes, needs: RotorNeeds, one: FirstBarrier) -> str:
    return (
        f"At {RPM * needs.speed:.0f} rpm {1e-3 * one.load.force:.4g} N per mm of stack hang "
        f"outside; stress by formula {1e-6 * one.stress:.0f} MPa, allowed "
        f"{1e-6 * needs.most_stress:.0f} MPa = yield / {wishes.rib_margin:.2f}; not under "
        f"{wishes.rib_factor:g} x sheet (derived, see geometry/first_ribs.py)."
    )


def _spread_reason(design: MachineDesign, rotor: FirstRotor) -> str:
    taken, room = rotor.taken, pole_room(design)
    slots = Fraction(design.stator.slots, design.pole_pairs)
    air = sum(1e-3 * one.table.thickness_mm for one in taken.barriers)
    lines = [
        f"Barriers. Ends stand on n_r = {taken.spread.places} places equally spaced round a pole "
        f"pair, against n_s = {float(slots):g} slots. The published rule: n_r not n_s nor "
        f"n_s +-{AVOIDED[1]}, best n_s +-{BEST_DISTANCE} (Vagati, Pastorelli, Franceschini, "
        "Petrache 1998, from memory). Of all such spreads this one has the least "
        f"ripple by a linear mmf model, {_percent(taken)} (derived, like Bianchi, Bolognani, Bon, "
        "Dai Pre 2009; geometry/first_ripple.py), torque counted in. The model only ranks "
        "rotors: assess tells the ripple.",
        *(f"Not taken: {_candidate_text(other)}." for other in rotor.others[:SHOWN_OTHERS]),
        f"Insulation ratio {taken.insulation:g} of the depth that barriers and carriers share, "
        f"{air / room.depth:.3f} of rim to shaft; usual 0.3 to 0.5 (common practice).",
        "Carriers: widths as the d axis's flux through them, cos e_k - cos e_(k+1); thicknesses as "
        "the q axis's mmf drop between them (derived; Vagati et al. 1992, from memory).",
    ]
    if taken.is_avoided:
        lines.insert(
            1,
            "The rule is against this n_r: by the model all others are far worse in all.",
        )
    return "\n".join(lines)


def _candidate_text(one: Candidate) -> str:
    ends = ", ".join(f"{math.degrees(end):.1f}" for end in one.spread.ends)
    rule = ", against the rule" if one.is_avoided else ""
    return f"{one.spread.places} places, ends at {ends} el deg: {_percent(one)}{rule}"


def _percent(one: Candidate) -> str:
    return f"{100.0 * one.estimate.ripple:.0f} %"


def checked_tables(tables: Sequence[DesignTable], margin: float) -> tuple[DesignTable, ...]:
    """The tables with the yield margin that the stress solution has found.

    Args:
        tables: of the first design.
        margin: yield strength over the greatest stress at overspeed.
    """
    told = f"At overspeed. The stress solution of this design has {margin:.2f}."
    return tuple(
        replace(
            table,
            lines=tuple(
                replace(line, why=told) if line.key == "least_yield_margin" else line
                for line in table.lines
            ),
        )
        for table in tables
    )
