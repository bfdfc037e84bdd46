"""Error bars of the page's coarse figures: how far they may be from those of a full verdict.

They are measured, not computed for the design at hand: set so that they hold with room to spare on
all shipped designs and on random ones (`tests/app/test_coarse_bars.py`), where magnets, skew, open
slots and drawn rotors are among. A machine unlike all of these may lie outside; the full verdict
computes its own bars.

Torque is a difference of two products of linkage and current, each known to a share of itself: of a
rotor with little saliency it is known less well. Currents follow from the angle, whose maximum is
flat. Ripple hangs on single positions, of which there are few, and is known least.
"""

import math
from collections.abc import Mapping

TORQUE, PRODUCTS = 0.01, 0.003  # of itself, of both products of linkage and current
RIPPLE, RIPPLE_POINTS = 0.3, 4.0  # of itself, % of the torque
ANGLE_DEG = 1.5
POWER_FACTOR = 0.012
STRESS = 0.08
SHARES = {  # of the figure itself
    "saliency_ratio": 0.04,
    "psi_d_vs": 0.02,
    "psi_q_vs": 0.025,
    "terminal_voltage_v": 0.015,
    "rib_stress_peak_mpa": STRESS,
    "lamination_stress_peak_mpa": STRESS,
    "yield_margin": STRESS,
    "speed_yield_begins_rpm": 0.5 * STRESS,  # goes with the root of the stress
    "rib_tension_mean_mpa": 0.005,
    "radial_growth_um": 0.005,
}


def coarse_bars(figures: Mapping[str, float], pole_pairs: int) -> dict[str, float]:
    """Error bars by keys, each in its figure's unit; figures that both compute alike have none.

    Args:
        figures: the coarse ones by their keys.
        pole_pairs: of the machine.
    """
    i_d, i_q = figures["i_d_a"], figures["i_q_a"]
    products = 1.5 * pole_pairs * (abs(figures["psi_d_vs"] * i_q) + abs(figures["psi_q_vs"] * i_d))
    torque = TORQUE * abs(figures["torque_nm"]) + PRODUCTS * products
    turned = math.radians(ANGLE_DEG)
    bars = {key: share * abs(figures[key]) for key, share in SHARES.items()}
    return bars | {
        "torque_nm": torque,
        "torque_linkage_nm": torque,
        "air_gap_power_w": torque / abs(figures["torque_nm"]) * abs(figures["air_gap_power_w"]),
        "torque_ripple_percent": RIPPLE * figures["torque_ripple_percent"] + RIPPLE_POINTS,
        "current_angle_deg": ANGLE_DEG,
        "i_d_a": turned * abs(i_q),
        "i_q_a": turned * abs(i_d),
        "power_factor": POWER_FACTOR,
        "gap_left_mm": 1e-3 * bars["radial_growth_um"],
    }
