"""The work of `map`: the points by the crew, then files and chapters."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.figures_map import DrawnMap, write_map_figure
from lamwright.postprocess.files import json_text
from lamwright.postprocess.flux_map import FluxMap
from lamwright.postprocess.map_figures import MapCounts, map_checks, map_figures
from lamwright.postprocess.map_files import write_map
from lamwright.postprocess.quantities import Figure, figures_of, scaled_by_key
from lamwright.postprocess.skew import skew_cautions
from lamwright.solver.mesh import mesh_section
from lamwright.solver.tolerance import ToleranceName, tolerance_settings

from .chapter import made_chapter
from .desk import Desk
from .map_errors import map_errors
from .map_grid import MapGrid
from .map_losses import harvest_of, laws_of, loss_map_of
from .map_point import MapTask
from .map_store import PointStore
from .map_work import compute_points, flux_map_of, harvests_of
from .mapped import ChapterMaker, Mapped
from .point import model_of
from .pool import Crew
from .progress import Stopwatch
from .version import version

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

MAP_FILE = "map.json"


@dataclass(frozen=True, slots=True)
class MapReport:
    """What `map` has found."""

    design_name: str
    sections: tuple[tuple[str, tuple[Figure, ...]], ...]  # the map's, then each chapter's
    errors: dict[str, float]  # by the figures' keys, in their units
    cautions: tuple[str, ...]
    not_given: tuple[str, ...]
    seconds: dict[str, float]  # wall time by phase

    @property
    def figures(self) -> tuple[Figure, ...]:
        """All figures in their order."""
        return tuple(figure for _, figures in self.sections for figure in figures)


def run_of(machine: Machine, grid: MapGrid, tolerance: ToleranceName) -> dict[str, object]:
    """What makes a map, by the names that a store tells a difference with."""
    return {
        "design": design_hash(machine.design, machine.cards),
        "tolerance": tolerance,
        "grid of i_d": grid.i_d.tolist(),
        "grid of i_q": grid.i_q.tolist(),
        "positions": grid.position.size,
        "version": version(),
    }


def mapped_machine(
    machine: Machine,
    section: CrossSection,
    grid: MapGrid,
    store: PointStore,
    crew: Crew[Desk],
    watch: Stopwatch,
    tolerance: ToleranceName,
) -> tuple[Mapped, int]:
    """The machine with its map, and how many points were solved for it now."""
    with watch.phase("mesh"):
        mesh_settings, _, _ = tolerance_settings(tolerance)
        model = model_of(machine, section, mesh_section(section, mesh_settings))
        crew.everywhere(Desk.take_model, model)
        laws = laws_of(machine, section, model)
    with watch.phase("flux map"):
        kept = len(store.points())
        task = MapTask(grid, skew_offsets(machine.design), harvest_of(laws))
        points = compute_points(crew, task, store, watch.within)
    flux_map = flux_map_of(section.pole_pairs, grid, points)
    surface = coenergy_surface(flux_map)
    losses = loss_map_of(laws, flux_map, surface, harvests_of(grid, points))
    whole = Mapped(machine, section, model, flux_map, surface, losses, crew, watch)
    return whole, len(points) - kept


def write_results(
    mapped: Mapped,
    solved: int,
    grid: MapGrid,
    stage: Path,
    tolerance: ToleranceName,
    makers: Sequence[tuple[str, ChapterMaker]],
) -> MapReport:
    """All files of a map into `stage`, with those of the chapters; returns what `map.json` says."""
    machine, watch, flux_map = mapped.machine, mapped.watch, mapped.flux_map
    figures = map_figures(flux_map, mapped.surface, machine.design.duty.rated_current_a)
    with watch.phase("error bars"):
        errors = map_errors(mapped, (figures.i_d, figures.i_q), watch.within)
    with watch.phase("files"):
        write_map(stage, flux_map, mapped.surface, _attributes(machine, tolerance))
    with watch.phase("pictures"):
        most = machine.design.duty.most_current_a
        name = machine.design.name
        write_map_figure(stage, DrawnMap(name, flux_map, mapped.surface, figures, most))
    chapters = [
        made_chapter(mapped.watch, name, partial(write, mapped, stage)) for name, write in makers
    ]
    own: list[DataclassInstance] = [
        _counts(flux_map, solved),
        figures,
        map_checks(flux_map, mapped.surface, errors.linkage, errors.torque),
    ]
    groups = [
        ("map", own),
        *((name, chapter.figures) for (name, _), chapter in zip(makers, chapters, strict=True)),
    ]
    # Of the surface at rated current: the mesh's alone, as the current angle is the surface's own.
    bars = {
        "torque": errors.mesh.torque_linkage,
        "psi_d": errors.mesh.psi_d,
        "psi_q": errors.mesh.psi_q,
    }
    report = MapReport(
        design_name=machine.design.name,
        sections=tuple(
            (name, tuple(figure for group in chapter for figure in figures_of(group)))
            for name, chapter in groups
        ),
        errors=scaled_by_key(figures, bars),
        cautions=(
            *grid.cautions,
            *skew_cautions(machine.design.rotor.skew_steps),
            *(line for chapter in chapters for line in chapter.cautions),
        ),
        not_given=(
            *((mapped.losses,) if isinstance(mapped.losses, str) else ()),
            *(line for chapter in chapters for line in chapter.not_given),
        ),
        seconds={time.phase: round(time.seconds, 3) for time in watch.times},
    )
    write_text(stage / MAP_FILE, json_text(_record(report, machine, tolerance)))
    return report


def _counts(flux_map: FluxMap, solved: int) -> MapCounts:
    return MapCounts(
        currents_d=flux_map.i_d.size,
        currents_q=flux_map.i_q.size,
        positions=flux_map.position.size,
        solved=solved,
        kept=flux_map.i_d.size * flux_map.i_q.size - solved,
    )


def _attributes(machine: Machine, tolerance: ToleranceName) -> dict[str, str | float]:
    """What the map's own files say of it."""
    design = machine.design
    magnet = design.magnet
    temperature = {} if magnet is None else {"magnet_temperature_c": magnet.temperature_c}
    return {
        "title": f"flux map of {design.name}",
        "source": f"lamwright {version()}",
        "design_hash": design_hash(design, machine.cards),
        "tolerance": tolerance,
        "winding_temperature_c": design.winding.temperature_c,
        **temperature,
    }


def _record(report: MapReport, machine: Machine, tolerance: ToleranceName) -> dict[str, object]:
    values: dict[str, float] = {}
    for figure in report.figures:
        assert figure.key not in values, f"two figures named {figure.key}"
        values[figure.key] = figure.value
        if figure.key in report.errors:
            values[f"{figure.key}_error"] = report.errors[figure.key]
    return {
        "design": report.design_name,
        **values,
        "estimates": [figure.key for figure in report.figures if figure.is_estimate],
        "not_given": list(report.not_given),
        "cautions": list(report.cautions),
        **_attributes(machine, tolerance),
        "version": version(),
        "seconds": report.seconds,
    }
