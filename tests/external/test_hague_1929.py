"""Slotless annulus with a sinusoidal current sheet on the bore, by separation of variables.

Source: Hague, "Electromagnetic Problems in Electrical Engineering", 1929 (from memory; re-derived):
with k = (mu - 1)/(mu + 1) and lam = (a/b)^(2p) the inductance of a three-phase sheet winding is
L = 1.5 pi mu0 (N/2)^2 (L_stack/p) (1 + k lam)/(1 - k lam), rotor radius a, bore b, H = 0 beyond.

For p = 1 a homogenised laminated rotor (mu_d along the sheets, mu_q across) has a uniform field,
d and q decouple and the torque is 1.5 p (L_d - L_q) i_d i_q at any angle.
"""

import dataclasses
import math

import numpy as np
import pytest
from annulus import Ring, RingMachine, sheet_model

from lamwright.solver.anisotropic import laminated_model, solve_laminated
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.integrals import flux_density
from lamwright.solver.laminate import Laminate
from lamwright.solver.steel import MU_0, linear_law
from lamwright.solver.types import Quadrature

TURNS, STACK = 100, 0.1  # series turns a phase; m
CURRENT = 10.0 / math.sqrt(2.0)  # A on each axis
# "H = 0 beyond the bore" is steel of this permeability; what it still takes is below 1e-7 of the
# gap's at 10 mm and 3e-6 at 0.5 mm.
OPEN_STATOR = linear_law(1e9)


def machine(pole_pairs: int, rotor: float, bore: float) -> RingMachine:
    gap_layers = 3 if bore - rotor < 2e-3 else 6
    return RingMachine(
        pole_pairs=pole_pairs,
        rotor=(Ring("rotor_iron", rotor, 12),),
        bore=bore,
        stator=(Ring("stator_iron", 1.2 * bore, 3),),
        stack_length=STACK,
        gap_layers=gap_layers,
        n_circle=48,
    )


def laminated(model: MagneticModel, mu_d: float, mu_q: float) -> MagneticModel:
    """The model with an anisotropic linear rotor: nu_x B_x^2 + nu_y B_y^2 by scaled gradients."""
    # B_x = dA/dy meets 1/mu_d, B_y = -dA/dx meets 1/mu_q.
    scale = np.array([1.0 / math.sqrt(mu_q), 1.0 / math.sqrt(mu_d)])
    iron = model.iron
    grad = iron.quad.grad.copy(order="K")
    grad[: iron.n_rotor] *= scale[:, None]
    quad = Quadrature(grad, iron.quad.weight)
    return dataclasses.replace(model, iron=dataclasses.replace(iron, quad=quad))


LAMINATED = {  # rotor and bore radius (m): L_d, L_q (H), torque (N m)
    (0.030, 0.040): (5.27283e-3, 2.42007e-3, 0.213957),
    (0.040, 0.0405): (0.111691, 3.60485e-3, 8.10645),
}
MU_D, MU_Q = 1200.4, 2.49813  # 40 % of gaps between sheets of 2000


@pytest.mark.parametrize("angle_deg", [0.0, 37.0, 123.4])
@pytest.mark.parametrize("radii", LAMINATED)
def test_laminated_rotor(radii: tuple[float, float], angle_deg: float) -> None:
    """Inductances within 1e-4, torque within 2e-4, at any angle of the rotor.

    123.4 degrees lies between two nodes of the circle: the rest of the angle by shearing the gap.
    """
    l_d, l_q, torque = LAMINATED[radii]
    model = laminated(
        sheet_model(machine(1, *radii), linear_law(1.0), OPEN_STATOR, TURNS), MU_D, MU_Q
    )
    solution = solve_point(model, CURRENT, CURRENT, math.radians(angle_deg))
    assert solution.psi_d / CURRENT == pytest.approx(l_d, rel=1e-4)
    assert solution.psi_q / CURRENT == pytest.approx(l_q, rel=1e-4)
    assert solution.torque == pytest.approx(torque, rel=2e-4)


