"""The work of `map`: the points by the crew, then files and chapters."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.figure_errors import error_values, without_error
from lamwright.postprocess.figures_map import DrawnMap, write_map_figure
from lamwright.postprocess.files import json_text
from lamwright.postprocess.flux_map import FluxMap
from lamwright.postprocess.map_figures import (
    ANGLE_STEP,
    MapCounts,
    MapFigures,
    map_checks,
    map_figures,
)
from lamwright.postprocess.map_files import write_map
from lamwright.postprocess.quantities import Figure, figures_of, scaled_by_key
from lamwright.postprocess.shifted_surface import shifted
from lamwright.postprocess.skew import skew_cautions
from lamwright.postprocess.table_errors import Columns, map_columns
from lamwright.solver.estimate import angle_error
from lamwright.solver.mesh import mesh_section
from lamwright.solver.tolerance import ToleranceName, tolerance_settings

from .chapter import made_chapter
from .desk import Desk
from .map_errors import MapErrors, map_errors
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
COARSER = 2.0  # times the mesh's scale, for what is solved twice to tell its error


@dataclass(frozen=True, slots=True)
class MapReport:
    """What `map` has found."""

    design_name: str
    sections: tuple[tuple[str, tuple[Figure, ...]], ...]  # the map's, then each chapter's
    errors: dict[str, float]  # by the figures' keys, in their units
    without_error: dict[str, str]  # why others have none, beside what their declaration says
    table_errors: dict[str, Columns]  # of the columns, by file
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
        mapped = _with_errors(mapped, figures, errors, tolerance)
        bars = _map_bars(mapped, figures, errors)
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
    report = MapReport(
        design_name=machine.design.name,
        sections=tuple(
            (name, tuple(figure for group in chapter for figure in figures_of(group)))
            for name, chapter in groups
        ),
        errors={**bars, **{key: bar for one in chapters for key, bar in one.errors.items()}},
        without_error={key: why for one in chapters for key, why in one.without_error.items()},
        table_errors={
            **map_columns(),
            **{name: columns for one in chapters for name, columns in one.table_errors.items()},
        },
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


def _with_errors(
    mapped: Mapped, figures: MapFigures, errors: MapErrors, tolerance: ToleranceName
) -> Mapped:
    """The machine with what its chapters tell their errors by."""
    settings, _, _ = tolerance_settings(tolerance)
    sector = mesh_section(mapped.section, replace(settings, scale=COARSER * settings.scale))
    surface, off = mapped.surface, errors.mesh.torque_linkage / figures.torque
    return replace(
        mapped,
        shifted=(shifted(surface, errors.share_d, 0.0), shifted(surface, 0.0, errors.share_q)),
        coarser=model_of(mapped.machine, mapped.section, sector),
        angle_error=angle_error(off, ANGLE_STEP),
    )


def _map_bars(mapped: Mapped, figures: MapFigures, errors: MapErrors) -> dict[str, float]:
    """Errors of the map's own figures by key, in their units.

    Torque and linkages of the surface at rated current: the mesh's alone, as the current angle is
    the surface's own. Inductances are slopes, which err by more between nodes: of these the bound
    is that of the linkages over half the current.
    """
    current, angle = figures.current, mapped.angle_error
    most = errors.torque * figures.most_torque
    share = errors.mesh.torque_linkage / figures.torque
    slope = 2.0 / current
    off_d = slope * errors.share_d * abs(figures.psi_d)
    off_q = slope * errors.share_q * abs(figures.psi_q)
    bars = {
        "gamma": angle,
        "i_d": angle * abs(figures.i_q),
        "i_q": angle * abs(figures.i_d),
        "torque": errors.mesh.torque_linkage,
        "psi_d": errors.mesh.psi_d,
        "psi_q": errors.mesh.psi_q,
        "l_dd": off_d,
        "l_qq": off_q,
        "l_dq": max(off_d, off_q),
        "most_torque": share * figures.most_torque + most,
    }
    return scaled_by_key(figures, bars)


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
    return {
        "design": report.design_name,
        **error_values(report.figures, report.errors),
        "table_errors": {name: dict(columns) for name, columns in report.table_errors.items()},
        "errors_not_given": without_error(report.figures, report.errors, report.without_error),
        "estimates": [figure.key for figure in report.figures if figure.is_estimate],
        "not_given": list(report.not_given),
        "cautions": list(report.cautions),
        **_attributes(machine, tolerance),
        "version": version(),
        "seconds": report.seconds,
    }
