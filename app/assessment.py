"""The assessment of one design: the rooms in order, shared by a crew.

Two lines of work run side by side. A worker solves the stress, writes the outline and draws what
needs no field while this process meshes, builds the model and searches the current angle. Then all
take chains of rotor positions until the waveform is whole; the last figure is drawn while this
process writes the tables. Chains are fixed and each starts from the search, so the results do not
depend on who did what.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.whole_file import write_text
from lamwright.geometry.winding import WindingTable, winding_table
from lamwright.postprocess.cautions import cautions
from lamwright.postprocess.detail_cautions import detail_cautions
from lamwright.postprocess.error_bars import magnetic_errors, stress_errors, terminal_errors
from lamwright.postprocess.files import VERDICT_FILE, json_text
from lamwright.postprocess.quantities import OutlineFigures
from lamwright.postprocess.rib_tables import (
    elastic_errors,
    elastic_figures,
    rib_columns,
    rib_rows,
    ribs_csv,
)
from lamwright.postprocess.skew import mean_change, mean_solution, skew_cautions, step_point
from lamwright.postprocess.summary import (
    magnetic_figures,
    solver_figures,
    stress_figures,
    terminal_figures,
)
from lamwright.postprocess.table_errors import order_columns, waveform_columns
from lamwright.postprocess.tables import spectrum_csv, verdict_record, waveform_csv
from lamwright.postprocess.torque import (
    TorqueWaveform,
    spectrum,
    torque_waveform,
    waveform_positions,
)
from lamwright.postprocess.verdict import RPM, Verdict, judged
from lamwright.solver.chains import OperatingPoint, fanned
from lamwright.solver.estimate import FieldErrors, errors_of, sample_places
from lamwright.solver.estimate_step import Change
from lamwright.solver.field import MagneticModel
from lamwright.solver.mesh import mesh_section
from lamwright.solver.tolerance import ToleranceName, tolerance_settings
from lamwright.solver.types import FieldSolution

from .album import Album
from .angle import AngleFound, most_torque
from .desk import Desk, StressWork
from .lamination import DXF_FILE
from .outline_work import outlined
from .point import model_of
from .pool import Crew, Worker
from .progress import Stopwatch
from .version import version

if TYPE_CHECKING:
    from .magnet_work import MagnetWork
    from .report_assess import Supplied
    from .rib_work import RibsReport

WAVEFORM_FILE, ORDERS_FILE, RIBS_FILE = "torque.csv", "torque_orders.csv", "ribs.csv"


@dataclass(frozen=True, slots=True, eq=False)
class Assessment:
    """One design and who works on it."""

    machine: Machine
    section: CrossSection
    crew: Crew[Desk]
    outliner: Worker[object] | None  # who writes the outline, if not the crew
    watch: Stopwatch
    tolerance: ToleranceName
    pictures: bool
    on_ribs: "Callable[[RibsReport], None] | None" = None  # who wants all about the ribs too
    supplied: "Supplied | None" = None  # whose outline the section is, if not the design's own
    on_verdict: Callable[[Path], None] | None = None  # who wants it before the pictures are drawn

    def written_to(self, stage: Path) -> Verdict:
        """The verdict; all results as files in `stage`, `verdict.json` last but for late pictures.

        `on_verdict` gets the folder once all but pictures and report stand there.
        """
        is_late = self.on_verdict is not None
        album = Album(self.crew, stage, is_wanted=self.pictures, is_late=is_late)
        watch, duty = self.watch, self.machine.design.duty
        overspeed = duty.overspeed_factor * duty.maximum_speed_rpm / RPM
        name, section, crew = self.machine.design.name, self.section, self.crew
        mesh_settings, stress_settings, _ = tolerance_settings(self.tolerance)
        stress_to_come = crew.start(
            Desk.stress, section, self.machine.rotor_steel, overspeed, stress_settings
        )
        start = crew.start if self.outliner is None else self.outliner.submit
        outline_to_come = start(outlined, section, stage / DXF_FILE)
        with watch.phase("mesh"):
            sector = mesh_section(section, mesh_settings)
        with watch.phase("magnetic model"):
            model = model_of(self.machine, section, sector)
            crew.everywhere(Desk.take_model, model)
            album.add("section", name, section)
        with watch.phase("current angle"):
            found = most_torque(model, self.machine.design, watch.within)
        with watch.phase("torque waveform"):
            by_step = self._waveform_fields(found)
            fields = self._means(found, by_step)
            waveform = torque_waveform(fields, section.pole_pairs)
            winding = winding_table(self.machine.design)
            middle = len(by_step) // 2
            shown = name if len(by_step) == 1 else f"{name}, step {middle + 1} of {len(by_step)}"
            album.add("flux", shown, section, winding, sector, by_step[middle][0])
            album.add("torque", name, section, waveform)
        with watch.phase("stress"):
            stress = stress_to_come.result()
            album.add("stress", name, section, stress.solution, stress.report)
        watch.meanwhile("stress", stress.seconds)
        with watch.phase("error bars"):
            field_errors = self._field_errors(fields, by_step)
            outline = outline_to_come.result()  # only now: there was work to share before
        watch.meanwhile("outline", outline.seconds)
        magnets = self._magnets(model)
        waves = (field for step in by_step for field in step)
        solved = (*found.fields, *waves, *(f for work in magnets for f in work.fields))
        return self._written(
            stage, model, outline.figures, waveform, field_errors, solved, stress, magnets, album
        )

    def _magnets(self, model: MagneticModel) -> "tuple[MagnetWork, ...]":
        """What a machine with magnets needs besides; nothing for one without."""
        if self.machine.magnet is None:
            return ()
        from .magnet_work import magnet_work

        with self.watch.phase("magnets"):
            return (magnet_work(self.machine, self.section, model, self.crew),)

    def _waveform_fields(self, found: AngleFound) -> list[list[FieldSolution]]:
        """Fields of each step at all positions of the waveform, from chains shared by the crew."""
        steps = [
            (points, last, fanned([p.position for p in points], [field.position for field in last]))
            for points, last in zip(self._step_points(found), found.last, strict=True)
        ]
        tasks = [
            partial(_chain, [points[k] for k in chain], last[start])
            for points, last, chains in steps
            for start, chain in chains
        ]
        done = iter(self.crew.share(tasks, lambda count: self.watch.within(count / len(tasks))))
        solved = []
        for points, _, chains in steps:
            at = {k: f for _, chain in chains for k, f in zip(chain, next(done), strict=True)}
            solved.append([at[k] for k in range(len(points))])
        return solved

    def _rotor_points(self, found: AngleFound) -> list[OperatingPoint]:
        positions = waveform_positions(self.section.pole_pairs).tolist()
        return [OperatingPoint(found.i_d, found.i_q, position) for position in positions]

    def _step_points(self, found: AngleFound) -> list[list[OperatingPoint]]:
        """Where each step of the rotor stands while the rotor goes through the waveform."""
        pole_pairs, points = self.section.pole_pairs, self._rotor_points(found)
        return [
            [step_point(point, offset, pole_pairs) for point in points]
            for offset in skew_offsets(self.machine.design)
        ]

    def _means(
        self, found: AngleFound, by_step: Sequence[Sequence[FieldSolution]]
    ) -> list[FieldSolution]:
        """The whole machine at all positions of the waveform."""
        offsets, pole_pairs = skew_offsets(self.machine.design), self.section.pole_pairs
        together = zip(zip(*by_step, strict=True), self._rotor_points(found), strict=True)
        return [mean_solution(steps, offsets, point, pole_pairs) for steps, point in together]

    def _field_errors(
        self, fields: Sequence[FieldSolution], by_step: Sequence[Sequence[FieldSolution]]
    ) -> FieldErrors:
        """Error bars of the waveform from a few of its fields, shared by the crew."""
        winding, places = winding_table(self.machine.design), sample_places(fields)
        offsets, pole_pairs = skew_offsets(self.machine.design), self.section.pole_pairs
        samples = [step[k] for k in places for step in by_step]
        tasks = [partial(_change, self.section, winding, sample) for sample in samples]
        done = self.crew.share(tasks, lambda count: self.watch.within(count / len(tasks)))
        count = len(by_step)
        changed = {
            place: mean_change(done[at * count : (at + 1) * count], offsets, pole_pairs)
            for at, place in enumerate(places)
        }
        return errors_of(fields, changed, pole_pairs)

    def _written(
        self,
        stage: Path,
        model: MagneticModel,
        outline: OutlineFigures,
        waveform: TorqueWaveform,
        field_errors: FieldErrors,
        fields: Sequence[FieldSolution],
        stress: StressWork,
        magnets: "Sequence[MagnetWork]",
        album: Album,
    ) -> Verdict:
        """Write everything; the verdict last, with the time that the rest has taken."""
        machine, watch = self.machine, self.watch
        with watch.phase("files"):
            write_text(stage / WAVEFORM_FILE, waveform_csv(waveform))
            orders = spectrum(waveform)
            write_text(stage / ORDERS_FILE, spectrum_csv(orders, waveform.mean))
            elastic = elastic_figures(self.section, stress.report)
            of_ribs = elastic_errors(self.section, stress.report, stress.finer, stress.zone_errors)
            rows = rib_rows(self.section, stress.report, elastic, errors=of_ribs)
            write_text(stage / RIBS_FILE, ribs_csv(rows))
            for work in magnets:
                work.write(stage)
        if self.on_verdict is None:
            self._close(album)
        ribs = None
        if self.on_ribs is not None:
            ribs = self._ribs(stage, stress)
            self.on_ribs(ribs)
        cards = (machine.rotor_steel, machine.stator_steel)
        bare_psi_q = sum(work.record.psi_q for work in magnets)
        magnetic, rotor = magnetic_figures(waveform, bare_psi_q), stress_figures(stress.report)
        terminal = terminal_figures(machine.design, magnetic)
        bars = {
            **magnetic_errors(magnetic, field_errors, bare_psi_q),
            **terminal_errors(machine.design, magnetic, terminal, field_errors),
            **stress_errors(stress.report, stress.finer, stress.zone_errors),
        }
        tables = {
            WAVEFORM_FILE: waveform_columns(waveform, field_errors),
            ORDERS_FILE: order_columns(orders, waveform.mean, field_errors),
            RIBS_FILE: rib_columns(rows),
        }
        of_magnets = tuple(
            work.figures(machine, self.section, waveform.i_d, waveform.i_q) for work in magnets
        )
        for work, own in zip(magnets, of_magnets, strict=True):
            bars |= work.error_bars(machine, own, waveform.i_d, waveform.i_q)
            tables |= work.columns(own, bars)
        unknowns = model.numbering.n_dof
        verdict = Verdict(
            design_name=machine.design.name,
            design_hash=design_hash(machine.design, machine.cards),
            version=version(),
            outline_dxf=DXF_FILE,
            tolerance=self.tolerance,
            magnetic=magnetic,
            terminal=terminal,
            stress=rotor,
            outline=outline,
            solver=solver_figures(
                model.sector, unknowns, fields, len(waveform.torque), stress.solution
            ),
            outcomes=judged(machine.design.limits, magnetic, rotor),
            cautions=(
                *(line for work in magnets for line in work.cautions(machine)),
                *skew_cautions(machine.design.rotor.skew_steps),
                *detail_cautions(self.section, machine.rotor_steel, stress.solution.speed),
                *cautions(magnetic, terminal, rotor, cards, bars),
            ),
            times=watch.times,
            errors=bars,
            magnets=of_magnets,
            magnet_states=tuple(state for work in magnets for state in work.states),
            finer_states=tuple(state for work in magnets for state in work.finer_states),
            table_errors=tables,
        )
        write_text(stage / VERDICT_FILE, json_text(verdict_record(verdict, orders)))
        if self.on_verdict is not None:
            self.on_verdict(stage)
            self._close(album)
        if self.pictures:
            from .report_assess import assess_report
            from .report_files import write_report

            records = [row.record for row in rows]
            report = assess_report(verdict, orders, records, machine, stage, ribs, self.supplied)
            write_report(report, stage)
        return verdict

    def _close(self, album: Album) -> None:
        with self.watch.phase("pictures"):
            album.close(self.watch.within)

    def _ribs(self, stage: Path, stress: StressWork) -> "RibsReport":
        """What `ribs` says, from the stress that is known already."""
        from .rib_chapters import CHAPTERS
        from .rib_work import write_results
        from .ribbed import Ribbed, RibWishes

        _, settings, _ = tolerance_settings(self.tolerance)
        wishes = RibWishes()
        ribbed = Ribbed(
            self.machine,
            self.section,
            stress,
            settings,
            self.watch,
            wishes,
            self.pictures,
            has_stress_picture=self.pictures,
        )
        return write_results(ribbed, stage, self.tolerance, CHAPTERS)


def _chain(
    points: Sequence[OperatingPoint], start: FieldSolution, desk: Desk
) -> tuple[FieldSolution, ...]:
    return desk.chain(points, start)


def _change(
    section: CrossSection, winding: WindingTable, solution: FieldSolution, desk: Desk
) -> Change:
    return desk.change(section, winding, solution)
