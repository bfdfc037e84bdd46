"""The chapter of `map` on ripple and forces: which orders, of what cause, with which skew.

Everything is taken at the currents of most torque at rated current, by the map's surface.
"""

import math
from collections.abc import Mapping
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.design_file import Machine
from lamwright.geometry.rotor_places import rotor_places
from lamwright.geometry.section import CrossSection
from lamwright.geometry.whole_file import write_text
from lamwright.geometry.winding import winding_table
from lamwright.postprocess.coenergy_surface import CoenergySurface, torque
from lamwright.postprocess.figure_errors import differences
from lamwright.postprocess.figures import write_figure
from lamwright.postprocess.figures_ripple import (
    ForcesPictured,
    RipplePictured,
    forces_figure,
    ripple_figure,
)
from lamwright.postprocess.force_orders import (
    ForceOrder,
    ToothForces,
    force_orders,
    stress_on_rotor,
    tooth_forces,
)
from lamwright.postprocess.magnetic_pull import pull_of_waves
from lamwright.postprocess.operating import dq_currents, slot_order
from lamwright.postprocess.quantities import RPM, figures_of, scaled_by_key
from lamwright.postprocess.ripple_figures import (
    CoggingFigures,
    ForceFigures,
    PullFigures,
    RippleFigures,
    force_cautions,
)
from lamwright.postprocess.ripple_tables import (
    cogging_csv,
    forces_csv,
    pairs_csv,
    ripple_csv,
    tooth_csv,
)
from lamwright.postprocess.skew_orders import SkewedTorque, skewed
from lamwright.postprocess.table_errors import Columns
from lamwright.postprocess.torque import spectrum
from lamwright.postprocess.torque_causes import order_cause, slotting
from lamwright.postprocess.torque_pairs import largest_pairs

from .chapter import Chapter
from .mapped import Mapped
from .ripple_work import (
    DEFAULT_SHARE,
    RippleWork,
    coarser_work,
    highest_order,
    ripple_work,
    slot_skew,
)

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

RIPPLE_FILE, PAIRS_FILE, COGGING_FILE = "ripple.csv", "ripple_pairs.csv", "cogging.csv"
FORCES_FILE, TOOTH_FILE = "forces.csv", "tooth_forces.csv"
SLOT_SKEW_STEPS = (2, 3, 4, 0)  # of the skews by the slot order's period; 0: continuous
TURN = 2.0 * math.pi  # rad
ANGLES = 1801  # of the search for most torque
FORCE_SPACE_SLOTS = 1  # times the slots: space orders of forces listed
FORCE_TIME = 60  # electrical orders of forces listed
OTHER_MESH = "not estimated: its mesh was within 0.4 % on the 24-slot demo"
BY_ORDER = "not estimated row by row: the greatest ones' errors stand in map.json"
ALTERNATES = 0.01  # of the mean radial stress, for the lowest order that is named


def ripple_chapter(mapped: Mapped, stage: Path) -> Chapter:
    """Write the tables and pictures of ripple and forces into `stage`; the chapter's figures."""
    machine, section = mapped.machine, mapped.section
    currents = rated_currents(mapped.surface, machine.design.duty.rated_current_a)
    work = ripple_work(
        machine,
        section,
        mapped.model,
        mapped.crew,
        currents,
        mapped.eccentricity or DEFAULT_SHARE * section.gap,
        mapped.watch.within,
    )
    other = None
    if mapped.coarser is not None:
        other = coarser_work(section, mapped.coarser, mapped.crew, currents, work)
    return written(machine, section, work, stage, other, mapped.angle_error)


def rated_currents(surface: CoenergySurface, rated: float) -> tuple[float, float]:
    """i_d and i_q in A of most torque at the rated peak current, within the surface's range."""
    gamma = np.linspace(0.0, math.pi, ANGLES)
    i_d, i_q = rated * np.cos(gamma), rated * np.sin(gamma)
    (low_d, high_d), (low_q, high_q) = surface.i_d_range, surface.i_q_range
    inside = (i_d >= low_d) & (i_d <= high_d) & (i_q >= low_q) & (i_q <= high_q)
    best = int(np.argmax(torque(surface, i_d[inside], i_q[inside])))
    return dq_currents(rated, float(gamma[inside][best]))


