"""The fields behind ripple, forces and pull at one current, shared by a crew.

All positions of a turn of the current vector are cut into chains of neighbours, each from zero, so
that results do not depend on who did what. The whole circle for a rotor beside the axis is meshed
and solved by one of them while the others go through the positions.
"""

import cmath
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial
from itertools import chain

import numpy as np

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.postprocess.cogging import (
    Cogging,
    cogging,
    cogging_per_turn,
    cogging_positions,
)
from lamwright.postprocess.gap_waves import ComplexArray, GapWaves, gap_waves
from lamwright.postprocess.magnetic_pull import (
    EccentricPull,
    eccentric_pull,
    pulls,
    smooth_pull,
    working_field,
)
from lamwright.postprocess.operating import slot_order
from lamwright.postprocess.skew_orders import TurnedTorque, skew_turns, turned_torque
from lamwright.postprocess.torque import (
    DEFAULT_POSITIONS,
    SAMPLES_PER_PERIOD,
    TorqueWaveform,
    torque_waveform,
    waveform_positions,
)
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.eccentric import eccentric_model, solve_eccentric
from lamwright.solver.field import MagneticModel
from lamwright.solver.gap_circle import CircleField, CircleReader, circle_field, circle_reader
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.types import FieldSolution, FloatArray

from .desk import Desk
from .point import model_of
from .pool import Crew

SLOT_ORDERS = 3  # multiples of the slot order that are resolved
MOST_ORDER = 150  # and no more than this, but for the first slot order itself
CHAINS = 3  # of a waveform; fixed, so that results do not depend on the crew
# The pull on a mesh 2.5 times as coarse as usual is within 0.4 % (24/4 demo, tests).
WHOLE_MESH = MeshSettings(scale=2.0)
PULL_POSITIONS = 6  # over 60 electrical degrees
DEFAULT_SHARE = 0.1  # of the gap, for the rotor beside the axis


@dataclass(frozen=True, slots=True, eq=False)
class RippleWork:
    """What was solved at one current."""

    waveform: TorqueWaveform  # without skew
    waves: GapWaves
    turned: TurnedTorque  # of a part of the stack, for skews up to the widest asked
    pull: EccentricPull
    record: Cogging | None  # only with magnets


@dataclass(frozen=True, slots=True, eq=False)
class Read:
    """What is kept of a field."""

    torque: float  # N m
    figures: FieldSolution | None  # only where a waveform is made of them
    circle: CircleField | None


def highest_order(pole_pairs: int, slots: int) -> int:
    """Highest torque order resolved: three slot orders, that of the usual waveform at least."""
    usual = 6 * DEFAULT_POSITIONS // SAMPLES_PER_PERIOD
    first = slot_order(pole_pairs, slots)
    return max(usual, first, min(MOST_ORDER, SLOT_ORDERS * first))


def slot_skew(pole_pairs: int, slots: int) -> float:
    """Skew in rad el over which the first slot order has a mean of zero: its period.

    A slot pitch where the slots of a pole pair are a multiple of 6; a fraction of it elsewhere.
    """
    return 2.0 * math.pi / slot_order(pole_pairs, slots)


def widest_skew(machine: Machine) -> float:
    """Widest skew of interest in rad el: `slot_skew`, or the design's own where it is wider."""
    design = machine.design
    own = np.radians(design.rotor.skew_angle_deg) if len(skew_offsets(design)) > 1 else 0.0
    period = slot_skew(design.pole_pairs, design.stator.slots)
    return max(period, float(design.pole_pairs * own))


