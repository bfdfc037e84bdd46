"""How far each figure is off by the meshes, in the figure's own unit.

Numerical errors alone: neither the steel curve's nor those of the formulas for resistance and end
winding are in them. Figures that are prescribed (currents, speeds, limits) or formulas alone have
none, and so have the counts and the figures that state differences themselves; each says why
(`quantities`). Linkages hold at the currents stated; these err as the best angle does.
"""

import math
from collections.abc import Mapping
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.winding import end_winding_inductance, phase_resistance
from lamwright.solver.estimate import FieldErrors, angle_error
from lamwright.solver.estimate_stress import BEYOND
from lamwright.solver.types import FloatArray

from .operating import AngleSettings, TerminalState, saliency_ratio, terminal_state
from .quantities import scaled_by_key
from .ribs import RibReport
from .summary import stress_figures
from .verdict import RPM, MagneticFigures, TerminalFigures

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


def magnetic_errors(
    magnetic: MagneticFigures, errors: FieldErrors, magnet_psi_q: float = 0.0
) -> dict[str, float]:
    """Errors of the magnetic figures by their keys.

    Args:
        magnetic: figures at the operating point.
        errors: of the waveform that they are of.
        magnet_psi_q: mean psi_q at no load in V s, taken as true.
    """
    m = magnetic
    angle = angle_error(errors.torque / m.torque, AngleSettings().tolerance)

    def saliency(psi_d: float, psi_q: float) -> float:
        return saliency_ratio(m.i_d, m.i_q, psi_d, psi_q - magnet_psi_q)

    return by_key(
        m,
        {
            "torque": errors.torque,
            "ripple": errors.ripple,
            "saliency": errors.linkages.of(saliency, m.psi_d, m.psi_q),
            "gamma": angle,
            "i_d": angle * abs(m.i_q),
            "i_q": angle * abs(m.i_d),
            "psi_d": errors.psi_d,
            "psi_q": errors.psi_q,
            "torque_linkage": errors.torque_linkage,
            "ripple_of_samples": errors.ripple,
        },
    )


def terminal_errors(
    design: MachineDesign, magnetic: MagneticFigures, terminal: TerminalFigures, errors: FieldErrors
) -> dict[str, float]:
    """Errors of the terminal figures that rest on the field, by their keys."""
    m, known, speed = magnetic, errors.linkages, design.duty.rated_speed_rpm / RPM
    resistance, end_inductance = phase_resistance(design), end_winding_inductance(design)

    def state(psi_d: float, psi_q: float) -> TerminalState:
        return terminal_state(
            i_d=m.i_d,
            i_q=m.i_q,
            psi_d=psi_d,
            psi_q=psi_q,
            omega_e=design.pole_pairs * speed,
            resistance=resistance,
            end_inductance=end_inductance,
        )

    return by_key(
        terminal,
        {
            "power_factor": known.of(lambda d, q: state(d, q).power_factor, m.psi_d, m.psi_q),
            "line_voltage": known.of(lambda d, q: state(d, q).line_voltage, m.psi_d, m.psi_q),
            "shaft_power": errors.torque * speed,
        },
    )


def stress_errors(report: RibReport, finer: RibReport, zone_errors: FloatArray) -> dict[str, float]:
    """Errors of the stress figures by their keys.

    Args:
        report: what the figures are made of.
        finer: the same from the mesh four times as fine.
        zone_errors: (n_rib + 1,) relative, from `solver.estimate_stress.peak_errors`.
    """
    stress, fine = stress_figures(report), stress_figures(finer)
    peak = float(zone_errors[int(np.argmax([rib.peak for rib in report.ribs]))])
    anywhere = float(zone_errors[-1]) if report.peak > stress.peak else peak
    changed = {
        name: BEYOND * abs(getattr(fine, name) - getattr(stress, name))
        for name in ("tension", "growth", "gap_left")
    }
    return by_key(
        stress,
        {
            "peak": peak * stress.peak,
            "lamination_peak": anywhere * stress.lamination_peak,
            "yield_margin": anywhere * stress.yield_margin,
            # Speed goes with the root of the margin.
            "yield_speed": 0.5 * anywhere * stress.yield_speed,
            **changed,
        },
    )


def by_key(group: "DataclassInstance", errors: Mapping[str, float]) -> dict[str, float]:
    """Errors in SI by field as errors in the figures' units by key.

    Raises:
        ArithmeticError: an error is not a finite number.
    """
    found = scaled_by_key(group, errors)
    for key, error in found.items():
        if not math.isfinite(error):
            raise ArithmeticError(f"{key}_error = {error}: not a finite number")
    return found
