"""The assessment of one design: the rooms in order, shared by a crew.

Two lines of work run side by side. A worker solves the stress while this process meshes, builds
the model and searches the current angle. Then all take chains of rotor positions until the
waveform is whole, and figures. Chains are fixed and each starts from the search, so the results do
not depend on who did what.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.section import CrossSection
from lamwright.geometry.winding import WindingTable, winding_table
from lamwright.postprocess.cautions import cautions
from lamwright.postprocess.error_bars import magnetic_errors, stress_errors, terminal_errors
from lamwright.postprocess.figures import FIGURES, Pictured
from lamwright.postprocess.files import VERDICT_FILE, json_text, write_text
from lamwright.postprocess.operating import (
    best_angle,
    dq_currents,
    mean_linkage_torque,
    search_positions,
)
from lamwright.postprocess.summary import (
    magnetic_figures,
    solver_figures,
    stress_figures,
    terminal_figures,
)
from lamwright.postprocess.tables import ribs_csv, spectrum_csv, verdict_record, waveform_csv
from lamwright.postprocess.torque import (
    TorqueWaveform,
    spectrum,
    torque_waveform,
    waveform_positions,
)
from lamwright.postprocess.verdict import RPM, Verdict, judged
from lamwright.solver.chains import OperatingPoint
from lamwright.solver.estimate import FieldErrors, errors_of, sample_places
from lamwright.solver.estimate_step import Change
from lamwright.solver.field import MagneticModel
from lamwright.solver.mesh import mesh_section
from lamwright.solver.types import FieldSolution

from .desk import Desk, StressWork
from .lamination import DXF_FILE, write_outline
from .point import model_of
from .pool import Crew
from .progress import Stopwatch
from .version import version

CHAIN_LENGTH = 5  # positions; short enough to share, long enough to profit from its neighbours
WAVEFORM_FILE, ORDERS_FILE, RIBS_FILE = "torque.csv", "torque_orders.csv", "ribs.csv"


@dataclass(frozen=True, slots=True, eq=False)
class _Searched:
    """The currents of most torque, and the fields solved on the way to them."""

    i_d: float
    i_q: float
    last: tuple[FieldSolution, ...]  # at the last angle tried, one for each search position
    fields: tuple[FieldSolution, ...]


@dataclass(frozen=True, slots=True, eq=False)
class Assessment:
    """One design and who works on it."""

    machine: Machine
    section: CrossSection
    crew: Crew[Desk]
    watch: Stopwatch

    def written_to(self, stage: Path) -> Verdict:
        """The verdict; all results as files in `stage`, `verdict.json` last."""
        watch, duty = self.watch, self.machine.design.duty
        overspeed = duty.overspeed_factor * duty.maximum_speed_rpm / RPM
        stress_to_come = self.crew.start(
            Desk.stress, self.section, self.machine.rotor_steel, overspeed
        )
        with watch.phase("mesh"):
            sector = mesh_section(self.section)
        with watch.phase("magnetic model"):
            model = model_of(self.machine, self.section, sector)
            self.crew.everywhere(Desk.take_model, model)
        with watch.phase("current angle"):
            searched = self._searched()
        with watch.phase("torque waveform"):
            waveform_fields = self._waveform_fields(searched)
        with watch.phase("error bars"):
            field_errors = self._field_errors(waveform_fields)
        with watch.phase("stress"):
            stress = stress_to_come.result()
        watch.meanwhile("stress", stress.seconds)
        with watch.phase("pictures"):
            self._draw(stage, model, waveform_fields, stress)
        fields = (*searched.fields, *waveform_fields)
        waveform = torque_waveform(waveform_fields, self.section.pole_pairs)
        return self._written(stage, model, waveform, field_errors, fields, stress)

    def _searched(self) -> _Searched:
        """Search the current angle with the linkages' mean over a few positions."""
        design = self.machine.design
        pole_pairs, current = design.pole_pairs, design.duty.rated_current_a
        slots_per_pole_and_phase = design.stator.slots // (3 * design.rotor.poles)
        positions = search_positions(pole_pairs, slots_per_pole_and_phase)
        fields: list[FieldSolution] = []

        def torque_of(gamma: float) -> float:
            i_d, i_q = dq_currents(current, gamma)
            before = fields[-len(positions) :]
            for k, position in enumerate(positions):
                # Started at the same position with the currents before; at first beside it.
                start = before[k] if before else fields[-1] if fields else None
                points = (OperatingPoint(i_d, i_q, float(position)),)
                fields.extend(self.crew.own.chain(points, start))
                self.watch.within(min(1.0, len(fields) / (4.0 * len(positions))))
            found = fields[-len(positions) :]
            psi_d, psi_q = [f.psi_d for f in found], [f.psi_q for f in found]
            return mean_linkage_torque(pole_pairs, i_d, i_q, psi_d, psi_q)

        gamma = best_angle(torque_of).gamma
        i_d, i_q = dq_currents(current, gamma)
        return _Searched(i_d, i_q, tuple(fields[-len(positions) :]), tuple(fields))

    def _waveform_fields(self, searched: _Searched) -> list[FieldSolution]:
        """Fields at all positions of the waveform, from chains shared by the crew."""
        positions = waveform_positions(self.section.pole_pairs)
        points = [OperatingPoint(searched.i_d, searched.i_q, float(p)) for p in positions]
        chains = [points[k : k + CHAIN_LENGTH] for k in range(0, len(points), CHAIN_LENGTH)]
        tasks = [partial(_chain, chain, _nearest(searched.last, chain[0])) for chain in chains]
        done = self.crew.share(tasks, lambda count: self.watch.within(count / len(tasks)))
        return [field for chain in done for field in chain]

    def _field_errors(self, fields: Sequence[FieldSolution]) -> FieldErrors:
        """Error bars of the waveform from a few of its fields, shared by the crew."""
        winding, places = winding_table(self.machine.design), sample_places(fields)
        tasks = [partial(_change, self.section, winding, fields[k]) for k in places]
        done = self.crew.share(tasks, lambda count: self.watch.within(count / len(tasks)))
        changed = dict(zip(places, done, strict=True))
        return errors_of(fields, changed, self.section.pole_pairs)

    def _draw(
        self,
        stage: Path,
        model: MagneticModel,
        waveform_fields: Sequence[FieldSolution],
        stress: StressWork,
    ) -> None:
        """Draw all figures, shared by the crew; the flux is that of the first position."""
        design = self.machine.design
        results = Pictured(
            name=design.name,
            section=self.section,
            winding=winding_table(design),
            sector=model.sector,
            solution=waveform_fields[0],
            waveform=torque_waveform(waveform_fields, self.section.pole_pairs),
            stress=stress.solution,
            ribs=stress.report,
        )
        tasks = [partial(_figure, name, results, stage) for name in FIGURES]
        self.crew.share(tasks, lambda count: self.watch.within(count / len(tasks)))

    def _written(
        self,
        stage: Path,
        model: MagneticModel,
        waveform: TorqueWaveform,
        field_errors: FieldErrors,
        fields: Sequence[FieldSolution],
        stress: StressWork,
    ) -> Verdict:
        """Write everything; the verdict last, with the time that the rest has taken."""
        machine, watch = self.machine, self.watch
        with watch.phase("files"):
            outline = write_outline(self.section, stage / DXF_FILE)
            write_text(stage / WAVEFORM_FILE, waveform_csv(waveform))
            orders = spectrum(waveform)
            write_text(stage / ORDERS_FILE, spectrum_csv(orders, waveform.mean))
            write_text(stage / RIBS_FILE, ribs_csv(stress.report))
        cards = (machine.rotor_steel, machine.stator_steel)
        magnetic, rotor = magnetic_figures(waveform), stress_figures(stress.report)
        terminal = terminal_figures(machine.design, magnetic)
        bars = {
            **magnetic_errors(magnetic, field_errors),
            **terminal_errors(machine.design, magnetic, terminal, field_errors),
            **stress_errors(stress.report, stress.finer, stress.zone_errors),
        }
        unknowns = model.numbering.n_dof
        verdict = Verdict(
            design_name=machine.design.name,
            design_hash=design_hash(machine.design, cards),
            version=version(),
            outline_dxf=DXF_FILE,
            magnetic=magnetic,
            terminal=terminal,
            stress=rotor,
            outline=outline,
            solver=solver_figures(
                model.sector, unknowns, fields, len(waveform.torque), stress.solution
            ),
            outcomes=judged(machine.design.limits, magnetic, rotor),
            cautions=cautions(magnetic, terminal, rotor, cards),
            times=watch.times,
            errors=bars,
        )
        write_text(stage / VERDICT_FILE, json_text(verdict_record(verdict, orders)))
        return verdict


def _chain(
    points: Sequence[OperatingPoint], start: FieldSolution, desk: Desk
) -> tuple[FieldSolution, ...]:
    return desk.chain(points, start)


def _change(
    section: CrossSection, winding: WindingTable, solution: FieldSolution, desk: Desk
) -> Change:
    return desk.change(section, winding, solution)


def _figure(name: str, results: Pictured, stage: Path, desk: Desk) -> None:
    desk.figure(name, results, stage)


def _nearest(fields: Sequence[FieldSolution], point: OperatingPoint) -> FieldSolution:
    return min(fields, key=lambda field: abs(field.position - point.position))
