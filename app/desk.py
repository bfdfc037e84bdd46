"""The work of one design that a process does by itself; every process has one desk."""

import time
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from lamwright.geometry.design import SteelCard
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.figures import Pictured, write_figures
from lamwright.postprocess.ribs import RibReport, rib_report
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.field import MagneticModel
from lamwright.solver.rotor_stress import rotor_stress
from lamwright.solver.types import FieldSolution, StressSolution


@dataclass(frozen=True, slots=True)
class StressWork:
    """The stress of the lamination, what it means for the ribs, and the wall time it took."""

    solution: StressSolution
    report: RibReport
    seconds: float


class Desk:
    """What a process keeps between its tasks: the magnetic model with its factors."""

    def __init__(self) -> None:
        """An empty desk."""
        self._model: MagneticModel | None = None

    def take_model(self, model: MagneticModel) -> None:
        """Keep the model for the chains to come; its factors are made here."""
        self._model = model

    def chain(
        self, points: Sequence[OperatingPoint], start: FieldSolution | None
    ) -> tuple[FieldSolution, ...]:
        """Fields at the points one after the other, the first from `start`."""
        assert self._model is not None
        return solve_chain(self._model, points, start=start)

    def stress(self, section: CrossSection, card: SteelCard, speed: float) -> StressWork:
        """Stress of the rotor lamination at `speed` in rad/s, and its ribs."""
        began = time.perf_counter()
        solution = rotor_stress(section, card, speed)
        report = rib_report(solution, section, 1e6 * card.yield_strength_mpa.value)
        return StressWork(solution, report, time.perf_counter() - began)

    def figure(self, name: str, results: Pictured, folder: Path) -> None:
        """Draw one of `figures.FIGURES` into the folder, twice: PNG and SVG."""
        write_figures(folder, results, names=(name,))
