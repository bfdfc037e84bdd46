"""The report of `assess`."""

import shlex
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import Machine
from lamwright.postprocess.quantities import figures_of
from lamwright.postprocess.report import (
    Block,
    Grid,
    Paragraph,
    Report,
    Section,
    numeral,
)
from lamwright.postprocess.tables import harmonic_records, magnet_records
from lamwright.postprocess.torque import TorqueSpectrum
from lamwright.postprocess.verdict import Verdict
from lamwright.solver.tolerance import tolerance_settings

from .lines import error_number, number
from .report_parts import (
    CAUTION,
    figure_grid,
    limits_grid,
    lines_section,
    method_grid,
    picture_blocks,
    records_grid,
    times_grid,
)
from .report_repeat import repeat_section
from .report_ribs import METHOD as RIBS_METHOD
from .report_ribs import PRESSED, RIB_COLUMNS, margin_grid, rib_sections

if TYPE_CHECKING:
    from .rib_work import RibsReport

# What is done, and whose it is; (m) marks what is cited from memory.
METHOD = (
    (
        "magnetic field",
        "two-dimensional, static at each rotor position, vector potential on curved second-order "
        "triangles, one sector of like poles; steel by its card, reluctivity rising with B",
        "Strang & Fix 1973 (m)",
    ),
    (
        "nonlinearity",
        "damped Newton iteration on the field's energy, sparse Cholesky factors",
        "Chen, Davis, Hager & Rajamanickam 2008 (m)",
    ),
    ("torque", "Maxwell's stress averaged over the air gap", "Arkkio 1987 (m)"),
    (
        "torque, second way",
        "3/2 p (psi_d i_q - psi_q i_d), and the slope of the coenergy over the angle",
        "derived; Coulomb 1983 (m)",
    ),
    (
        "ripple",
        "greatest less least of the torque over 60 electrical degrees, by its mean, with "
        "sinusoidal currents; the waveform is continued by its harmonics between the positions",
        "common practice, no source",
    ),
    ("saliency ratio", "psi_d i_q / (psi_q i_d) at the angle of most torque", "definition"),
    (
        "voltage, power factor",
        "linkages, resistance of the copper and end-winding leakage by formula",
        "Pyrhonen, Jokinen & Hrabovcova 2014 (m)",
    ),
    (
        "stress",
        "plane stress of one sheet that spins, second-order triangles refined until the peaks "
        "settle, on the outline that is punched",
        "Timoshenko & Goodier 1970 (m); Becker & Rannacher 2001 (m)",
    ),
    (
        "error bars",
        "what a mesh four times as fine changes of each figure, continued to the limit",
        "derived",
    ),
)
MAGNET_COLUMNS = (
    ("magnet", "magnet"),
    ("area_mm2", "area, mm2"),
    ("below_knee_percent", "below the knee, %"),
    ("below_knee_percent_error", "+-, %"),
    ("flux_density_low_t", "least B, T"),
    ("flux_density_low_t_error", "+-, T"),
    ("flux_density_mean_t", "mean B, T"),
    ("flux_density_mean_t_error", "+-, T"),
)
MESHES = "+- is the error of the meshes, not that of the model, the steel or the making."
ELSEWHERE = (
    "flux map, current angles over load, envelope, efficiency and losses: the command map",
    "iron, friction and AC copper loss: in no figure here; the command map estimates them",
    "end effects in the iron, converter harmonics, heat flow, noise: in no command",
)
RIBS_ELSEWHERE = (
    "burst, plastic strain, life, fit, modes: the command ribs, or assess with --ribs",
)


@dataclass(frozen=True, slots=True)
class Supplied:
    """A supplier's or an inspection's outline that was analysed in place of the design's own."""

    file: str
    sha256: str
    ribs_out: int  # of their tolerance
    cautions: tuple[str, ...]
    strays: int = 0  # contours of a shape that was not analysed

    @property
    def faults(self) -> tuple[str, ...]:
        """What fails whatever the limits say."""
        return supplied_faults(self.strays, self.ribs_out)


def supplied_faults(strays: int, ribs_out: int) -> tuple[str, ...]:
    """What of a supplier's outline fails whatever the limits say."""
    return (
        *((f"NOT ANALYSED AS DRAWN ({strays} of its contours)",) if strays else ()),
        *((f"{ribs_out} ribs out of tolerance",) if ribs_out else ()),
    )


