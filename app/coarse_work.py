"""The page's coarse verdict: the steps of a quick evaluation, ordered so that little is left to do.

The current angle is searched on first-order elements, at a fifth of the cost, and settled on those
of second order, mostly at one angle; the waveform has the fewest positions that hold its first slot
harmonics. A second process, where a core is left for it, computes the stress meanwhile, and then a
share of the waveform. Meshes are those of `study_quick`. Nothing depends on what was computed
before, so a design has the same coarse verdict to the last bit whenever it is asked for.
"""

import ctypes
import math
import os
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import partial
from typing import Literal

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.winding import winding_table
from lamwright.postprocess.operating import slot_order
from lamwright.postprocess.ribs import RibReport
from lamwright.postprocess.skew import mean_solution, step_point
from lamwright.postprocess.torque import torque_waveform, waveform_positions
from lamwright.solver.chains import OperatingPoint, fanned, solve_chain
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.mesh import mesh_section
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.types import FieldSolution, StressSolution

from .angle import AngleFound, Slopes, most_torque, solved_with_slopes
from .point import model_of
from .pool import Crew
from .study_quick import CLOSE, FIELD_MESH, NEWTON, QuickField, QuickWork, quick_stress, work_of

# A mean over positions lets a multiple of the first slot harmonic through, see `search_positions`:
# the least one of the search, whose angle hangs little on it, and of the waveform.
SEARCH_ORDER, WAVEFORM_ORDER = 3, 5
LEAST_SEARCHED, LEAST_POSITIONS = 3, 9
# Of the waveform of a skewed rotor, which is smoother.
SKEWED_STEPS, SKEWED_POSITIONS = 3, 7
# Slots of a sector from which on the turning circle has wider steps: 11 instead of 14 thousand
# unknowns for one of 18 slots, and 0.3 % less torque.
MANY_SLOTS = 16
WIDER_MESH = replace(FIELD_MESH, circle_step=1.35)

Order = Literal["first", "second"]  # of elements


@dataclass(frozen=True, slots=True, eq=False)
class CoarseWork:
    """What a quick evaluation gives, and the field where the page draws the rotor."""

    quick: QuickWork
    drawn: FieldSolution
    sign: float  # of its potential there


class Hand:
    """What a process keeps of the design that it works on: the model, also of first order."""

    def __init__(self) -> None:
        """Of no design yet."""
        self._models: dict[Order, MagneticModel] = {}

    def take_model(self, model: MagneticModel | None) -> None:
        """Keep it, or let go of the last one."""
        self._models = {} if model is None else {"second": model, "first": _rough(model)}
        if model is None:
            give_back()

    def angles(
        self,
        order: Order,
        points: Sequence[OperatingPoint],
        starts: Sequence[FieldSolution],
    ) -> list[tuple[FieldSolution, Slopes]]:
        """Fields and slopes, see `solved_with_slopes`."""
        return solved_with_slopes(self._models[order], points, starts)

    def chain(
        self, points: Sequence[OperatingPoint], start: FieldSolution
    ) -> tuple[FieldSolution, ...]:
        """Fields at the points one after the other, the first from `start`."""
        return solve_chain(self._models["second"], points, start=start)

    def stress(self, machine: Machine, section: CrossSection) -> tuple[StressSolution, RibReport]:
        """As `quick_stress`."""
        return quick_stress(machine, section)


def coarse_work(machine: Machine, section: CrossSection, crew: Crew[Hand]) -> CoarseWork:
    """Compute it; raises what `study_quick.quick_work` does."""
    stress_to_come = crew.start(Hand.stress, machine, section)
    settings = WIDER_MESH if section.sector_slots >= MANY_SLOTS else FIELD_MESH
    model = model_of(machine, section, mesh_section(section, settings))
    model = replace(model, settings=replace(model.settings, newton=NEWTON))
    crew.everywhere(Hand.take_model, model)
    try:
        found = coarse_angle(model, machine.design, crew)
        field, drawn, sign = _fields(machine.design, section, model, found, crew)
        solution, ribs = stress_to_come.result()
    finally:
        crew.everywhere(Hand.take_model, None)
    quick = work_of(machine, section, field, solution, ribs)
    return CoarseWork(quick, drawn, sign)


def fewest_positions(pole_pairs: int, slots: int, least: int, order: int) -> int:
    """Positions over 60 electrical degrees whose mean is free of the first slot harmonics.

    Args:
        pole_pairs: of the machine.
        slots: likewise.
        least: so many at the least.
        order: the first multiple of the slot harmonic that may be left.
    """
    n = slot_order(pole_pairs, slots) // 6
    count = least
    while count // math.gcd(count, n) < order:
        count += 1
    return count


