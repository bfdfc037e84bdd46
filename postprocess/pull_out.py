"""Load angle and pull-out margin of a machine whose stator flux is held.

Fed by a voltage, a machine holds its stator flux linkage, psi = u / omega_e with the resistance
left out. Torque then rises with the load angle, the angle of the stator flux from the d axis, up
to the pull-out torque of that flux, past which the rotor falls out of step; in a linear machine
T ~ sin 2 delta, so at 45 electrical degrees (derived from T = 3/2 p (psi_d i_q - psi_q i_d)). Here
the margin is

    pull-out ratio = greatest torque at the same amount of stator flux linkage / torque

end winding included. The greatest torque of a flux is that of the point of most torque per volt
with this flux. Where that needs currents beyond the map, the greatest on the map is taken: the
ratio is then a lower bound, and said to be one.
Axes: n_curve points of the curve, n any shape.
"""

from dataclasses import dataclass

import numpy as np
from scipy.interpolate import PchipInterpolator

from lamwright.solver.types import FloatArray

from .brackets import BoolArray
from .control_curves import least_linkage
from .terminals import square_linkage
from .torque_lines import TorqueLines, greatest_torque

POINTS = 97  # of the curve; between them monotone cubics, within 1e-5 of the linear machine's
ON_CURVE = 5e-5  # relative difference of torque below which a point lies on the curve
LAST = 0.9999  # of the map's greatest torque, where the line is a point


@dataclass(frozen=True, slots=True, eq=False)
class PullOutCurve:
    """Greatest torque of each stator flux linkage within the map."""

    linkage: FloatArray  # (n_curve,), V s, rising, end winding included
    torque: FloatArray  # (n_curve,), N m, rising
    mapped: float  # V s: above it the true pull-out lies beyond the map


def pull_out_curve(lines: TorqueLines) -> PullOutCurve:
    """The curve of a drive's map, from zero torque on."""
    # Torque grows with the square of the linkage, as its steps here do.
    torque = LAST * greatest_torque(lines) * np.linspace(0.0, 1.0, POINTS) ** 2
    least = least_linkage(lines, torque)
    is_there = np.isfinite(least.i_d) & np.isfinite(least.i_q)
    torque, is_edge = torque[is_there], least.is_edge[is_there]
    linkage = np.sqrt(square_linkage(lines.drive, least.i_d[is_there], least.i_q[is_there]))
    rises = np.append(True, np.diff(np.maximum.accumulate(linkage)) > 0.0)
    first_edge = int(np.argmax(is_edge)) if is_edge.any() else is_edge.size
    mapped = float(linkage[max(first_edge - 1, 0)])
    return PullOutCurve(linkage[rises], torque[rises], mapped)


def pull_out_ratio(
    curve: PullOutCurve, torque: FloatArray, linkage: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """Pull-out ratio (n), nan without torque, and whether it is a lower bound (n).

    Args:
        curve: of the drive's map.
        torque: (n), N m.
        linkage: (n), V s, amount with end winding.
    """
    held = np.clip(np.nan_to_num(linkage), curve.linkage[0], curve.linkage[-1])
    greatest = PchipInterpolator(curve.linkage, curve.torque)(held)
    has_torque = np.isfinite(linkage) & (torque > 0.0)
    ratio = np.where(has_torque, greatest / np.where(has_torque, torque, 1.0), np.nan)
    # A point of the curve itself must not lie beyond it by the cubics' error.
    is_on_it = np.abs(ratio - 1.0) < ON_CURVE
    return np.where(is_on_it, 1.0, ratio), has_torque & (linkage > curve.mapped)


def load_angle(psi_d: FloatArray, psi_q: FloatArray, side: int) -> FloatArray:
    """Electrical rad from the motoring d axis to the stator flux; negative below magnets' flux."""
    return np.arctan2(psi_q, side * psi_d) * side
