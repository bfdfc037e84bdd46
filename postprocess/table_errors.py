"""Errors of the columns of tables, as they stand in JSON beside the figures.

`<column>_error` holds for every row: a bound. A column without one has a line that says why.
"""

from collections.abc import Mapping

from lamwright.solver.estimate import FieldErrors, NoLoadErrors

from .magnet_figures import MagnetFigures
from .quantities import COUNT
from .torque import TorqueSpectrum, TorqueWaveform

Columns = dict[str, float | str]  # `<column>_error` or, of one without, `<column>`: why
PLACE = "where the row is: exact"


def waveform_columns(waveform: TorqueWaveform, errors: FieldErrors) -> Columns:
    """Of `torque.csv`."""
    w = waveform
    # T = 3/2 p (psi_d i_q - psi_q i_d), derived: power balance
    linkage = 1.5 * w.pole_pairs * (errors.psi_d_at * abs(w.i_q) + errors.psi_q_at * abs(w.i_d))
    return {
        "angle_el_deg": PLACE,
        "angle_mech_deg": PLACE,
        "torque_nm_error": errors.torque_at,
        "torque_coenergy_nm": "slope of the coenergy: torque_nm stands beside it",
        "torque_linkage_nm_error": linkage,
        "psi_d_vs_error": errors.psi_d_at,
        "psi_q_vs_error": errors.psi_q_at,
        "coenergy_j": "not estimated: its slope is compared with torque_nm",
    }


def order_columns(orders: TorqueSpectrum, mean: float, errors: FieldErrors) -> Columns:
    """Of `torque_orders.csv`.

    Args:
        orders: of the waveform.
        mean: torque in N m.
        errors: of the waveform.
    """
    most = float(orders.amplitude.max(initial=0.0))
    percent = 100.0 * (errors.order + most * errors.torque / abs(mean)) / abs(mean)
    return {
        "order_el": PLACE,
        "amplitude_nm_error": errors.order,
        "percent_of_mean_error": percent,
    }


def map_columns() -> dict[str, Columns]:
    """Of `map.csv` and `map_means.csv`, by file."""
    at = {"i_d_a": PLACE, "i_q_a": PLACE}
    rated = "not estimated off rated current, where errors stand in map.json"
    means = (
        "psi_d_mean_vs",
        "psi_q_mean_vs",
        "torque_mean_nm",
        "coenergy_mean_j",
        "torque_swing_nm",
    )
    return {
        "map.csv": {
            **at,
            "angle_mech_deg": PLACE,
            "pole_pairs": COUNT,
            **{key: rated for key in ("psi_d_vs", "psi_q_vs", "torque_nm", "coenergy_j")},
        },
        "map_means.csv": {
            **at,
            **{key: rated for key in means},
            **{key: rated for key in ("ripple_1", "l_d_h", "l_q_h", "l_dd_h", "l_dq_h", "l_qq_h")},
        },
    }


def no_load_columns(
    figures: MagnetFigures, errors: Mapping[str, float], known: NoLoadErrors
) -> dict[str, Columns]:
    """Of `no_load.csv` and `no_load_orders.csv`, by file.

    Args:
        figures: of the magnets.
        errors: of the figures by key.
        known: of the waveform.
    """
    peak = errors["no_load_linkage_peak_vs"]
    share = 100.0 * (peak + errors["no_load_linkage_fundamental_vs"]) / figures.linkage
    return {
        "no_load.csv": {
            "angle_el_deg": PLACE,
            "psi_phase_vs_error": peak,
            "torque_nm_error": known.cogging,
        },
        "no_load_orders.csv": {
            "order_el": PLACE,
            "psi_phase_vs_error": peak,
            "percent_of_fundamental_error": share,
        },
    }