def assess_report(
    verdict: Verdict,
    orders: TorqueSpectrum,
    rib_records: Sequence[Mapping[str, object]],
    machine: Machine,
    folder: Path,
    ribs: "RibsReport | None" = None,
    supplied: Supplied | None = None,
) -> Report:
    """The report of one assessed design.

    Args:
        verdict: what is said of it.
        orders: of the torque.
        rib_records: a record for each rib, as in `ribs.json`.
        machine: the design with its cards.
        folder: with the pictures that have been drawn.
        ribs: what the command `ribs` says, where it was asked too.
        supplied: the outline that was analysed, where it is not the design's own.
    """
    missed = [o.figure.label for o in verdict.outcomes if not o.holds]
    if supplied is not None:
        missed = [*supplied.faults, *missed]
    passes = not missed and (ribs is None or ribs.passes)
    if missed or passes:
        outcome = f"FAILS: {'; '.join(missed)}" if missed else "PASSES: every limit holds"
    else:
        outcome = "FAILS: yield margin with fit, heat and magnets"
    sections = [
        Section(
            "Verdict",
            (
                limits_grid(verdict.outcomes, verdict.errors, MESHES),
                *((margin_grid(ribs),) if ribs is not None and PRESSED in ribs.figures else ()),
                *_remarks(machine),
            ),
        ),
        *_supplied(supplied, folder),
        Section("The machine", picture_blocks(folder, ["section"])),
        Section(
            "Field and torque",
            (
                figure_grid(figures_of(verdict.magnetic), verdict.errors),
                *picture_blocks(folder, ["flux", "torque"]),
                _orders(orders, verdict),
            ),
        ),
        Section(
            "At the terminals",
            (figure_grid(figures_of(verdict.terminal), verdict.errors, "~ estimate by formula"),),
        ),
        *_magnets(verdict),
        Section(
            "Ribs and stress at overspeed",
            (
                figure_grid(figures_of(verdict.stress), verdict.errors),
                *picture_blocks(folder, ["stress"]),
                records_grid(rib_records, RIB_COLUMNS, "ribs"),
            ),
        ),
        *(rib_sections(ribs, folder, beside=True) if ribs is not None else ()),
        Section(
            "Punch outline",
            (
                Paragraph(
                    f"{verdict.outline_dxf} is the outline analysed: it was written, read back "
                    "and compared."
                ),
                figure_grid(figures_of(verdict.outline), {}),
            ),
        ),
        _method(verdict, ribs is not None),
        lines_section(
            "What was not computed", (*(ribs.not_given if ribs else RIBS_ELSEWHERE), *ELSEWHERE), ""
        ),
        lines_section(
            "Cautions",
            tuple(
                dict.fromkeys(
                    (
                        *(supplied.cautions if supplied else ()),
                        *verdict.cautions,
                        *(ribs.cautions if ribs else ()),
                    )
                )
            ),
            "none",
        ),
        repeat_section(
            "assess",
            f"--out FOLDER --tolerance {verdict.tolerance}"
            + (" --ribs" if ribs else "")
            + (f" --outline {shlex.quote(supplied.file)}" if supplied else ""),
            machine,
            verdict.design_hash,
            {supplied.file: supplied.sha256} if supplied else {},
        ),
    ]
    return Report(
        title=f"Assessment of {verdict.design_name}"
        + (f", rotor as in {supplied.file}" if supplied else ""),
        subtitle=f"lamwright {verdict.version}, tolerance {verdict.tolerance}, design "
        f"{verdict.design_hash[:16]}",
        outcome=outcome,
        mark="good" if passes else "bad",
        sections=tuple(section for section in sections if section.blocks),
        closing=CAUTION,
    )


def _supplied(supplied: Supplied | None, folder: Path) -> tuple[Section, ...]:
    if supplied is None:
        return ()
    told = (
        f"Rotor contours of {supplied.file} (SHA-256 {supplied.sha256}), laid on the design and "
        f"measured, are analysed here in place of the design's own; {supplied.ribs_out} ribs are "
        "out of their tolerance. Every rib stands in outline_ribs.csv, what was promised beside "
        "what was found in promise.csv."
    )
    pictures = picture_blocks(folder, ["deviation"])
    return (Section("The outline as supplied", (Paragraph(told), *pictures)),)


def _remarks(machine: Machine) -> tuple[Block, ...]:
    note = machine.design.note
    return (Paragraph(f"Note of the design file: {note}"),) if note else ()


def _orders(orders: TorqueSpectrum, verdict: Verdict) -> Grid:
    records = harmonic_records(orders)
    heads = (("order_el", "electrical order"), ("amplitude_nm", "amplitude, N m"))
    grid = records_grid(records, heads, "torque_harmonics")
    shares = (100.0 * record["amplitude_nm"] / verdict.magnetic.torque for record in records)
    bar = verdict.table_errors.get("torque_orders.csv", {}).get("amplitude_nm_error")
    return Grid(
        (*grid.columns, "of the mean, %"),
        tuple((*row, numeral(number(share))) for row, share in zip(grid.rows, shares, strict=True)),
        f"+- {error_number(bar)} N m at most." if isinstance(bar, float) else "",
    )


def _magnets(verdict: Verdict) -> tuple[Section, ...]:
    if not verdict.magnets:
        return ()
    tables = [figure_grid(figures_of(group), verdict.errors) for group in verdict.magnets]
    states = records_grid(
        magnet_records(verdict), MAGNET_COLUMNS, "magnets", "At the demagnetising current."
    )
    return (Section("Magnets", (*tables, states)),)


def _method(verdict: Verdict, with_ribs: bool) -> Section:
    _, _, promises = tolerance_settings(verdict.tolerance)
    return Section(
        "How it was computed",
        (
            method_grid((*METHOD, *(RIBS_METHOD if with_ribs else ()))),
            Paragraph(
                f"Tolerance {verdict.tolerance} promises errors of the mesh of at most "
                f"{promises.torque:g} % of the mean torque, {promises.linkage:g} % of a linkage "
                f"and {promises.rib_stress:g} % of the greatest rib stress. Steel and magnet data "
                "are those of the cards below, with the source that each card states."
            ),
            figure_grid(figures_of(verdict.solver), {}, "Mesh and convergence."),
            times_grid({time.phase: time.seconds for time in verdict.times}),
        ),
    )
