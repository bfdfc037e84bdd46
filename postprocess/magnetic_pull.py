r"""The one-sided pull of the gap's field on the rotor, and what a smooth gap would make of it.

From Maxwell's stress on the turning circle of radius R, with the waves of `gap_waves` (derived):
with B = B_r + j B_theta, F_x + j F_y = (R L / 2 mu0) int B^2 e^(j theta) d theta, and B has only
waves born in the rotor at positive orders, only such born in the stator at negative ones, so

    F = (8 pi L / (mu0 R)) sum_n n (n + 1) beta_n conj(alpha_(n+1)):

a pull needs two neighbouring space orders. A sector that repeats has none.

Smooth gap (derived): radial field B_1 cos(p theta) in a gap g much smaller than the radius,
magnetomotive force given by the currents, steel without need of any, rotor moved by e = eps g,
eps much below 1. To first order the field is B_1 cos(p theta) (1 + eps cos theta), less its mean,
which no flux across the gap can have; then F = pi R L B_1^2 eps / (2 mu0), for p = 1 half of it.
Slots widen the gap and steel takes part of the force in a real machine, so its pull is less.

Axes: n_pos positions, n_space space orders, n_all places of the whole circle.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.solver.gap_circle import CircleField, CircleReader, whole_circle
from lamwright.solver.steel import MU_0
from lamwright.solver.types import FloatArray

from .gap_waves import ComplexArray, born_waves


@dataclass(frozen=True, slots=True)
class EccentricPull:
    """The pull on a rotor beside the stator's axis, mean over the positions."""

    offset: float  # m
    share: float  # of the gap
    along: float  # N, towards the narrow side
    across: float  # N, a quarter turn counter-clockwise of it
    most: float  # N, largest magnitude at a position
    smooth: float  # N, of a smooth gap with the working wave alone


def pull_of_waves(
    stator_born: ComplexArray, rotor_born: ComplexArray, radius: float, stack_length: float
) -> ComplexArray:
    """Force F_x + j F_y in N on what lies inside the circle, (...).

    Args:
        stator_born: amplitudes (..., n_space) in Wb/m on the circle.
        rotor_born: likewise.
        radius: of the circle in m.
        stack_length: in m.
    """
    n = np.arange(1, stator_born.shape[-1])
    products = rotor_born[..., :-1] * stator_born[..., 1:].conj()
    return np.asarray(8.0 * math.pi * stack_length / (MU_0 * radius) * (products @ (n * (n + 1))))


def pulls(reader: CircleReader, fields: Sequence[CircleField], stack_length: float) -> ComplexArray:
    """Force F_x + j F_y in N on the rotor of each field, (n_pos,), in the stator's frame."""
    stator_born, rotor_born = (np.array(born) for born in zip(*_born(reader, fields), strict=True))
    return pull_of_waves(stator_born, rotor_born, reader.radius, stack_length)


def working_field(reader: CircleReader, fields: Sequence[CircleField], pole_pairs: int) -> float:
    """Crest of the radial field's working wave on the circle in T, mean over the positions."""
    waves = [outer + inner for outer, inner in _born(reader, fields)]
    # B_r = (1/r) dA/d theta
    return float(np.mean(np.abs(waves), axis=0)[pole_pairs - 1]) * 2.0 * pole_pairs / reader.radius


def smooth_pull(
    pole_pairs: int, radius: float, stack_length: float, crest: float, share: float
) -> float:
    """Pull in N of a smooth unsaturated gap, see the head of the file.

    Args:
        pole_pairs: of the machine.
        radius: of the gap in m.
        stack_length: in m.
        crest: of the radial field's working wave in T.
        share: of the gap by which the rotor is moved, much below 1.
    """
    whole = math.pi * radius * stack_length * crest**2 * share / (2.0 * MU_0)
    return 0.5 * whole if pole_pairs == 1 else whole


def eccentric_pull(
    forces: FloatArray | ComplexArray, offset: complex, gap: float, smooth: float
) -> EccentricPull:
    """The mean pull over positions, along the offset and across it.

    Args:
        forces: (n_pos,) F_x + j F_y in N on the rotor.
        offset: of the rotor's axis from the stator's in m.
        gap: in m.
        smooth: pull of a smooth gap in N.
    """
    turned = np.asarray(forces) * (offset / abs(offset)).conjugate()
    mean = complex(turned.mean())
    return EccentricPull(
        offset=abs(offset),
        share=abs(offset) / gap,
        along=mean.real,
        across=mean.imag,
        most=float(np.abs(turned).max()),
        smooth=smooth,
    )


def _born(
    reader: CircleReader, fields: Sequence[CircleField]
) -> list[tuple[ComplexArray, ComplexArray]]:
    return [
        born_waves(whole_circle(reader, f.potential), whole_circle(reader, f.reaction))
        for f in fields
    ]
