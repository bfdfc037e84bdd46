"""The fields that only a machine with magnets needs: without current, and against the magnets."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path

from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.whole_file import write_text
from lamwright.geometry.winding import WindingTable, winding_table
from lamwright.postprocess.demagnetisation import (
    MagnetState,
    magnet_states,
    opposing_angle,
    worst_places,
    worst_states,
)
from lamwright.postprocess.magnet_cautions import magnet_cautions
from lamwright.postprocess.magnet_errors import magnet_errors
from lamwright.postprocess.magnet_figures import (
    MagnetFigures,
    demagnetising_current,
    magnet_figures,
)
from lamwright.postprocess.no_load import NoLoad, linkage_spectrum, no_load, no_load_positions
from lamwright.postprocess.operating import dq_currents
from lamwright.postprocess.skew import mean_change, mean_solution, step_point
from lamwright.postprocess.table_errors import Columns, no_load_columns
from lamwright.postprocess.tables import linkage_orders_csv, no_load_csv
from lamwright.solver.chains import OperatingPoint
from lamwright.solver.estimate import NoLoadErrors, no_load_errors, sample_places
from lamwright.solver.estimate_step import Change
from lamwright.solver.field import MagneticModel
from lamwright.solver.magnet import magnet_law
from lamwright.solver.model import remagnetised
from lamwright.solver.types import FieldSolution

from .desk import Desk
from .pool import Crew

NO_LOAD_FILE, LINKAGE_ORDERS_FILE = "no_load.csv", "no_load_orders.csv"
CHAINS = 3  # that positions are shared out in; fixed, so that results do not depend on the crew
# Over 60 electrical degrees, every third of the no-load's: the worst of them counts.
STRIDE = 3


@dataclass(frozen=True, slots=True, eq=False)
class MagnetWork:
    """No load and demagnetisation of a machine with magnets."""

    record: NoLoad
    errors: NoLoadErrors
    states: tuple[MagnetState, ...]  # of each magnet at its worst position
    finer_states: tuple[MagnetState, ...]  # the same on the finer mesh
    fields: tuple[FieldSolution, ...]

    def write(self, folder: Path) -> None:
        """Linkage over the period and its harmonics as CSV."""
        write_text(folder / NO_LOAD_FILE, no_load_csv(self.record))
        spectrum = linkage_spectrum(self.record)
        write_text(folder / LINKAGE_ORDERS_FILE, linkage_orders_csv(spectrum))

    def cautions(self, machine: Machine) -> tuple[str, ...]:
        """What a reader should be wary of, for these magnets."""
        assert machine.magnet is not None
        return magnet_cautions(machine.magnet, self.states)

    def figures(
        self, machine: Machine, section: CrossSection, i_d: float, i_q: float
    ) -> MagnetFigures:
        """Its figures; the magnet torque at the currents given (A)."""
        assert machine.magnet is not None
        return magnet_figures(
            machine.design,
            machine.magnet,
            self.record,
            self.states,
            section.sectors,
            (i_d, i_q),
        )

    def error_bars(
        self, machine: Machine, figures: MagnetFigures, i_d: float, i_q: float
    ) -> dict[str, float]:
        """Errors of its figures by key, in their units."""
        return magnet_errors(
            machine.design,
            figures,
            self.errors,
            (self.record.psi_d, self.record.psi_q),
            (i_d, i_q),
            (self.states, self.finer_states),
        )

    def columns(self, figures: MagnetFigures, errors: Mapping[str, float]) -> dict[str, Columns]:
        """Errors of the columns of its tables, by file."""
        return no_load_columns(figures, errors, self.errors)


def magnet_work(
    machine: Machine, section: CrossSection, model: MagneticModel, crew: Crew[Desk]
) -> MagnetWork:
    """Fields of a machine with magnets, shared by the crew.

    The demagnetising current flows along the axis that opposes the mean no-load linkage. The desks
    keep the model at its temperature, so these are the last fields of a run.
    """
    assert machine.magnet is not None
    assert machine.design.magnet is not None
    law = magnet_law(machine.magnet, machine.design.magnet.worst_temperature_c)
    positions = no_load_positions(section.pole_pairs, section.rotor_period).tolist()
    offsets, pole_pairs = skew_offsets(machine.design), section.pole_pairs
    still = [OperatingPoint(0.0, 0.0, position) for position in positions]
    bare = _solved(crew, still, offsets, pole_pairs)
    whole = [
        mean_solution(steps, offsets, point, pole_pairs)
        for steps, point in zip(bare, still, strict=True)
    ]
    record = no_load(whole, section.rotor_period)
    winding, places = winding_table(machine.design), sample_places(whole)
    samples = [partial(_change, section, winding, field) for k in places for field in bare[k]]
    done, count = crew.share(samples, lambda count: None), len(offsets)
    changed = {
        place: mean_change(done[at * count : (at + 1) * count], offsets, pole_pairs)
        for at, place in enumerate(places)
    }
    gamma = opposing_angle(record.psi_d, record.psi_q)
    i_d, i_q = dq_currents(demagnetising_current(machine.design), gamma)
    if law != model.settings.magnet:
        crew.everywhere(Desk.take_model, remagnetised(model, law))
    against = [OperatingPoint(i_d, i_q, position) for position in positions[::STRIDE]]
    opposed = _solved(crew, against, offsets, pole_pairs)
    rotor = model.sector.rotor
    loaded = [field for steps in opposed for field in steps]
    states = [magnet_states(rotor, section.rotor, field.a_rotor, law) for field in loaded]
    worst = worst_places(states)
    at_worst = sorted(set(worst))
    again = [partial(_finer, section, winding, loaded[k]) for k in at_worst]
    finer = dict(zip(at_worst, crew.share(again, lambda count: None), strict=True))
    unloaded = [field for steps in bare for field in steps]
    return MagnetWork(
        record=record,
        errors=no_load_errors(whole, changed),
        states=worst_states(states),
        finer_states=tuple(finer[k][magnet] for magnet, k in enumerate(worst)),
        fields=(*unloaded, *loaded),
    )


def _solved(
    crew: Crew[Desk], points: Sequence[OperatingPoint], offsets: Sequence[float], pole_pairs: int
) -> list[tuple[FieldSolution, ...]]:
    """Fields of all steps of the rotor at each of its points."""
    share = -(-len(points) // CHAINS)
    tasks = [
        partial(_chain, [step_point(p, offset, pole_pairs) for p in points[at : at + share]])
        for offset in offsets
        for at in range(0, len(points), share)
    ]
    done = crew.share(tasks, lambda count: None)
    fields = [field for chain in done for field in chain]
    by_step = [fields[at : at + len(points)] for at in range(0, len(fields), len(points))]
    return list(zip(*by_step, strict=True))


def _change(
    section: CrossSection, winding: WindingTable, solution: FieldSolution, desk: Desk
) -> Change:
    return desk.change(section, winding, solution)


def _finer(
    section: CrossSection, winding: WindingTable, solution: FieldSolution, desk: Desk
) -> tuple[MagnetState, ...]:
    return desk.finer_magnets(section, winding, solution)


def _chain(points: Sequence[OperatingPoint], desk: Desk) -> tuple[FieldSolution, ...]:
    return desk.chain(points, None)