def written(
    machine: Machine,
    section: CrossSection,
    work: RippleWork,
    stage: Path,
    coarser: RippleWork | None = None,
    angle: float = 0.0,
) -> Chapter:
    """All tables and pictures of the work in `stage`, and its figures.

    Args:
        machine: the design with its cards.
        section: its sector.
        work: what was solved.
        stage: of the results.
        coarser: the same from a mesh half as fine, to tell the errors by.
        angle: error of the current angle in rad.
    """
    design, waves = machine.design, work.waves
    winding, by = winding_table(design), slotting(winding_table(design), rotor_places(design))
    orders = spectrum(work.waveform)
    pairs = tuple(largest_pairs(waves, order) for order in orders.order)
    causes = [order_cause(winding, by, order) for order in orders.order]
    skews = skews_shown(machine, work)
    write_text(
        stage / RIPPLE_FILE,
        ripple_csv(orders, work.waveform.mean, skews, causes, pairs, by),
    )
    write_text(stage / PAIRS_FILE, pairs_csv(pairs, by))
    stress = stress_on_rotor(waves)
    forces = force_orders(waves, stress, FORCE_SPACE_SLOTS * section.slots, FORCE_TIME)
    teeth = tooth_forces(waves, stress)
    speeds = [v / RPM for v in (design.duty.rated_speed_rpm, design.duty.maximum_speed_rpm)]
    write_text(stage / FORCES_FILE, forces_csv(forces, section.pole_pairs, speeds))
    write_text(stage / TOOTH_FILE, tooth_csv(teeth))
    pictured = RipplePictured(design.name, orders, work.waveform.mean, skews, pairs, by)
    write_figure(stage, "ripple", partial(ripple_figure, pictured))
    seen = ForcesPictured(design.name, forces, teeth, section.pole_pairs * speeds[0] / TURN)
    write_figure(stage, "forces", partial(forces_figure, seen))
    on_stator = _force_figures(section, work, forces, teeth, speeds)
    of_ripple, of_pull = _ripple_figures(section, work, skews), _pull_figures(work)
    of_record = _cogging_figures(work)
    if work.record is not None:
        write_text(stage / COGGING_FILE, cogging_csv(work.record))
    errors: dict[str, float] = {}
    tables: dict[str, Columns] = {}
    if coarser is not None:
        own: tuple[DataclassInstance, ...] = (on_stator, *of_record)
        other: tuple[DataclassInstance, ...] = (
            _forces_of(section, coarser, speeds),
            *_cogging_figures(coarser),
        )
        off = _ripple_errors(of_ripple, _ripple_figures(section, coarser, skews), angle)
        errors = differences(own, other) | scaled_by_key(of_ripple, off)
        tables = _table_errors(work, coarser, errors)
    why = {item.key: OTHER_MESH for item in figures_of(of_pull)}
    return Chapter(
        (of_ripple, on_stator, of_pull, *of_record),
        force_cautions(design.rotor.skew_steps, on_stator.pull),
        errors=errors,
        without_error=why,
        table_errors=tables,
    )


def _forces_of(section: CrossSection, work: RippleWork, speeds: list[float]) -> ForceFigures:
    """Figures of the forces alone."""
    stress = stress_on_rotor(work.waves)
    forces = force_orders(work.waves, stress, FORCE_SPACE_SLOTS * section.slots, FORCE_TIME)
    return _force_figures(section, work, forces, tooth_forces(work.waves, stress), speeds)


def _cogging_figures(work: RippleWork) -> tuple[CoggingFigures, ...]:
    record = work.record
    if record is None:
        return ()
    return (
        CoggingFigures(
            per_turn=record.per_turn,
            peak_to_peak=record.peak_to_peak,
            first=float(record.amplitude[0]),
        ),
    )


def _ripple_errors(own: RippleFigures, coarser: RippleFigures, angle: float) -> dict[str, float]:
    """Errors by field: what a mesh half as fine differs by; a skew lowers orders and their errors.

    Args:
        own: figures of the map's mesh.
        coarser: of the other; of skewed rotors they are the same.
        angle: error of the current angle in rad.
    """
    largest, slot = abs(coarser.largest - own.largest), abs(coarser.slot - own.slot)
    mean = abs(coarser.mean - own.mean)
    return {
        "i_d": angle * abs(own.i_q),
        "i_q": angle * abs(own.i_d),
        "mean": mean,
        "largest": max(largest, slot),
        "slot": max(largest, slot),
        "slot_skewed": max(largest, slot),
        "slot_period": max(largest, slot),
        "mean_period": mean,
    }


