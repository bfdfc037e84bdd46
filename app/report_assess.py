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
    word_rows,
    words,
)
from lamwright.postprocess.torque import TorqueSpectrum
from lamwright.postprocess.verdict import Verdict
from lamwright.solver.tolerance import tolerance_settings

from .lines import number
from .report_parts import (
    CAUTION,
    figure_grid,
    limits_grid,
    lines_section,
    picture_blocks,
    ribs_grid,
    times_grid,
)
from .report_repeat import repeat_section
from .report_ribs import RIB_COLUMNS, rib_sections

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
            "Verdict", (limits_grid(verdict.outcomes, verdict.errors, MESHES), *_remarks(machine))
        ),
        *_supplied(supplied, folder),
        Section("The machine", picture_blocks(folder, ["section"])),
        Section(
            "Field and torque",
            (
                figure_grid(figures_of(verdict.magnetic), verdict.errors),
                *picture_blocks(folder, ["flux", "torque"]),
                _orders(orders, verdict.magnetic.torque),
            ),
        ),
        Section(
            "At the terminals",
            (figure_grid(figures_of(verdict.terminal), verdict.errors, "~ estimate by formula"),),
        ),
        *_magnets(verdict, folder),
        Section(
            "Ribs and stress at overspeed",
            (
                figure_grid(figures_of(verdict.stress), verdict.errors),
                *picture_blocks(folder, ["stress"]),
                ribs_grid(rib_records, RIB_COLUMNS),
            ),
        ),
        *(rib_sections(ribs, folder, shown=["stress"]) if ribs is not None else ()),
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
        _method(verdict),
        lines_section("What was not computed", (*(() if ribs else RIBS_ELSEWHERE), *ELSEWHERE), ""),
        lines_section(
            "Cautions", (*(supplied.cautions if supplied else ()), *verdict.cautions), "none"
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


def _orders(orders: TorqueSpectrum, mean: float) -> Grid:
    rows = tuple(
        (
            numeral(str(int(order))),
            numeral(number(float(amplitude))),
            numeral(number(100.0 * float(amplitude) / mean)),
        )
        for order, amplitude in zip(orders.order, orders.amplitude, strict=True)
    )
    return Grid(("electrical order", "amplitude, N m", "of the mean, %"), rows)


def _magnets(verdict: Verdict, folder: Path) -> tuple[Section, ...]:
    if not verdict.magnets:
        return ()
    states = tuple(
        (
            words(state.name),
            numeral(number(1e6 * state.area)),
            numeral(number(100.0 * state.share_below)),
            numeral(number(state.flux_low)),
            numeral(number(state.flux_mean)),
        )
        for state in verdict.magnet_states
    )
    head = ("magnet", "area, mm2", "below the knee, %", "least B, T", "mean B, T")
    tables = [figure_grid(figures_of(group), verdict.errors) for group in verdict.magnets]
    drawn = picture_blocks(folder, ["no_load"])
    return (Section("Magnets", (*tables, *drawn, Grid(head, states))),)


def _method(verdict: Verdict) -> Section:
    _, _, promises = tolerance_settings(verdict.tolerance)
    return Section(
        "How it was computed",
        (
            Grid(("what", "how", "source"), word_rows(METHOD), "(m): cited from memory"),
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
