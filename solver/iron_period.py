"""Flux density in the steel, and its whole period from rotor positions over 60 electrical degrees.

Derived. At constant i_d, i_q the field 60 electrical degrees on is the same field, turned. Slots
and winding are themselves, phases exchanged or reversed, when turned by k slots; the rotor is
itself when turned by its period of P poles, every second pole reversed. Where k slots are as far as
60 electrical degrees and P j poles together (`geometry.sectors.ripples_in_sixty_degrees`), at
alpha = 2 pi k / slots,

    B(x, theta + 60) = (-1)^(P j) R(alpha) B(R(-alpha) x, theta)

in the stator's frame, and with P j poles instead of alpha in the rotor's; for whole q and like
poles j = 0 and k = q: the stator's field moves on by q slots and a point of the rotor sees all
there is in 60 degrees. What lies outside the sector is brought back by whole sectors. The meshes
repeat in themselves (`mesh_fold`), so quadrature points fall on quadrature points.

Flux densities are complex here, B_x + i B_y. Axes: n_point quadrature points of a part's steel.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import reduce

import numpy as np
import numpy.typing as npt

from lamwright.geometry.errors import LamwrightError

from .kernel import quadrature, quadrature_places
from .model import MagneticModel, joined_parts
from .types import FieldSolution, FloatArray, IntArray

ComplexArray = npt.NDArray[np.complex128]

MOST_STEPS = 432  # of 60 electrical degrees: six turns of 12 pole pairs
SAME_TURN = 1e-6  # of a turn's magnitude, far above rounding
SAME_PLACE = 1e-7  # m; far under any element, far above rounding


@dataclass(frozen=True, slots=True, eq=False)
class PeriodStep:
    """How the flux density of a part 60 electrical degrees on follows from what it is.

    B(theta + 60 el) = turn * B(theta)[source]; after `steps` of them it is itself again.
    """

    source: IntArray  # (n_point,)
    turn: ComplexArray  # (n_point,), of magnitude 1
    steps: int


@dataclass(frozen=True, slots=True, eq=False)
class PeriodPoints:
    """Quadrature points of some elements of one part in the sector."""

    element: IntArray  # (n_elem,), numbers among all elements, the rotor's first
    place: ComplexArray  # (n_point,), x + i y in m
    area: FloatArray  # (n_point,), m^2 of the sector
    step: PeriodStep


def steel_points(
    model: MagneticModel, slots: int, rotor_period: int
) -> tuple[PeriodPoints, PeriodPoints]:
    """The steel's points of rotor and stator.

    Args:
        model: of the machine.
        slots: of the whole stator.
        rotor_period: poles after which the rotor repeats.

    Raises:
        LamwrightError: the mesh does not repeat in itself, or nothing repeats after 60 degrees.
    """
    iron, n_rotor = model.iron, model.iron.n_rotor
    return (
        _points(model, iron.element[:n_rotor], slots, rotor_period, is_rotor=True),
        _points(model, iron.element[n_rotor:], slots, rotor_period, is_rotor=False),
    )


def copper_points(model: MagneticModel, slots: int, rotor_period: int) -> PeriodPoints:
    """The points of all coil sides; arguments and errors as of `steel_points`."""
    sector = model.sector
    sides = sector.stator.elements_of("slot_") + sector.rotor.elements.shape[0]
    return _points(model, sides, slots, rotor_period, is_rotor=False)


def _points(
    model: MagneticModel, numbers: IntArray, slots: int, rotor_period: int, *, is_rotor: bool
) -> PeriodPoints:
    nodes, elements = joined_parts(model.sector)
    places = quadrature_places(nodes, elements[numbers], 3)
    z = (places[..., 0] + 1j * places[..., 1]).ravel()
    pole = math.pi / model.sector.pole_pairs
    j = _poles_between(slots, 2 * model.sector.pole_pairs, rotor_period)
    sign = -1.0 if rotor_period * j % 2 else 1.0
    back = rotor_period * j * pole  # by which the rotor's field turns in the rotor
    source, turn = _turned(model, z, back if is_rotor else back + pole / 3.0, sign)
    weight = quadrature(nodes, elements[numbers], 3).weight.ravel()
    return PeriodPoints(numbers, z, weight, PeriodStep(source, turn, _steps(source, turn)))


def flux_at(
    model: MagneticModel, points: PeriodPoints, solutions: Sequence[FieldSolution]
) -> ComplexArray:
    """Flux density at some points in each solution, B_x + i B_y in T, (n_solution, n_point)."""
    nodes, elements = joined_parts(model.sector)
    own = elements[points.element]
    grad = quadrature(nodes, own, 3).grad
    rows = []
    for solution in solutions:
        a = np.concatenate([solution.a_rotor, solution.a_stator])[own]
        slope = np.einsum("eqdi,ei->eqd", grad, a)
        rows.append((slope[..., 1] - 1j * slope[..., 0]).ravel())  # B = (dA/dy, -dA/dx)
    return np.stack(rows)


def whole_period(step: PeriodStep, waves: ComplexArray) -> ComplexArray:
    """Flux density over the whole period of a part.

    Args:
        step: of the part.
        waves: (n_pos, n_point), at positions equally spaced over 60 electrical degrees.

    Returns:
        (steps n_pos, n_point).
    """
    found = [waves]
    for _ in range(step.steps - 1):
        found.append(step.turn * found[-1][:, step.source])
    return np.concatenate(found)


def like_points(step: PeriodStep) -> IntArray:
    """Number of the first point (n_point,) whose flux density is that of each, shifted in time."""
    first = np.arange(step.source.size)
    at = step.source
    for _ in range(step.steps):
        first = np.minimum(first, at)
        at = step.source[at]
    # Chains longer than the period meet their least number by repeating.
    return reduce(lambda f, _: np.minimum(f, f[step.source]), range(step.steps), first)


def _steps(source: IntArray, turn: ComplexArray) -> int:
    """Steps of 60 electrical degrees after which the flux density of every point is itself.

    One in a rotor that sees all in 60 degrees; where j is not 0 its points must come round to their
    own places, as they see waves that are slower than the fundamental.
    """
    at, turned = source, turn
    for number in range(1, MOST_STEPS + 1):
        if np.array_equal(at, np.arange(at.size)) and np.abs(turned - 1.0).max() < SAME_TURN:
            return number
        turned = turned * turn[at]
        at = source[at]
    raise LamwrightError("the flux density in the steel does not repeat")


def _poles_between(slots: int, poles: int, rotor_period: int) -> int:
    """The j of the file's head."""
    for j in range(poles // rotor_period):
        if slots * (1 + 3 * rotor_period * j) % (3 * poles) == 0:
            return j
    raise LamwrightError("the field does not repeat after 60 electrical degrees")


def _turned(
    model: MagneticModel, z: ComplexArray, angle: float, sign: float
) -> tuple[IntArray, ComplexArray]:
    """Where each point was `angle` before, and what its flux density there is turned by."""
    from scipy.spatial import cKDTree

    sector = model.sector
    back = z * cmath.exp(-1j * angle)
    # From the sector's middle, so that points near its sides are not lost to rounding.
    lead = np.angle(back * cmath.exp(-0.5j * sector.sector_angle))
    whole = np.round(lead / sector.sector_angle)
    inside = back * np.exp(-1j * whole * sector.sector_angle)
    tree = cKDTree(np.column_stack([z.real, z.imag]))
    found = tree.query(np.column_stack([inside.real, inside.imag]))
    distance, source = np.asarray(found[0]), np.asarray(found[1], dtype=np.int64)
    if distance.max(initial=0.0) > SAME_PLACE:
        raise LamwrightError("the mesh does not repeat from slot to slot or pole to pole")
    signs = sign * sector.side_sign**whole
    turn = signs * np.exp(1j * (angle + whole * sector.sector_angle))
    return source, turn