def _table_errors(
    work: RippleWork, coarser: RippleWork, errors: Mapping[str, float]
) -> dict[str, Columns]:
    """Errors of the columns of the tables, by file."""
    orders = [spectrum(each.waveform).amplitude for each in (work, coarser)]
    off = float(np.abs(orders[1] - orders[0]).max())
    tables: dict[str, Columns] = {
        RIPPLE_FILE: {"amplitudes_nm_error": off, "other columns": BY_ORDER},
        PAIRS_FILE: {"all columns": BY_ORDER},
        FORCES_FILE: {"all columns": BY_ORDER},
        TOOTH_FILE: {"all columns": BY_ORDER},
    }
    if work.record is not None:
        tables[COGGING_FILE] = {"torques_nm_error": errors["cogging_peak_to_peak_nm"]}
    return tables


def skews_shown(machine: Machine, work: RippleWork) -> tuple[SkewedTorque, ...]:
    """The design's own skew (or none), then the slot order's period in steps and continuous."""
    design = machine.design
    pole_pairs, highest = design.pole_pairs, highest_order(design.pole_pairs, design.stator.slots)
    own = pole_pairs * math.radians(design.rotor.skew_angle_deg)
    period = slot_skew(pole_pairs, design.stator.slots)
    cases = [(design.rotor.skew_steps, own), *((steps, period) for steps in SLOT_SKEW_STEPS)]
    return tuple(skewed(work.turned, steps, angle, highest) for steps, angle in cases)


def _ripple_figures(
    section: CrossSection, work: RippleWork, skews: tuple[SkewedTorque, ...]
) -> RippleFigures:
    waveform = work.waveform
    found, mean = spectrum(waveform), abs(waveform.mean)
    top, slot = int(np.argmax(found.amplitude)), slot_order(section.pole_pairs, section.slots)
    own, continuous = skews[0], skews[-1]
    at = found.order.index(slot)
    return RippleFigures(
        i_d=waveform.i_d,
        i_q=waveform.i_q,
        mean=waveform.mean,
        order=found.order[top],
        largest=float(found.amplitude[top]) / mean,
        slot_order=slot,
        slot=float(found.amplitude[at]) / mean,
        slot_skewed=float(own.amplitude[at]) / abs(own.mean),
        slot_period=float(continuous.amplitude[at]) / abs(continuous.mean),
        mean_period=continuous.mean,
    )


def _force_figures(
    section: CrossSection,
    work: RippleWork,
    forces: tuple[ForceOrder, ...],
    teeth: ToothForces,
    speeds: list[float],
) -> ForceFigures:
    waves, mean = work.waves, forces[0].radial
    alternating = [f for f in forces if f.space > 0 and f.time != 0.0]
    strong = [f for f in alternating if f.radial >= ALTERNATES * mean] or alternating
    space = min(f.space for f in strong)
    lowest = max((f for f in strong if f.space == space), key=lambda f: f.radial)
    rated, most = (abs(lowest.time) * section.pole_pairs * w / (2.0 * math.pi) for w in speeds)
    centred = pull_of_waves(
        waves.stator_at_positions(), waves.rotor_at_positions(), waves.radius, waves.stack_length
    )
    return ForceFigures(
        mean=mean,
        space=space,
        lowest=lowest.radial,
        frequency=rated,
        frequency_at_most=most,
        tooth_pull=float(teeth.pull.mean()),
        tooth_most=float(teeth.pull.max()),
        tooth_sideways=float(np.abs(teeth.tangential).max()),
        pull=float(np.abs(centred).max()),
    )


def _pull_figures(work: RippleWork) -> PullFigures:
    pull = work.pull
    return PullFigures(
        offset=pull.offset,
        share=pull.share,
        along=pull.along,
        across=pull.across,
        most=pull.most,
        stiffness=pull.along / pull.offset,
        smooth=pull.smooth,
    )
