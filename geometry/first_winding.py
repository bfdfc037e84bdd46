r"""The winding of a first design: coils, turns, conductor and current by formula.

Turns. In steady state a phase's voltage is omega_e psi. With a sinusoidal gap field of peak B the
d-axis linkage is psi_d = k_w N B D L / p (derived: flux of a pole 2/pi B tau L with
tau = pi D / 2p); the q axis adds a share. The turns are those at which the voltage is the supply's
at rated speed, less a reserve for the resistance and the control.

Copper. Conductor area = fill factor x slot area / turns; current = current density x area.

Densities, fill, shares and reserve are common practice, no source.
"""

import math
from dataclasses import dataclass

from .first_text import DesignTable, Line
from .star_of_slots import Coil, CoilStar, coil_star

GAP_DENSITY = 0.80  # T, peak of the fundamental that the turns are laid out for
RESERVE = 0.90  # of the supply voltage
Q_SHARE = 0.35  # psi_q / psi_d at rated current
FILL = 0.40  # copper in the slot's copper region
CURRENT_DENSITY = 5.0  # A/mm^2 rms
FEWEST_TURNS = 4  # in a coil; with fewer, parallel paths are taken so that turns can be chosen
OVERHANG = 1.35  # end turn over the coil's width on the mean circle
STRAIGHT = 0.020  # m, straight ends of a coil, both together


@dataclass(frozen=True, slots=True)
class CoilPlan:
    """How a stator is wound, before turns are chosen."""

    layers: int
    span: int
    why: str


@dataclass(frozen=True, slots=True)
class WindingNeeds:
    """What the turns follow from, SI."""

    slots: int
    poles: int
    bore: float  # diameter
    stack_length: float
    slot_depth: float
    copper_area: float  # of one layer of one slot, m^2
    supply_voltage: float  # rms between lines
    rated_speed: float  # rad/s, mechanical


def coil_plan(slots: int, poles: int) -> CoilPlan:
    """Layers and coil span: chorded to 5/6 of the pole pitch where slots are whole."""
    pitch = slots / poles
    if slots % (3 * poles) == 0:
        if slots == 3 * poles:
            return CoilPlan(1, 3, "One slot per pole and phase: a single layer of full pitch.")
        span = math.ceil(5 * pitch / 6 - 0.5)
        return CoilPlan(
            2,
            span,
            f"Two layers, chorded to {span} of {pitch:g} slots, about 5/6, which nearly removes "
            "mmf orders 5 and 7 (Pyrhonen, Jokinen, Hrabovcova 2014, from memory).",
        )
    span = max(1, round(pitch - 1e-9))
    return CoilPlan(
        2, span, f"Fractional slots, {pitch:.4g} a pole: two layers, span next to full pitch."
    )


def winding_table_of(needs: WindingNeeds, plan: CoilPlan) -> DesignTable:
    """The [winding] table."""
    star = coil_star(needs.slots, needs.poles, plan.layers, plan.span)
    factor = _factor(needs, plan, star)
    pole_pairs = needs.poles // 2
    omega = pole_pairs * needs.rated_speed
    peak = RESERVE * needs.supply_voltage * math.sqrt(2.0 / 3.0)
    linkage = peak / (omega * math.hypot(1.0, Q_SHARE))
    flux = GAP_DENSITY * needs.bore * needs.stack_length / pole_pairs
    series = linkage / (factor * flux)  # N
    coils = len(star.coils) // 3
    paths = _paths(series / coils, star.alike)
    allowed = series * paths / coils
    turns = max(1, math.floor(allowed))
    beyond = "" if allowed >= 1.0 else " One turn is more: rated speed is out of its reach."
    area = FILL * needs.copper_area / turns
    across = math.pi * (needs.bore + needs.slot_depth) * plan.span / needs.slots
    return DesignTable(
        "winding",
        (
            Line("layers", plan.layers, plan.why),
            Line("coil_span_slots", plan.span),
            Line(
                "turns_per_coil",
                turns,
                f"Turns from voltage and flux (derived): {RESERVE:g} x {needs.supply_voltage:g} V "
                f"x sqrt(2/3) = {peak:.4g} V peak at {_rpm(needs.rated_speed):g} rpm allow "
                f"{linkage:.4g} V s along d with psi_q / psi_d = {Q_SHARE:g} (assumed). With "
                f"B = {GAP_DENSITY:g} T (assumed) psi_d = k_w N B D L / p, k_w = {factor:.4f}: "
                f"N = {series:.4g} in series, {coils} coils a phase.{beyond}",
            ),
            Line("parallel_paths", paths),
            Line(
                "conductor_area_mm2",
                _four(1e6 * area),
                f"{FILL:g} fill (assumed) x {1e6 * needs.copper_area:.4g} mm2 of a coil side / "
                "turns.",
            ),
            Line(
                "end_turn_length_mm",
                round(1e3 * (OVERHANG * across + STRAIGHT), 1),
                f"{OVERHANG:g} x the coil's width on the slots' mean circle + "
                f"{1e3 * STRAIGHT:g} mm; common practice, no source.",
            ),
        ),
        about="Winding: made by formula, all assumptions stated.",
    )


def rated_current(conductor_area: float, paths: int) -> float:
    """Peak terminal current in A at the usual current density; area in mm^2."""
    return math.sqrt(2.0) * CURRENT_DENSITY * conductor_area * paths


def _paths(turns: float, alike: int) -> int:
    """The fewest parallel paths with enough turns in a coil to choose from."""
    able = [n for n in range(1, alike + 1) if alike % n == 0]
    return next((n for n in able if n * turns >= FEWEST_TURNS), able[-1])


def _factor(needs: WindingNeeds, plan: CoilPlan, star: CoilStar) -> float:
    """Fundamental winding factor from the star: the coils' phasors over their number."""
    turn = math.pi * needs.poles / needs.slots
    real = [
        (c.sign * math.cos(turn * c.start), c.sign * math.sin(turn * c.start))
        for c in phase_a(star)
    ]
    length = math.hypot(sum(x for x, _ in real), sum(y for _, y in real)) / len(real)
    return length * abs(math.sin(0.5 * turn * plan.span))


def phase_a(star: CoilStar) -> tuple[Coil, ...]:
    """The coils of phase A."""
    return tuple(coil for coil in star.coils if coil.phase == 0)


def _rpm(speed: float) -> float:
    return round(speed * 30.0 / math.pi, 3)


def _four(value: float) -> float:
    """Four digits."""
    return float(f"{value:.4g}")