def coarse_angle(model: MagneticModel, design: MachineDesign, crew: Crew[Hand]) -> AngleFound:
    """The current angle of most torque, first of the first-order elements, then of the model."""
    count = fewest_positions(design.pole_pairs, design.stator.slots, LEAST_SEARCHED, SEARCH_ORDER)
    positions = waveform_positions(design.pole_pairs, count)
    try:
        solve = partial(_shared_angles, crew, "first")
        rough = most_torque(_rough(model), design, _untold, CLOSE, positions, solve=solve)
        near: float | None = rough.gamma
    except LamwrightError:  # whether there is none, the model itself decides
        near = None
    solve = partial(_shared_angles, crew, "second")
    return most_torque(model, design, _untold, CLOSE, positions, near, solve)


def _rough(model: MagneticModel) -> MagneticModel:
    """The first-order elements, solved as far as the others."""
    assert model.coarse is not None
    rough = model.coarse.model
    return replace(rough, settings=replace(rough.settings, newton=model.settings.newton))


def _shared_angles(
    crew: Crew[Hand],
    order: Order,
    points: Sequence[OperatingPoint],
    starts: Sequence[FieldSolution],
) -> list[tuple[FieldSolution, Slopes]]:
    """In two halves, always the same: neither figures nor factors hang on who is free."""
    half = (len(points) + 1) // 2
    later = crew.start(Hand.angles, order, points[half:], starts[half:])
    return [*crew.own.angles(order, points[:half], starts[:half]), *later.result()]


def _untold(share: float) -> None:
    """Nobody waits for a part of a second to be told of."""


def _fields(
    design: MachineDesign,
    section: CrossSection,
    model: MagneticModel,
    found: AngleFound,
    crew: Crew[Hand],
) -> tuple[QuickField, FieldSolution, float]:
    """The waveform, and the field as drawn with its sign, from chains shared by the crew."""
    offsets, pole_pairs = skew_offsets(design), section.pole_pairs
    least = SKEWED_POSITIONS if len(offsets) >= SKEWED_STEPS else LEAST_POSITIONS
    count = fewest_positions(pole_pairs, section.slots, least, WAVEFORM_ORDER)
    places = waveform_positions(pole_pairs, count).tolist()
    points = [OperatingPoint(found.i_d, found.i_q, place) for place in places]
    chains = []
    for step, (offset, near) in enumerate(zip(offsets, found.last, strict=True)):
        moved = [step_point(point, offset, pole_pairs) for point in points]
        for start, chain in fanned([p.position for p in moved], [f.position for f in near]):
            chains.append((step, chain, [moved[k] for k in chain], near[start]))
    seen, sign = drawn_point(design, section, model, found)
    tasks = [partial(_chain, moved, start) for _, _, moved, start in chains]
    drawing = partial(_chain, [seen], found.last[0][0])
    *done, (drawn,) = crew.share([*tasks, drawing], lambda count: None)
    at = {
        (step, k): field
        for (step, chain, _, _), fields in zip(chains, done, strict=True)
        for k, field in zip(chain, fields, strict=True)
    }
    by_step = tuple(tuple(at[step, k] for k in range(count)) for step in range(len(offsets)))
    together = zip(zip(*by_step, strict=True), points, strict=True)
    means = tuple(mean_solution(steps, offsets, point, pole_pairs) for steps, point in together)
    bare = 0.0
    if found.bare is not None:  # of which a small difference is taken: solved to the end
        exact = replace(model, settings=replace(model.settings, newton=NewtonSettings()))
        bare = solve_point(exact, 0.0, 0.0, found.bare.position, found.bare).psi_q
    waveform = torque_waveform(means, pole_pairs)
    return QuickField(model, found, waveform, bare, by_step, means), drawn, sign


def drawn_point(
    design: MachineDesign, section: CrossSection, model: MagneticModel, found: AngleFound
) -> tuple[OperatingPoint, float]:
    """Where the page draws the rotor, and the sign of the potential there.

    The rotor stands a whole number of sectors from that place, as few as bring it near to where
    its field is known.
    """
    pitch, axis = section.sector_angle, winding_table(design).axis_a
    sectors = round((found.last[0][0].position + axis) / pitch)
    at = OperatingPoint(found.i_d, found.i_q, sectors * pitch - axis)
    return at, model.sector.side_sign**sectors


def _chain(
    points: Sequence[OperatingPoint], start: FieldSolution, hand: Hand
) -> tuple[FieldSolution, ...]:
    return hand.chain(points, start)


def give_back() -> None:
    """Give freed memory back to the system, where the C library has a way (glibc).

    It keeps it else, in pieces: 170 verdicts of different designs took the process from 166 to
    196 MB, with this from 115 to 118 MB (measured).
    """
    trim = getattr(ctypes.CDLL(None), "malloc_trim", None) if os.name == "posix" else None
    if trim is not None:
        trim(0)