def test_laminated_rotor_carries_a_uniform_field() -> None:
    """Rotor B of the second case: d 1.25685 T, q 0.0403650 T everywhere, within 1e-4."""
    model = laminated(
        sheet_model(machine(1, 0.040, 0.0405), linear_law(1.0), OPEN_STATOR, TURNS), MU_D, MU_Q
    )
    solution = solve_point(model, CURRENT, CURRENT, math.radians(20.0))
    rotor = model.sector.rotor
    b = flux_density(rotor, solution.a_rotor)[rotor.elements_of("rotor_iron")]
    assert b[:, 0] == pytest.approx(1.25685, rel=1e-4)
    assert b[:, 1] == pytest.approx(0.0403650, rel=3e-4)  # the small component: 1e-5 of the field


@pytest.mark.parametrize("angle_deg", [0.0, 37.0, 123.4])
@pytest.mark.parametrize("radii", LAMINATED)
def test_ideal_rotor_of_sheets(radii: tuple[float, float], angle_deg: float) -> None:
    """The yardstick's own solver, its sheets along a disc's flux lines: parallel for two poles.

    Saliency 2.17879 and 30.9835. Asked is 1 %; held to 1e-4, torque to 2e-4, as above.
    """
    l_d, l_q, torque = LAMINATED[radii]
    steel = linear_law(2000.0)
    model = sheet_model(machine(1, *radii), steel, OPEN_STATOR, TURNS)
    ideal = laminated_model(model, Laminate(steel, 0.4), 0.0)
    point = solve_laminated(ideal, CURRENT, CURRENT, math.radians(angle_deg))
    assert point.psi_d / CURRENT == pytest.approx(l_d, rel=1e-4)
    assert point.psi_d / point.psi_q == pytest.approx(l_d / l_q, rel=1e-4)
    assert point.torque == pytest.approx(torque, rel=2e-4)


@pytest.mark.parametrize(
    ("mu", "inductance"),
    [(1.0, 0.740220e-3), (5.0, 3.30857e-3), (1000.0, 28.6471e-3), (1e9, 29.7996e-3)],
)
def test_isotropic_four_pole_rotor(mu: float, inductance: float) -> None:
    """L within 1e-4 for p = 2, a = 40, b = 40.5 mm; torque below 1e-4 of the laminated rotor's.

    Gap 0.5 mm: the last row is mu0 ... coth(p ln(b/a)), rotor infinitely permeable.
    """
    model = sheet_model(machine(2, 0.040, 0.0405), linear_law(mu), OPEN_STATOR, TURNS)
    solution = solve_point(model, CURRENT, CURRENT, math.radians(11.1))
    assert solution.psi_d / CURRENT == pytest.approx(inductance, rel=1e-4)
    assert solution.psi_q / CURRENT == pytest.approx(inductance, rel=1e-4)
    assert abs(solution.torque) < 1e-4 * 8.10645


def test_inductance_converges_with_order_four() -> None:
    """Halving all elements: error of an energy by 16 for second-order elements (Strang & Fix).

    Curved middles keep the circles to fourth order; rate measured within 0.4 of 4.
    """
    p, a, b, mu = 2, 0.030, 0.040, 5.0
    k, lam = (mu - 1.0) / (mu + 1.0), (a / b) ** (2 * p)
    exact = 1.5 * math.pi * MU_0 * (TURNS / 2) ** 2 * STACK / p * (1 + k * lam) / (1 - k * lam)
    errors = []
    for n in (1, 2):
        coarse = RingMachine(
            pole_pairs=p,
            rotor=(Ring("rotor_iron", a, 4 * n),),
            bore=b,
            stator=(Ring("stator_iron", 1.2 * b, n),),
            stack_length=STACK,
            gap_layers=n,
            n_circle=4 * n,
        )
        model = sheet_model(coarse, linear_law(mu), OPEN_STATOR, TURNS)
        errors.append(abs(solve_point(model, 1.0, 0.0, 0.0).psi_d / exact - 1.0))
    assert math.log2(errors[0] / errors[1]) == pytest.approx(4.0, abs=0.4)
