"""`spread`: what the tolerances of making do to a design, and how many rotors hold its limits.

Each source of spread is solved in full at both of its limits; from these a line and a parabola are
made, thousands of machines are drawn at random and counted, and a few of them solved in full beside
the model. See `postprocess.spread` for the statistics.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path

import numpy as np

from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.section import CrossSection
from lamwright.geometry.tolerance_checks import GAP_KEYS, MOST_OF_GAP
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.figures_spread import write_spread
from lamwright.postprocess.files import json_text, prepared_folder, staged
from lamwright.postprocess.spread import (
    SourceEffect,
    SpreadModel,
    SpreadSource,
    drawn_deviations,
    model_checks,
)
from lamwright.postprocess.spread_tables import SpreadReport, spread_csv, spread_record
from lamwright.postprocess.verdict import RPM
from lamwright.solver.cut_motion import MachineMotion, bore_motion, cut_motion, key_motion
from lamwright.solver.cut_steel import edge_distances
from lamwright.solver.design_motion import (
    MM,
    PartMotion,
    draw_lamination,
    draw_rotor,
    draw_stator,
    part_motion,
)
from lamwright.solver.made_machine import Deviation, SpoiltEdges
from lamwright.solver.mesh import mesh_section
from lamwright.solver.rotor_stress import rotor_stress
from lamwright.solver.tolerance import ToleranceName, tolerance_settings
from lamwright.solver.types import FloatArray, PlanarMesh, SectorMesh

from .angle import most_torque
from .lamination import section_of
from .point import read_machine
from .pool import Crew, spare_cores
from .progress import Progress, Stopwatch, silent
from .spread_sources import ECCENTRIC, deviation_of, moving_keys, spread_figures, spread_sources
from .spread_work import DrawnMachine, EccentricEffect, SpreadDesk, drawn_fields, made_model
from .version import version

JSON_FILE, CSV_FILE = "spread.json", "spread.csv"
SHARES = {
    "drawn machine": 0.15,
    "sources": 0.4,
    "checked machines": 0.35,
    "files": 0.1,
}
MOST_WORKERS = 7
LEAST_SAMPLES, MOST_SAMPLES = 100, 1_000_000


@dataclass(frozen=True, slots=True)
class SpreadWishes:
    """What is asked of a run."""

    samples: int = 5000
    solve: int = 12
    seed: int = 1
    tolerance: ToleranceName = "normal"
    workers: int | None = None
    positions: int = 30  # over 60 electrical degrees

    def checked(self) -> "SpreadWishes":
        """The same.

        Raises:
            LamwrightError: a number is out of its range.
        """
        ranges = (
            ("samples", self.samples, LEAST_SAMPLES, MOST_SAMPLES),
            ("solve", self.solve, 2, 10_000),
            ("seed", self.seed, 0, 2**32 - 1),
            ("workers", 1 if self.workers is None else self.workers, 1, 256),
        )
        for name, value, least, most in ranges:
            if not least <= value <= most:
                raise LamwrightError(f"--{name} {value}: accepted {least} to {most}")
        return self


def spread(
    path: str | Path, out: str | Path, wishes: SpreadWishes, progress: Progress = silent
) -> SpreadReport:
    """Spread of the design in the file `path`; tables and picture go to the folder `out`.

    Raises:
        DesignError: the design cannot be read or drawn; one line for each fault.
        LamwrightError: it has no spread yet, or the folder cannot be written.
        NotConverged: an iteration did not end; with its history.
    """
    wishes.checked()
    machine = read_machine(path)
    section = section_of(machine)
    _refuse(machine)
    if not spread_sources(machine.design):
        raise LamwrightError("spread: every tolerance is 0; state one above 0 in [tolerance]")
    folder = prepared_folder(Path(out))
    spare = spare_cores() if wishes.workers is None else wishes.workers - 1
    watch = Stopwatch(progress, SHARES)
    with Crew(SpreadDesk, min(spare, MOST_WORKERS)) as crew, staged(folder, JSON_FILE) as stage:
        report = spread_of(machine, section, wishes, crew, watch)
        with watch.phase("files"):
            write_text(stage / CSV_FILE, spread_csv(report))
            write_text(stage / JSON_FILE, json_text(spread_record(report, version())))
            write_spread(stage, report)
    return report


def spread_of(
    machine: Machine,
    section: CrossSection,
    wishes: SpreadWishes,
    crew: Crew[SpreadDesk],
    watch: Stopwatch,
) -> SpreadReport:
    """The report of a machine whose pole is drawn, by a crew."""
    design = machine.design
    sources = spread_sources(design)
    with watch.phase("drawn machine"):
        still = deviation_of(design, sources, [0.0] * len(sources))
        drawn = drawn_machine(machine, section, wishes, still)
        crew.everywhere(SpreadDesk.take, drawn)
    currents = drawn.fields[0].i_d, drawn.fields[0].i_q

    def solved(rows: Sequence[FloatArray], on_done: Callable[[float], None]) -> list[FloatArray]:
        tasks = [partial(_figures, deviation_of(design, sources, row.tolist())) for row in rows]
        return crew.share(tasks, lambda count: on_done(count / len(tasks)))

    own = [k for k, source in enumerate(sources) if source.key != ECCENTRIC]
    with watch.phase("sources"):
        eccentric = None
        if len(own) < len(sources):
            offset = MM * design.tolerance.bore_eccentricity_mm
            eccentric = crew.start(SpreadDesk.eccentric, machine, currents, offset)
        ends = [sign * np.eye(len(sources))[k] for k in own for sign in (-1.0, 1.0)]
        nominal, *found = solved([np.zeros(len(sources)), *ends], watch.within)
        beside = None if eccentric is None else eccentric.result()
        by_source = dict(zip(own, zip(found[::2], found[1::2], strict=True), strict=True))
        bare = None
        if drawn.edges is not None:
            (bare,) = crew.share([partial(_figures, replace(still, edge_depth=0.0))], _nobody)
    effects = [
        SourceEffect(source, *(end - nominal for end in by_source[k]))
        if k in by_source
        else _eccentric_effect(source, nominal, beside)
        for k, source in enumerate(sources)
    ]
    model = SpreadModel(
        spread_figures(design), nominal, tuple(effects), design.tolerance.distribution
    )
    with watch.phase("checked machines"):
        # A stream of its own: another number of samples leaves the checked machines as they are.
        random = drawn_deviations(model.distribution, wishes.solve, len(sources), (wishes.seed, 1))
        random[:, [k for k in range(len(sources)) if k not in own]] = 0.0
        full = np.array(solved(list(random), watch.within))
    samples = drawn_deviations(model.distribution, wishes.samples, len(sources), (wishes.seed, 0))
    return SpreadReport(
        design_name=design.name,
        currents=currents,
        model=model,
        values=model.at(samples),
        modelled=model.at(random),
        solved=full,
        checks=model_checks(model.at(random), full),
        seed=wishes.seed,
        tolerance=wishes.tolerance,
        pull=None if beside is None else beside.pull,
        edge_effect=None if bare is None else nominal - bare,
        is_default=not design.tolerance.model_fields_set,
    )


def drawn_machine(
    machine: Machine, section: CrossSection, wishes: SpreadWishes, deviation: Deviation
) -> DrawnMachine:
    """Meshes, their motions and fields of the machine as drawn, at the current of most torque.

    Args:
        machine: the design with its cards.
        section: its sector.
        wishes: meshes and positions.
        deviation: of the machine as drawn: none, but the spoilt edge's own depth.

    Raises:
        LamwrightError: a key of the tolerances is unknown, or its outline cannot move both ways.
    """
    design = machine.design
    mesh_settings, stress_settings, _ = tolerance_settings(wishes.tolerance)
    keys = moving_keys(design)
    sector = mesh_section(section, mesh_settings)
    speed = design.duty.overspeed_factor * design.duty.maximum_speed_rpm / RPM
    lamination = rotor_stress(section, machine.rotor_steel, speed, stress_settings).mesh
    parts = (
        part_motion(sector.rotor, design, draw_rotor),
        part_motion(sector.stator, design, draw_stator),
        part_motion(lamination, design, draw_lamination),
    )
    drawn = DrawnMachine(
        machine=machine,
        section=section,
        sector=sector,
        lamination=lamination,
        motions=tuple(_motion(key, machine, section, sector, lamination, parts) for key in keys),
        edges=_edges(machine, section, sector),
        speed=speed,
    )
    model = made_model(drawn, deviation)
    found = most_torque(model, design, lambda share: None)
    currents = found.i_d, found.i_q
    return replace(drawn, fields=drawn_fields(model, currents, wishes.positions, found.last[0][0]))


def _motion(
    key: str,
    machine: Machine,
    section: CrossSection,
    sector: SectorMesh,
    lamination: PlanarMesh,
    parts: tuple[PartMotion, PartMotion, PartMotion],
) -> MachineMotion:
    field_parts = parts[0], parts[1]
    if key == "cut_mm":
        return cut_motion(section, sector, field_parts, (lamination, parts[2]))
    if key == "gap_mm":
        return bore_motion(section, sector, field_parts, lamination)
    try:
        return key_motion(machine.design, key, parts)
    except ValueError as error:
        raise LamwrightError(f"tolerance.key {key}: {error}; remove it") from None


def _edges(machine: Machine, section: CrossSection, sector: SectorMesh) -> SpoiltEdges | None:
    drop = machine.design.tolerance.edge_drop_percent
    if drop is None:
        return None
    angle = None if section.is_full_circle else section.sector_angle
    rotor, stator = (edge_distances(mesh, angle) for mesh in (sector.rotor, sector.stator))
    return SpoiltEdges(rotor, stator, 0.01 * drop)


def _eccentric_effect(
    source: SpreadSource, nominal: FloatArray, beside: EccentricEffect | None
) -> SourceEffect:
    """The same to either side; ripple, margin and growth are not solved with it."""
    assert beside is not None
    change = np.array([beside.torque * nominal[0], 0.0, beside.saliency * nominal[2], 0.0, 0.0])
    return SourceEffect(source, change, change)


def _figures(deviation: Deviation, desk: SpreadDesk) -> FloatArray:
    return desk.figures(deviation)


def _nobody(count: int) -> None:
    """Nobody is told."""


def _refuse(machine: Machine) -> None:
    """What has no spread yet, and default tolerances that are too wide for a machine."""
    design = machine.design
    if machine.magnet is not None:
        raise LamwrightError("spread: a machine with magnets has none yet; remove [magnet]")
    if design.rotor.skew_steps > 1:
        raise LamwrightError("spread: a skewed rotor has none yet; remove skew_steps")
    most = MOST_OF_GAP * design.rotor.gap_mm
    for name in GAP_KEYS:
        value = getattr(design.tolerance, name)
        if value > most:  # only a default can be: what is stated was checked
            fault = f"the default is over {MOST_OF_GAP:g} of the gap"
            raise LamwrightError(f"tolerance.{name} = {value:g}: {fault}; state 0 to {most:.3g}")
