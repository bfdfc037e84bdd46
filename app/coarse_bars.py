"""Error bars of the page's coarse figures: how far they may be from those of a full verdict.

They are measured, not computed for the design at hand: set so that they hold with room to spare on
all shipped designs, magnets, skew and a drawn rotor among them, and on 14 random ones
(`tests/app/test_coarse_bars.py`). A machine unlike all of these may lie outside; the full verdict
computes its own bars.

Torque is a difference of two products of linkage and current, each known to a share of itself: of a
rotor with little saliency it is known less well, and so is the angle of most torque (an error of
slope over a curvature that is small), on which currents and linkages hang. Ripple hangs on single
positions, of which there are few, and is known least.
"""

import math
from collections.abc import Mapping

TORQUE, PRODUCTS = 0.01, 0.003  # of itself, of both products of linkage and current
RIPPLE, RIPPLE_POINTS = 0.3, 4.0  # of itself, % of the torque
ANGLE_DEG = 1.5  # of a salient rotor; grows with the root of what follows
SALIENT = 1.5  # both products over the torque, of a saliency ratio of 5
MAGNET = 0.005  # of the magnets' linkage, in the small difference that makes a saliency of them
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
    saliency = max(1.0, products / abs(figures["torque_nm"]) / SALIENT)
    angle = ANGLE_DEG * math.sqrt(saliency)
    turned, further = math.radians(angle), math.radians(angle - ANGLE_DEG)
    bars = {key: share * abs(figures[key]) for key, share in SHARES.items()}
    # Without saturation psi_d goes with cos gamma, psi_q with sin gamma; derived.
    bars["psi_d_vs"] += further * abs(figures["psi_d_vs"] * i_q / i_d)
    bars["psi_q_vs"] += further * abs(figures["psi_q_vs"] * i_d / i_q)
    # What the currents make of psi_q, and what the magnets do: 0 without them.
    own_q = figures["psi_d_vs"] * i_q / i_d / figures["saliency_ratio"]
    magnets = abs((figures["psi_q_vs"] - own_q) / own_q)
    bars["saliency_ratio"] += MAGNET * magnets * abs(figures["saliency_ratio"])
    return bars | {
        "torque_nm": torque,
        "torque_linkage_nm": torque,
        "air_gap_power_w": torque / abs(figures["torque_nm"]) * abs(figures["air_gap_power_w"]),
        "torque_ripple_percent": RIPPLE * figures["torque_ripple_percent"] + RIPPLE_POINTS,
        "current_angle_deg": angle,
        "i_d_a": turned * abs(i_q),
        "i_q_a": turned * abs(i_d),
        "power_factor": POWER_FACTOR,
        "gap_left_mm": 1e-3 * bars["radial_growth_um"],
    }
