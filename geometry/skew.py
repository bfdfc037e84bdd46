"""A rotor skewed in steps: equal parts of the stack, each turned against the one before.

The skew angle is that of the continuous skew that the steps stand for: n steps turned against
each other by the angle over n, so that from the first to the last it is (n - 1)/n of it. The
rotor's position is that of the mean of the steps, which lie evenly to both sides of it.
"""

import math

from .design import MachineDesign
from .errors import Finding

DEGREE = math.pi / 180.0
HALF_TURN = 180.0  # degrees


def skew_offsets(design: MachineDesign) -> tuple[float, ...]:
    """Mechanical angles in rad of the steps ahead of the rotor's position; (0,) without skew."""
    steps = design.rotor.skew_steps
    turn = DEGREE * design.rotor.skew_angle_deg / steps
    return tuple((k - 0.5 * (steps - 1)) * turn for k in range(steps))


def skew_factor(order: int, steps: int, angle_el: float) -> float:
    """Share of a harmonic that steps leave.

    Args:
        order: electrical order.
        steps: equal parts of the stack.
        angle_el: of the whole skew in electrical rad, as stated in the design.

    Source: derived, mean of n cosines d = angle / n apart; sin(n nu d/2) / (n sin(nu d/2)).
    """
    half = 0.5 * order * angle_el / steps  # nu d / 2
    if math.isclose(math.sin(half), 0.0, abs_tol=1e-12):
        return math.cos(half * (steps - 1))  # nu d a multiple of a turn: all steps agree
    return math.sin(steps * half) / (steps * math.sin(half))


def continuous_skew_factor(order: int, angle_el: float) -> float:
    """Share of a harmonic that a continuous skew leaves: sin(nu a/2) / (nu a/2).

    Args:
        order: electrical order.
        angle_el: from end to end in electrical rad.

    Source: derived, mean of a cosine over the angle.
    """
    half = 0.5 * order * angle_el
    return math.sin(half) / half if half else 1.0


def skew_findings(design: MachineDesign) -> list[Finding]:
    """Keys of the skew that do nothing, and a skew by a pole pitch or more."""
    rotor, found = design.rotor, []
    key = "rotor.skew_angle_deg"
    pitch = 2.0 * HALF_TURN / rotor.poles
    if rotor.skew_steps == 1 and rotor.skew_angle_deg > 0.0:
        text, remedy = "one step has no skew", "set skew_steps, 2 or more, or remove it"
        found.append(Finding("skew_idle", key, rotor.skew_angle_deg, text, remedy))
    if rotor.skew_steps > 1 and rotor.skew_angle_deg == 0.0:
        text, remedy = "steps need an angle", f"add skew_angle_deg, above 0 and below {pitch:g}"
        found.append(Finding("skew_missing", "rotor.skew_steps", rotor.skew_steps, text, remedy))
    if rotor.skew_angle_deg >= pitch:
        text = "a pole pitch or more: the steps work against each other"
        remedy = f"accepted above 0 and below {pitch:g}"
        found.append(Finding("skew_wide", key, rotor.skew_angle_deg, text, remedy))
    return found
