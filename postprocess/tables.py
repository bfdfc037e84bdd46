"""Results as records for JSON and as CSV, with a unit in every key: the only place for it."""

import numpy as np

from lamwright.solver.types import FieldSolution

from .figure_errors import SUFFIX, error_values, without_error
from .files import csv_text
from .magnet_errors import state_errors
from .no_load import LinkageSpectrum, NoLoad
from .operating import mean_linkage_torque
from .torque import TorqueSpectrum, TorqueWaveform, coenergy_torque, linkage_torque
from .verdict import Outcome, Verdict, all_figures

DEGREE = np.pi / 180.0
MM = 1e3  # mm per m


def verdict_record(verdict: Verdict, spectrum: TorqueSpectrum) -> dict[str, object]:
    """The verdict as it stands in JSON: figures flat, then outcomes, harmonics and the run."""
    figures = all_figures(verdict)
    return {
        "design": verdict.design_name,
        "passes": verdict.passes,
        **error_values(figures.values(), verdict.errors),
        "limits": {outcome.key: outcome.limit for outcome in verdict.outcomes},
        "outcomes": {outcome.key: _outcome_record(outcome) for outcome in verdict.outcomes},
        "torque_harmonics": harmonic_records(spectrum),
        **({"magnets": magnets} if (magnets := magnet_records(verdict)) else {}),
        "table_errors": {name: dict(columns) for name, columns in verdict.table_errors.items()},
        "errors_not_given": without_error(figures.values(), verdict.errors),
        "estimates": [key for key, figure in figures.items() if figure.is_estimate],
        "cautions": list(verdict.cautions),
        "outline_dxf": verdict.outline_dxf,
        "tolerance": verdict.tolerance,
        "version": verdict.version,
        "design_hash": verdict.design_hash,
        "seconds": {time.phase: round(time.seconds, 3) for time in verdict.times},
    }


def _outcome_record(outcome: Outcome) -> dict[str, object]:
    return {
        "figure": outcome.figure.key,
        "value": outcome.figure.value,
        "limit": outcome.limit,
        "holds": outcome.holds,
    }


def harmonic_records(spectrum: TorqueSpectrum) -> list[dict[str, float]]:
    """The orders of the torque as they stand in JSON."""
    return [
        {
            "order_el": int(order),
            "amplitude_nm": float(amplitude),
            "phase_deg": float(phase / DEGREE),
        }
        for order, amplitude, phase in zip(
            spectrum.order, spectrum.amplitude, spectrum.phase, strict=True
        )
    ]


def magnet_records(verdict: Verdict) -> list[dict[str, str | float]]:
    """What each magnet has at the demagnetising current, as it stands in JSON."""
    return [
        {
            "magnet": state.name,
            "area_mm2": state.area * MM**2,
            "below_knee_percent": 100.0 * state.share_below,
            "flux_density_low_t": state.flux_low,
            "flux_density_mean_t": state.flux_mean,
            **{key + SUFFIX: error for key, error in state_errors(state, finer).items()},
        }
        for state, finer in zip(verdict.magnet_states, verdict.finer_states, strict=True)
    ]


def no_load_csv(record: NoLoad) -> str:
    """Linkage of a phase over one electrical period, and torque where it was computed, no load."""
    torques = [f"{value:.9g}" for value in record.cogging]
    torques += [""] * (record.psi.size - len(torques))
    rows = [
        [f"{angle / DEGREE:.9g}", f"{psi:.9g}", torque]
        for angle, psi, torque in zip(record.angle_el, record.psi, torques, strict=True)
    ]
    return csv_text(["angle_el_deg", "psi_phase_vs", "torque_nm"], rows)


def linkage_orders_csv(spectrum: LinkageSpectrum) -> str:
    """One row for each electrical order of a phase's linkage at no load."""
    first = spectrum.amplitude[0]
    rows = [
        [str(order), f"{amplitude:.6g}", f"{100.0 * amplitude / first:.6g}"]
        for order, amplitude in zip(spectrum.order, spectrum.amplitude, strict=True)
    ]
    return csv_text(["order_el", "psi_phase_vs", "percent_of_fundamental"], rows)


def point_record(solution: FieldSolution, pole_pairs: int) -> dict[str, object]:
    """One field solution as it stands in JSON."""
    s = solution
    psi_a, psi_b, psi_c = (float(psi) for psi in s.psi_abc)
    return {
        "i_d_a": s.i_d,
        "i_q_a": s.i_q,
        "angle_mech_deg": s.position / DEGREE,
        "psi_d_vs": s.psi_d,
        "psi_q_vs": s.psi_q,
        "psi_a_vs": psi_a,
        "psi_b_vs": psi_b,
        "psi_c_vs": psi_c,
        "torque_maxwell_nm": s.torque,
        "torque_linkage_nm": mean_linkage_torque(pole_pairs, s.i_d, s.i_q, [s.psi_d], [s.psi_q]),
        "energy_j": s.energy,
        "coenergy_j": s.coenergy,
        "newton_steps": s.newton.steps,
        "newton_residual_relative": s.newton.history[-1],
    }


def waveform_csv(waveform: TorqueWaveform) -> str:
    """One row for each rotor position over 60 electrical degrees."""
    columns = {
        "angle_el_deg": waveform.angle_el / DEGREE,
        "angle_mech_deg": waveform.angle_el / DEGREE / waveform.pole_pairs,
        "torque_nm": waveform.torque,
        "torque_coenergy_nm": coenergy_torque(waveform),
        "torque_linkage_nm": linkage_torque(waveform),
        "psi_d_vs": waveform.psi_d,
        "psi_q_vs": waveform.psi_q,
        "coenergy_j": waveform.coenergy,
    }
    rows = np.column_stack(list(columns.values()))
    return csv_text(list(columns), [[f"{value:.9g}" for value in row] for row in rows])


def spectrum_csv(spectrum: TorqueSpectrum, mean_torque: float) -> str:
    """One row for each electrical order; percent of the mean torque (N m)."""
    rows = [
        [str(order), f"{amplitude:.6g}", f"{100.0 * amplitude / mean_torque:.6g}"]
        for order, amplitude in zip(spectrum.order, spectrum.amplitude, strict=True)
    ]
    return csv_text(["order_el", "amplitude_nm", "percent_of_mean"], rows)