def ripple_work(
    machine: Machine,
    section: CrossSection,
    model: MagneticModel,
    crew: Crew[Desk],
    currents: tuple[float, float],
    offset: float,
    on_done: Callable[[float], None],
) -> RippleWork:
    """All fields at the currents, and what they mean.

    Args:
        machine: the design with its cards.
        section: its sector.
        model: of the sector; every desk gets it, whatever chapter used the desks before.
        crew: who solves.
        currents: i_d and i_q in A.
        offset: of the rotor's axis from the stator's in m, towards the middle of a tooth.
        on_done: called with the share done, 0 to 1.
    """
    pole_pairs = section.pole_pairs
    crew.everywhere(Desk.take_model, model)
    moved_to_come = crew.start(pulled, machine, currents, offset)
    reader = circle_reader(model)
    positions = waveform_positions(
        pole_pairs, highest_order(pole_pairs, section.slots) * SAMPLES_PER_PERIOD // 6
    )
    turns = skew_turns(widest_skew(machine))
    middle = turns.size // 2
    tasks: list[Callable[[Desk], list[Read]]] = []
    for k, turn in enumerate(turns.tolist()):
        current = complex(*currents) * cmath.exp(-1j * turn)
        tasks += _tasks(current, positions, reader if k == middle else None)
    per_turn = cogging_per_turn(section.slots, section.poles, section.rotor_period)
    still = cogging_positions(per_turn)
    if machine.magnet is not None:
        tasks += _tasks(0j, still, None)
    done = crew.share(tasks, lambda count: on_done(count / len(tasks)))
    solved = [list(chain(*done[at : at + CHAINS])) for at in range(0, len(done), CHAINS)]
    rated = solved[middle]
    circles = [read.circle for read in rated if read.circle is not None]
    waves = gap_waves(reader, circles, section)
    torques = [np.array([read.torque for read in reads]) for reads in solved]
    record = None
    if machine.magnet is not None:
        record = cogging(per_turn, still.tolist(), torques.pop().tolist())
    forces, crest = moved_to_come.result()
    share = offset / section.gap
    smooth = smooth_pull(pole_pairs, reader.radius, section.stack_length, crest, share)
    return RippleWork(
        waveform=torque_waveform([r.figures for r in rated if r.figures is not None], pole_pairs),
        waves=waves,
        turned=turned_torque(turns, torques),
        pull=eccentric_pull(forces, complex(offset), section.gap, smooth),
        record=record,
    )


def coarser_work(
    section: CrossSection,
    model: MagneticModel,
    crew: Crew[Desk],
    currents: tuple[float, float],
    work: RippleWork,
) -> RippleWork:
    """The work with waveform, waves and cogging from another model; the rest as it is.

    Args:
        section: the machine's sector.
        model: half as fine; every desk gets it.
        crew: who solves.
        currents: i_d and i_q in A.
        work: what the model of the map says.
    """
    crew.everywhere(Desk.take_model, model)
    reader = circle_reader(model)
    positions = waveform_positions(section.pole_pairs, work.waveform.torque.size)
    tasks = _tasks(complex(*currents), positions, reader)
    per_turn = cogging_per_turn(section.slots, section.poles, section.rotor_period)
    still = cogging_positions(per_turn)
    if work.record is not None:
        tasks += _tasks(0j, still, None)
    done = crew.share(tasks, lambda count: None)
    rated, bare = list(chain(*done[:CHAINS])), list(chain(*done[CHAINS:]))
    circles = [read.circle for read in rated if read.circle is not None]
    return replace(
        work,
        waveform=torque_waveform(
            [r.figures for r in rated if r.figures is not None], section.pole_pairs
        ),
        waves=gap_waves(reader, circles, section),
        record=cogging(per_turn, still.tolist(), [r.torque for r in bare]) if bare else None,
    )


def pulled(
    desk: Desk, machine: Machine, currents: tuple[float, float], offset: float
) -> tuple[ComplexArray, float]:
    """Pull F_x + j F_y in N at each position, and the centred working field's crest in T.

    The whole circle is meshed for it; the desk's own model is left alone.
    """
    section = cross_section(machine.design, machine.design.rotor.poles)
    model = model_of(machine, section, mesh_section(section, WHOLE_MESH))
    moved = eccentric_model(model, complex(offset))
    positions = waveform_positions(section.pole_pairs, PULL_POSITIONS).tolist()
    (near,) = solve_chain(model, [OperatingPoint(*currents, positions[0])])
    centred = circle_field(circle_reader(model), near)
    circles = []
    for position in positions:
        near = solve_eccentric(moved, *currents, position, near)
        circles.append(circle_field(moved.reader, near))
    crest = working_field(circle_reader(model), [centred], section.pole_pairs)
    return pulls(moved.reader, circles, section.stack_length), crest


def _tasks(
    current: complex, positions: FloatArray, reader: CircleReader | None
) -> list[Callable[[Desk], list[Read]]]:
    """`CHAINS` chains over the positions at a current i_d + j i_q."""
    parts: Sequence[FloatArray] = np.array_split(positions, CHAINS)
    return [
        partial(
            _reads, [OperatingPoint(current.real, current.imag, x) for x in part.tolist()], reader
        )
        for part in parts
    ]


def _reads(points: Sequence[OperatingPoint], reader: CircleReader | None, desk: Desk) -> list[Read]:
    """What is kept of the fields of a chain; on the circle where there is a reader."""
    return [
        Read(
            torque=field.torque,
            figures=None if reader is None else field,
            circle=None if reader is None else circle_field(reader, field),
        )
        for field in desk.chain(points, None)
    ]
