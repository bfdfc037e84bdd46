"""Saturating yoke behind a thin smooth gap, against its one-dimensional equation.

Rotor infinitely permeable, gap 0.5 mm, yoke of S19 from 40 to 52 mm (mean radius 46 mm), current
sheet K0 cos 2 theta on the bore: (g/(mu0 R)) A'' = H(A/h_y)(R + h_y/2) - K0 R cos 2 theta (derived:
Ampere's law round yoke and gap). The full two-dimensional values are from an independent solution
of order 3 on curved elements.
"""

import math

import pytest
from annulus import Ring, RingMachine, sheet_model
from steel_s19 import s19_exact

from lamwright.solver.field import solve_point
from lamwright.solver.steel import linear_law

BORE, YOKE, TURNS = 0.040, 0.012, 100  # m, m, series turns

CASES = {  # K0 (A/m): first harmonic of A at the bore (Wb/m), one-dimensional and full
    5e3: (4.86932e-3, 4.82802e-3),
    2e4: (18.8791e-3, 18.7019e-3),
    4e4: (24.5879e-3, 24.5404e-3),
}


@pytest.mark.parametrize("k_0", CASES)
def test_yoke_saturates(k_0: float) -> None:
    """Within 0.1 % of the two-dimensional value and 1.2 % of the one-dimensional equation.

    Without saturation A would be 5.02655e-3 Wb/m per 5e3 A/m: at 4e4 it keeps 61 % of that.
    """
    machine = RingMachine(
        pole_pairs=2,
        rotor=(Ring("rotor_iron", BORE - 0.5e-3, 6),),
        bore=BORE,
        stator=(Ring("stator_iron", BORE + YOKE, 10),),
        stack_length=1.0,
        gap_layers=2,
        n_circle=48,
    )
    model = sheet_model(machine, linear_law(1e8), s19_exact(), TURNS)
    # K0 = 1.5 (N/2) I / b and psi = pi (N/2) L A_1, derived.
    current = k_0 * BORE / (0.75 * TURNS)
    a_1 = solve_point(model, current, 0.0, 0.0).psi_d / (0.5 * math.pi * TURNS)
    one_dimensional, full = CASES[k_0]
    assert a_1 == pytest.approx(full, rel=1e-3)
    assert a_1 == pytest.approx(one_dimensional, rel=1.2e-2)
