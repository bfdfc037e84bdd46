"""What each length and angle of the design is worth: change of each figure per +0.1 mm or +1 deg.

Torque is the mean by the linkages, T = 3/2 p (psi_d i_q - psi_q i_d), over positions that cover
60 electrical degrees; in the mean it equals that of the Maxwell stress (`torque`). It is stated
at the rated current and at the angle of most torque, where the angle's own change counts for
nothing (dT/d gamma = 0). Saliency psi_d i_q / (psi_q i_d) is stated at that same angle
and changes with it; here the angle stays. The rib stress is the largest of all ribs, smoothed
(`solver.adjoint_stress`) and scaled by the bias of the smoothing.
Slopes are those of straight lines: 0.1 mm of a thin rib is far. With magnets psi_q less its
no-load value stands in the saliency, as in the verdict, and the rib stress is that of the spin
alone, without their load.
"""

from collections.abc import Mapping
from dataclasses import dataclass, field, fields

from .files import csv_text
from .operating import mean_linkage_torque, saliency_ratio
from .quantities import Shown, shown_as

LENGTH_STEP, ANGLE_STEP = 0.1, 1.0  # mm and degrees


@dataclass(frozen=True, slots=True, kw_only=True)
class ShapeFigures:
    """The figures that follow a shape: their values, or their changes."""

    torque: float = field(metadata=shown_as("torque_nm", "torque, mean", "N m"))
    saliency: float = field(metadata=shown_as("saliency_ratio", "saliency ratio", ""))
    rib_peak: float = field(
        metadata=shown_as("rib_stress_peak_mpa", "greatest rib stress", "MPa", 1e-6)
    )
    psi_d: float = field(metadata=shown_as("psi_d_vs", "d-axis flux linkage", "V s"))
    psi_q: float = field(metadata=shown_as("psi_q_vs", "q-axis flux linkage", "V s"))

    def shown(self) -> dict[str, float]:
        """Numbers in the units of their keys."""
        return {how.key: getattr(self, name) * how.scale for name, how in SHAPE_FIGURES.items()}


SHAPE_FIGURES: dict[str, Shown] = {
    item.name: item.metadata["shown"] for item in fields(ShapeFigures)
}


@dataclass(frozen=True, slots=True)
class KeySlope:
    """One key and what a step of it changes."""

    key: str  # as in the design file, barriers from 1
    value: float  # mm or degrees
    step: float  # of the key, in its own unit
    unit: str
    change: ShapeFigures

    def percent(self, figure: str, of: ShapeFigures) -> float:
        """Change of a figure in percent of its value."""
        return 100.0 * float(getattr(self.change, figure)) / abs(float(getattr(of, figure)))


@dataclass(frozen=True, slots=True)
class SlopeTable:
    """All keys of a design, by their share in the torque, and the figures as they stand."""

    design_name: str
    i_d: float  # A
    i_q: float  # A
    figures: ShapeFigures
    smoothing_bias: float  # of the ribs' smoothed peak, relative, before it is scaled out
    rows: tuple[KeySlope, ...]
    left_out: tuple[str, ...]  # keys beside whose value the outline is another one, with reasons


def step_of(key: str) -> tuple[float, str]:
    """The step of a key that changes are stated for, and its unit."""
    return (ANGLE_STEP, "deg") if key.endswith("_deg") else (LENGTH_STEP, "mm")


def shape_figures(
    pole_pairs: int,
    i_d: float,
    i_q: float,
    *,
    psi_d: float,
    psi_q: float,
    rib_peak: float,
    bare_psi_q: float = 0.0,
) -> ShapeFigures:
    """The figures from mean linkages in V s, at no load too, and the ribs' peak in Pa."""
    return ShapeFigures(
        torque=mean_linkage_torque(pole_pairs, i_d, i_q, [psi_d], [psi_q]),
        saliency=saliency_ratio(i_d, i_q, psi_d, psi_q - bare_psi_q),
        rib_peak=rib_peak,
        psi_d=psi_d,
        psi_q=psi_q,
    )


def key_slope(
    key: str,
    value: float,
    pole_pairs: int,
    currents: tuple[float, float],
    at: ShapeFigures,
    by_key: Mapping[str, float],
    bare_psi_q: float = 0.0,
) -> KeySlope:
    """A row from the slopes of linkages and rib peak.

    Args:
        key: of the design file.
        value: in mm or degrees.
        pole_pairs: of the machine.
        currents: i_d and i_q in A, held.
        at: the figures as they stand.
        by_key: slopes of `psi_d`, `psi_q`, `rib_peak` in SI per mm or degree, and of `bare_psi_q`
            where there are magnets.
        bare_psi_q: at no load in V s.
    """
    step, unit = step_of(key)
    psi_d, psi_q, rib_peak = (step * by_key[name] for name in ("psi_d", "psi_q", "rib_peak"))
    bare = step * by_key.get("bare_psi_q", 0.0)
    change = ShapeFigures(
        torque=mean_linkage_torque(pole_pairs, *currents, [psi_d], [psi_q]),  # linear in both
        # d(psi_d / psi_q) = psi_d / psi_q (d psi_d / psi_d - d psi_q / psi_q)
        saliency=at.saliency * (psi_d / at.psi_d - (psi_q - bare) / (at.psi_q - bare_psi_q)),
        rib_peak=rib_peak,
        psi_d=psi_d,
        psi_q=psi_q,
    )
    return KeySlope(key, value, step, unit, change)


def ranked(rows: list[KeySlope]) -> tuple[KeySlope, ...]:
    """The rows, those that change the torque most first; equal ones in the file's order."""
    return tuple(sorted(rows, key=lambda row: -abs(row.change.torque)))


def slopes_record(table: SlopeTable) -> dict[str, object]:
    """The table as it stands in JSON."""
    return {
        "design": table.design_name,
        "i_d_a": table.i_d,
        "i_q_a": table.i_q,
        **table.figures.shown(),
        "rib_stress_smoothing_bias_percent": 100.0 * table.smoothing_bias,
        "keys": [
            {
                "key": row.key,
                f"value_{row.unit}": row.value,
                f"step_{row.unit}": row.step,
                **{f"change_{key}": change for key, change in row.change.shown().items()},
                **{f"change_{key}": percent for key, percent in _percents(row, table).items()},
            }
            for row in table.rows
        ],
        "left_out": list(table.left_out),
    }


def slopes_csv(table: SlopeTable) -> str:
    """One row for each key, in the table's order; changes per `step`, in the key's unit."""
    names = [how.key for how in SHAPE_FIGURES.values()]
    percents = [_percent_key(how) for how in SHAPE_FIGURES.values()]
    header = ["key", "value", "step", "unit", *(f"change_{name}" for name in (*names, *percents))]
    rows = []
    for row in table.rows:
        numbers = (row.value, row.step)
        changes = (*row.change.shown().values(), *_percents(row, table).values())
        left, right = ([f"{number:.7g}" for number in part] for part in (numbers, changes))
        rows.append([row.key, *left, row.unit, *right])
    return csv_text(header, rows)


def _percents(row: KeySlope, table: SlopeTable) -> dict[str, float]:
    return {
        _percent_key(how): row.percent(name, table.figures) for name, how in SHAPE_FIGURES.items()
    }


def _percent_key(how: Shown) -> str:
    """The key of a change in percent: `torque_nm` gives `torque_percent`."""
    return f"{how.key.rpartition('_')[0]}_percent"
