"""The work of one design that a process does by itself; every process has one desk."""

import time
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.design import SteelCard
from lamwright.geometry.section import CrossSection
from lamwright.geometry.winding import WindingTable
from lamwright.postprocess.demagnetisation import MagnetState, magnet_states
from lamwright.postprocess.ribs import RibReport, rib_report
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.estimate_step import Change, FineLevel, changes, fine_level, finer_field
from lamwright.solver.estimate_stress import finer_stress, peak_errors, zone_peaks
from lamwright.solver.field import MagneticModel
from lamwright.solver.rotor_stress import StressSettings, rotor_stress
from lamwright.solver.types import FieldSolution, FloatArray, StressSolution

if TYPE_CHECKING:
    from lamwright.solver.foreseen import Node

    from .map_point import MapDesk, MapTask
    from .map_store import PointRecord


@dataclass(frozen=True, slots=True)
class StressWork:
    """The stress of the lamination, what it means for the ribs, and the wall time it took."""

    solution: StressSolution
    report: RibReport
    finer: RibReport  # the same on a mesh four times as fine
    zone_errors: FloatArray  # (n_rib + 1,), relative errors of the peaks
    seconds: float


class Desk:
    """What a process keeps between its tasks: the magnetic model with its factors."""

    def __init__(self) -> None:
        """An empty desk."""
        self._model: MagneticModel | None = None
        self._level: FineLevel | None = None
        self._map: MapDesk | None = None

    def take_model(self, model: MagneticModel) -> None:
        """Keep the model for the chains to come; its factors are made here."""
        self._model, self._level = model, None

    def chain(
        self, points: Sequence[OperatingPoint], start: FieldSolution | None
    ) -> tuple[FieldSolution, ...]:
        """Fields at the points one after the other, the first from `start`."""
        assert self._model is not None
        return solve_chain(self._model, points, start=start)

    def take_map(self, task: "MapTask") -> None:
        """Begin the points of a map of the model."""
        from .map_point import map_desk

        assert self._model is not None
        self._map = map_desk(self._model, task)

    def end_map(self) -> None:
        """Let go of a map's factors and fields."""
        self._map = None

    def map_point(self, band: int, node: "Node") -> "PointRecord":
        """A point of the map."""
        from .map_point import solved_point

        assert self._map is not None
        return solved_point(self._map, band, node)

    def change(
        self, section: CrossSection, winding: WindingTable, solution: FieldSolution
    ) -> Change:
        """What a mesh four times as fine changes of a solution of the model."""
        assert self._model is not None
        if self._level is None:
            self._level = fine_level(self._model, section, winding)
        return changes(self._level, solution)

    def finer_magnets(
        self, section: CrossSection, winding: WindingTable, solution: FieldSolution
    ) -> tuple[MagnetState, ...]:
        """The state of every magnet in a solution of the model, on a mesh four times as fine."""
        assert self._model is not None
        law = self._model.settings.magnet
        assert law is not None
        if self._level is None:
            self._level = fine_level(self._model, section, winding)
        level = self._level
        a = finer_field(level, solution)[1]
        rotor = level.sector.rotor
        return magnet_states(rotor, section.rotor, a[: len(rotor.nodes)], law)

    def stress(
        self, section: CrossSection, card: SteelCard, speed: float, settings: StressSettings
    ) -> StressWork:
        """Stress of the rotor lamination at `speed` in rad/s, and its ribs."""
        began = time.perf_counter()
        solution = rotor_stress(section, card, speed, settings)
        finer = finer_stress(section, card, solution, settings)
        zone_errors = peak_errors(section, solution, finer)
        # The refinement's own bound is 5 to 110 times the true error; the finer mesh knows better.
        greatest = int(zone_peaks(section, solution).argmax())
        solution = replace(solution, peak_error=float(zone_errors[greatest]) * solution.peak)
        strength = 1e6 * card.yield_strength_mpa.value
        return StressWork(
            solution=solution,
            report=rib_report(solution, section, strength),
            finer=rib_report(finer, section, strength),
            zone_errors=zone_errors,
            seconds=time.perf_counter() - began,
        )

    def figure(self, folder: Path, name: str, *shown: object) -> None:
        """Draw one of `figures.COMPOSERS` into the folder, twice: PNG and SVG."""
        from lamwright.postprocess.figures import COMPOSERS, write_figure

        write_figure(folder, name, partial(COMPOSERS[name], *shown))
