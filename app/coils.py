"""A design's winding: which phase lies in which slot, and the factors of its harmonics.

Nothing of the rotor is needed but its number of poles, so windings can be compared before there
is a rotor that can be drawn.
"""

import csv
import io
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from rich.console import Console
from rich.table import Table

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import placed, read_design
from lamwright.geometry.errors import GeometryError
from lamwright.geometry.whole_file import write_text
from lamwright.geometry.winding import (
    WindingTable,
    end_winding_inductance,
    phase_resistance,
    winding_factor,
    winding_table,
)

PHASES = "ABC"
LEAST_ORDER = 19  # shown at the least: the belt harmonics up to the third pair
LEAST_FACTOR = 1e-9  # far above rounding, far below any winding's
MILLI = 1e3


@dataclass(frozen=True, slots=True)
class WindingReport:
    """A winding with what `winding` shows of it."""

    design_name: str
    span: int  # of a coil, slots
    table: WindingTable
    factors: tuple[tuple[int, float], ...]  # odd electrical orders
    below: tuple[tuple[int, float], ...]  # mechanical orders under the working one
    resistance: float  # Ohm
    end_inductance: float  # H


def winding(path: Path, out: Path | None = None) -> WindingReport:
    """The winding of the design in `path`, written to the CSV file `out` if one is given.

    Raises:
        DesignError: the design cannot be read or wound; one line for each fault.
    """
    design = read_design(path)
    try:
        report = _report(design)
    except GeometryError as error:
        raise placed(error.findings, path) from None
    if out is not None:
        write_text(out, csv_text(report.table))
    return report


def _report(design: MachineDesign) -> WindingReport:
    table = winding_table(design)
    pole_pairs = table.poles // 2
    last = max(LEAST_ORDER, 2 * round(table.slots / table.poles) + 1)
    below = [(n, winding_factor(table, n / pole_pairs)) for n in range(1, pole_pairs)]
    return WindingReport(
        design_name=design.name,
        span=design.winding.coil_span_slots,
        table=table,
        factors=tuple((n, winding_factor(table, n)) for n in range(1, last + 1, 2)),
        below=tuple((n, factor) for n, factor in below if factor > LEAST_FACTOR),
        resistance=phase_resistance(design),
        end_inductance=end_winding_inductance(design),
    )


def sides(table: WindingTable) -> list[tuple[int, int, str, float]]:
    """Slot (from 0), layer, phase and signed series conductors of every coil side."""
    rows = []
    for slot, layer in np.ndindex(table.slots, table.layers):
        phase = int(np.argmax(np.abs(table.conductors[slot, layer])))
        rows.append((slot, layer, PHASES[phase], float(table.conductors[slot, layer, phase])))
    return rows


def csv_text(table: WindingTable) -> str:
    """The winding as CSV: one row for each coil side."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(("slot", "layer", "phase", "sign", "series_conductors"))
    for slot, layer, phase, conductors in sides(table):
        writer.writerow((slot, layer, phase, "+" if conductors > 0.0 else "-", conductors))
    return text.getvalue()


def print_winding(report: WindingReport) -> None:
    """The winding slot by slot, then its factors."""
    table = report.table
    q = table.slots / (3 * table.poles)
    console = Console(highlight=False)
    console.print(
        f"{report.design_name}: {table.slots} slots, {table.poles} poles, "
        f"{q:.4g} slots per pole and phase",
        soft_wrap=True,
        markup=False,
    )
    console.print(_slots_table(report))
    console.print(_factor_table(report))
    if report.below:
        orders = ", ".join(f"{n}: {factor:.4f}" for n, factor in report.below)
        console.print(
            f"orders per turn under the working one ({table.poles // 2}): {orders}", soft_wrap=True
        )
    console.print(f"turns in series per phase  {table.turns_per_phase:g}")
    axis = np.degrees(table.axis_a)
    console.print(f"axis of phase A            {axis:.4g} mechanical degrees past a tooth's middle")
    console.print(f"resistance of a phase      {report.resistance:.4g} Ohm")
    console.print(f"end winding of a phase     ~ {report.end_inductance * MILLI:.4g} mH")


def _slots_table(report: WindingReport) -> Table:
    table = report.table
    shown = Table(title="coil sides, + towards the reader", title_justify="left")
    shown.add_column("slot", justify="right")
    places = ("bottom", "bore")
    if report.span == 1:  # side by side, counted counter-clockwise
        places = ("next to the tooth before", "next to the tooth after")
    for layer in range(table.layers):
        place = f", {places[layer]}" if table.layers == 2 else ""
        shown.add_column(f"layer {layer}{place}", justify="center")
    cells: dict[int, list[str]] = {}
    for slot, _, phase, conductors in sides(table):
        cells.setdefault(slot, []).append(("+" if conductors > 0.0 else "-") + phase)
    for slot, row in cells.items():
        shown.add_row(str(slot), *row)
    return shown


def _factor_table(report: WindingReport) -> Table:
    shown = Table(title="winding factors", title_justify="left")
    shown.add_column("order", justify="right")
    shown.add_column("factor", justify="right")
    for order, factor in report.factors:
        shown.add_row(str(order), f"{factor:.5f}")
    return shown
