r"""The field of the air gap as waves: space order by time order, born in the stator or the rotor.

Between rim and bore there is neither current nor steel, so at each instant the potential is

    A = 2 Re sum_{n>0} (alpha_n (r/R)^n + beta_n (r/R)^-n) e^(j n theta)

on the turning circle's radius R. The part that grows outward comes from outside the gap (winding
and stator steel), the other from inside (rotor steel and magnets): waves born in the stator,
alpha, and in the rotor, beta. From potential A_n and field H_n = -(n / (mu0 R)) (alpha - beta) on
the circle: alpha, beta = (A_n -+ mu0 R H_n / n) / 2. Source: derived, separation of variables.

Over time (electrical angle theta_e of the rotor, currents constant in dq) every amplitude is a sum
of e^(-j k theta_e): k > 0 turns with the rotor, k < 0 against it.

Positions over 60 electrical degrees hold a whole period and the sector the whole circle: turned by
so many slots that winding and rotor are themselves again, the machine is the same one 60 degrees
later, reversed where the rotor has been turned by an odd number of poles (derived, as in
`geometry.sectors`; tests solve the positions beyond).

Axes: n_pos positions over 60 degrees, n_time all positions of the period, in time orders too;
n_ring places of the sector's part of the circle, n_all of the whole circle; n_space space orders.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from lamwright.geometry.section import CrossSection
from lamwright.solver.gap_circle import CircleField, CircleReader, orders_kept, whole_circle
from lamwright.solver.steel import MU_0
from lamwright.solver.types import FloatArray, IntArray

from .torque import PERIOD_EL

ComplexArray = npt.NDArray[np.complex128]


@dataclass(frozen=True, slots=True)
class SixthTurn:
    """What turns the machine into itself 60 electrical degrees later."""

    slots: int  # counter-clockwise
    sign: float  # of the field
    sixths: int  # of 60 electrical degrees, after which the field repeats


@dataclass(frozen=True, slots=True, eq=False)
class GapWaves:
    """The waves of the gap's field, amplitudes on the turning circle."""

    pole_pairs: int
    slots: int
    radius: float  # m, of the turning circle
    stack_length: float  # m
    sixths: int  # of 60 electrical degrees in the period of the time orders
    stator_born: ComplexArray  # (n_time, n_space), Wb/m; time orders as numpy's transform has them
    rotor_born: ComplexArray

    @property
    def time_orders(self) -> FloatArray:
        """Electrical order (n_time,) of each row, signed."""
        count = self.stator_born.shape[0]
        return np.asarray(np.fft.fftfreq(count, 1.0 / count) * 6.0 / self.sixths)

    @property
    def space_orders(self) -> IntArray:
        """Mechanical order (n_space,) of each column: waves on the circle, from 1."""
        return np.arange(1, self.stator_born.shape[1] + 1)

    def stator_at_positions(self) -> ComplexArray:
        """Amplitudes (n_time, n_space) of the waves born in the stator at each position."""
        return np.asarray(np.fft.fft(self.stator_born, axis=0))

    def rotor_at_positions(self) -> ComplexArray:
        """Amplitudes (n_time, n_space) of the waves born in the rotor at each position."""
        return np.asarray(np.fft.fft(self.rotor_born, axis=0))


def sixth_turn(slots: int, poles: int, rotor_period: int = 1) -> SixthTurn:
    """The turn by whole slots that stands for 60 electrical degrees.

    k slots, and j periods of P poles by which the rotor then is ahead of itself, are
    k 360 / slots = (60 + 180 P j) / pole pairs, mechanical.

    Raises:
        ValueError: where there is none; such a machine is refused when it is drawn.
    """
    for j in range(poles // rotor_period):
        numerator = slots * (1 + 3 * rotor_period * j)
        if numerator % (3 * poles) == 0:
            whole_period = math.lcm(2, rotor_period)  # poles after which rotor and currents repeat
            sign = -1.0 if rotor_period * j % 2 else 1.0
            return SixthTurn(numerator // (3 * poles), sign, 3 * whole_period)
    raise ValueError("the machine does not repeat every 60 electrical degrees")


def gap_waves(
    reader: CircleReader,
    fields: Sequence[CircleField],
    section: CrossSection,
) -> GapWaves:
    """The waves of fields at equal currents and equally spaced positions over 60 degrees.

    Args:
        reader: of the fields.
        fields: from position 0 on, end excluded.
        section: of the machine.

    Raises:
        ValueError: positions are not equally spaced over 60 electrical degrees from 0.
    """
    count, slots = len(fields), section.slots
    turn = sixth_turn(slots, section.poles, section.rotor_period)
    angle_el = section.pole_pairs * np.array([field.position for field in fields])
    if not np.allclose(angle_el, np.arange(count) * PERIOD_EL / count, rtol=0.0, atol=1e-9):
        raise ValueError("positions are not equally spaced over 60 electrical degrees from 0")
    potential, reaction = (
        whole_period(whole_circle(reader, np.array(values)), turn, slots)
        for values in ([f.potential for f in fields], [f.reaction for f in fields])
    )
    outer, inner = born_waves(potential, reaction)
    return GapWaves(
        pole_pairs=section.pole_pairs,
        slots=slots,
        radius=reader.radius,
        stack_length=section.stack_length,
        sixths=turn.sixths,
        stator_born=np.fft.ifft(outer, axis=0),
        rotor_born=np.fft.ifft(inner, axis=0),
    )


def born_waves(potential: FloatArray, reaction: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Amplitudes (..., n_space) in Wb/m of the waves born in the stator and in the rotor.

    Args:
        potential: (..., n_all) round the whole circle, in Wb/m.
        reaction: (..., n_all), int H_theta N dl in A.
    """
    n_all = potential.shape[-1]
    kept = slice(1, orders_kept(n_all) + 1)
    order = np.arange(n_all)[kept]
    a = np.fft.fft(potential, axis=-1)[..., kept] / n_all
    # mu0 R H_n / n with H_n = sum R_j e^(-j n theta_j) / (2 pi R)
    h = MU_0 * np.fft.fft(reaction, axis=-1)[..., kept] / (2.0 * math.pi * order)
    return 0.5 * (a - h), 0.5 * (a + h)


def whole_period(values: FloatArray, turn: SixthTurn, slots: int) -> FloatArray:
    """Values (n_pos, n_all) on the whole circle over 60 degrees continued to (n_time, n_all)."""
    places, rest = divmod(values.shape[1] * turn.slots, slots)
    assert rest == 0  # the circle has a whole number of edges a slot
    parts = [turn.sign**k * np.roll(values, k * places, axis=1) for k in range(turn.sixths)]
    return np.concatenate(parts)


def field_on_circle(waves: GapWaves, points: int) -> tuple[FloatArray, FloatArray]:
    """B_r and B_theta in T at each position (n_time, points) on evenly spaced points from angle 0.

    Args:
        waves: of the gap.
        points: round the whole circle; over twice the highest space order.
    """
    n = waves.space_orders
    outer, inner = waves.stator_at_positions(), waves.rotor_at_positions()
    spectra = np.zeros((2, outer.shape[0], points // 2 + 1), dtype=np.complex128)
    spectra[0][:, n] = 1j * n * (outer + inner) / waves.radius  # B_r = (1/r) dA/d theta
    spectra[1][:, n] = -n * (outer - inner) / waves.radius  # B_theta = -dA/dr
    radial, tangential = np.fft.irfft(spectra, points, axis=2) * points
    return radial, tangential
