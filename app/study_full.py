"""Full figures of a design: those of `assess`, to the last digit, by one process."""

import tempfile
from pathlib import Path

from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.masses import mass_figures
from lamwright.postprocess.quantities import figures_of
from lamwright.postprocess.verdict import all_figures
from lamwright.solver.tolerance import ToleranceName

from .assessment import Assessment
from .pool import Crew
from .progress import Stopwatch, silent
from .run import make_desk


def full_figures_of(
    machine: Machine, section: CrossSection, tolerance: ToleranceName
) -> tuple[dict[str, float], dict[str, float]]:
    """Figures and error bars by their keys, in their units.

    Raises:
        LamwrightError: as of an assessment.
        NotConverged: an iteration did not end.
    """
    watch = Stopwatch(silent)
    with watch.phase("start"):
        crew = Crew(make_desk, 0)
    with crew, tempfile.TemporaryDirectory(prefix="lamwright-") as folder:
        work = Assessment(machine, section, crew, None, watch, tolerance, pictures=False)
        verdict = work.written_to(Path(folder))
    found = {key: float(one.value) for key, one in all_figures(verdict).items()}
    masses = {one.key: float(one.value) for one in figures_of(mass_figures(machine, section))}
    return {**found, **masses}, dict(verdict.errors)
