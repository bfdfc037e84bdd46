"""Ripple and force orders as CSV, with a unit in every column."""

import math
from collections.abc import Sequence

import numpy as np

from .cogging import Cogging
from .files import csv_text
from .force_orders import ForceOrder, ToothForces
from .skew_orders import SkewedTorque
from .torque import TorqueSpectrum
from .torque_causes import OrderCause, Slotting, pair_text, wave_text
from .torque_pairs import WavePair

DEGREE = math.pi / 180.0
ROUNDING = 1e-12  # below it a number is none


def ripple_csv(
    spectrum: TorqueSpectrum,
    mean: float,
    skews: Sequence[SkewedTorque],
    causes: Sequence[OrderCause],
    pairs: Sequence[Sequence[WavePair]],
    by: Slotting,
) -> str:
    """One row for each electrical order of the torque at rated current; order 0 is the mean.

    Args:
        spectrum: without skew.
        mean: torque in N m without skew.
        skews: the design's own first, a pair of columns each: amplitude, and what the skew factor
            alone would leave.
        causes: of each order.
        pairs: of each order, largest first.
        by: slots and places.
    """
    header = ["order_el", "amplitude_nm", "percent_of_mean", "phase_deg"]
    for k, skew in enumerate(skews):
        name = skew_name(skew) if k else "this_rotor"
        header += [f"{name}_nm", f"{name}_by_factor_nm"]
    header += [
        *("winding_order_below", "winding_factor_below", "rotor_order_below"),
        *("winding_order_above", "winding_factor_above", "rotor_order_above"),
        *("is_slot_order", "may_be_of_barrier_ends", "strongest_pair"),
    ]
    rows = [["0", *_numbers(mean, 100.0, 0.0)]]
    for skew in skews:
        rows[0] += [*_numbers(skew.mean), ""]
    rows[0] += [""] * (len(header) - len(rows[0]))
    for k, order in enumerate(spectrum.order):
        amplitude, cause = float(spectrum.amplitude[k]), causes[k]
        row = [str(order), *_numbers(amplitude, 100.0 * amplitude / abs(mean))]
        row += _numbers(float(spectrum.phase[k]) / DEGREE)
        for skew in skews:
            at = skew.order.index(order)
            row += _numbers(float(skew.amplitude[at]), float(skew.by_factor[at]))
        row += [str(-cause.below), *_numbers(cause.factor_below), str(cause.below)]
        row += [str(cause.above), *_numbers(cause.factor_above), str(cause.above)]
        row += [_yes(cause.is_slot), _yes(cause.is_ends)]
        row.append(pair_text(strongest(pairs[k]), by) if pairs[k] else "")
        rows.append(row)
    return csv_text(header, rows)


def strongest(pairs: Sequence[WavePair]) -> WavePair:
    """The pair of the greatest share of its order: most of it in phase with the whole."""
    return max(pairs, key=lambda pair: pair.share)


def pairs_csv(pairs: Sequence[Sequence[WavePair]], by: Slotting) -> str:
    """One row for each listed pair of waves, by order and size; shares of the order's torque.

    `forth` is the slower wave born in the stator with the faster born in the rotor, `back` the
    other way round; the shares of all pairs, unlisted ones included, sum to 100 %.
    """
    # fmt: off
    header = [
        "order_el", "space_order", "slow_time_order", "fast_time_order", "amplitude_nm",
        "share_percent", "forth_percent", "back_percent", "slow_wave", "fast_wave",
    ]
    # fmt: on
    rows = [
        [
            str(pair.order),
            *_numbers(pair.space, pair.slow, pair.fast, pair.amplitude),
            *_numbers(100.0 * pair.share, 100.0 * pair.forth, 100.0 * pair.back),
            wave_text(pair.space, pair.slow, by),
            wave_text(pair.space, pair.fast, by),
        ]
        for of_order in pairs
        for pair in of_order
    ]
    return csv_text(header, rows)


def forces_csv(orders: Sequence[ForceOrder], pole_pairs: int, speeds: Sequence[float]) -> str:
    """One row for each wave of stress on the bore, the mean first.

    Args:
        orders: largest first.
        pole_pairs: of the machine.
        speeds: rated and maximum, in rad/s.
    """
    # fmt: off
    header = [
        "space_order", "time_order_el", "turns", "radial_pa", "tangential_pa",
        "frequency_rated_hz", "frequency_maximum_hz",
    ]
    # fmt: on
    rows = []
    for order in orders:
        sense = "with the rotor" if order.time > 0.0 else "against it"
        if order.space == 0 or order.time == 0.0:
            sense = "stands"
        frequencies = [abs(order.time) * pole_pairs * w / (2.0 * math.pi) for w in speeds]
        numbers = _numbers(order.radial, order.tangential, *frequencies)
        rows.append([str(order.space), *_numbers(order.time), sense, *numbers])
    return csv_text(header, rows)


def tooth_csv(forces: ToothForces, tooth: int = 0) -> str:
    """One row for each position of a period: force on a tooth of the whole stack."""
    columns = [forces.angle_el / DEGREE, forces.pull[:, tooth], forces.tangential[:, tooth]]
    rows = [_numbers(*row) for row in np.column_stack(columns).tolist()]
    return csv_text(["angle_el_deg", "pull_to_shaft_n", "sideways_ccw_n"], rows)


def cogging_csv(record: Cogging) -> str:
    """One row for each position of the torque without current."""
    rows = np.column_stack([record.angle / DEGREE, record.torque]).tolist()
    return csv_text(["angle_mech_deg", "torque_nm"], [_numbers(*row) for row in rows])


def skew_name(skew: SkewedTorque) -> str:
    """A skew as part of a key: `skew_15_deg_el_3_steps`."""
    angle = f"{skew.angle_el / DEGREE:.4g}".replace(".", "p")
    return f"skew_{angle}_deg_el_" + (f"{skew.steps}_steps" if skew.steps else "continuous")


def _numbers(*values: float) -> list[str]:
    return [f"{value:.6g}" if abs(value) > ROUNDING else "0" for value in values]


def _yes(flag: bool) -> str:
    return "yes" if flag else "no"
