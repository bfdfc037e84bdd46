"""Fields with a rotor of sheets along curves: plain form, limits, derivatives, directions.

The closed form of a slotless stator: tests/external/test_hague_1929.py.
"""

import cmath
import math

import numpy as np
import pytest
import skfem
from annulus import Ring, RingMachine, sheet_model
from skfem.helpers import grad
from steel_s19 import s19_exact

from lamwright.geometry.flux_lines import DiscLine
from lamwright.solver.anisotropic import (
    disc_directions,
    laminated_model,
    laminated_slope,
    solve_laminated,
    tensor_state,
)
from lamwright.solver.field import FieldSettings, MagneticModel, solve_point
from lamwright.solver.kernel import packed_indices, packed_products, quadrature_rule, weighted
from lamwright.solver.laminate import Laminate
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.steel import SteelLaw, linear_law
from lamwright.solver.types import Quadrature

OPEN_STATOR = linear_law(1e9)  # "H = 0 beyond the bore"
TIGHT = NewtonSettings(tolerance=1e-9)


def ring_model(
    pole_pairs: int,
    radii: tuple[float, float],
    law: SteelLaw,
    fineness: int = 4,
    shaft: float = 0.0,
) -> MagneticModel:
    """A slotless machine, stack 0.1 m, 100 turns: rotor and bore radius in m."""
    rotor, bore = radii
    rings = (Ring("rotor_iron", rotor, 2 * fineness),)
    if shaft:
        rings = (Ring("shaft", shaft, 2), *rings)
    machine = RingMachine(
        pole_pairs=pole_pairs,
        rotor=rings,
        bore=bore,
        stator=(Ring("stator_iron", 1.2 * bore, 3),),
        stack_length=0.1,
        gap_layers=3 if bore - rotor < 2e-3 else fineness,
        n_circle=8 * fineness,
    )
    return sheet_model(machine, law, OPEN_STATOR, 100, FieldSettings(newton=TIGHT))


def test_sheets_without_gaps_are_the_solid_rotor() -> None:
    """K = 0 on saturated steel, four poles: linkages of the isotropic solver, both to 1e-7."""
    steel = s19_exact()
    model = ring_model(2, (0.040, 0.0405), steel, shaft=0.012)
    solid = solve_point(model, 20.0, 15.0, 0.3)
    found = solve_laminated(laminated_model(model, Laminate(steel, 0.0), 0.012), 20.0, 15.0, 0.3)
    assert found.psi_d == pytest.approx(solid.psi_d, rel=1e-7)
    assert found.psi_q == pytest.approx(solid.psi_q, rel=1e-7)


def test_torque_is_that_of_the_linkages_where_nothing_is_slotted() -> None:
    """A smooth stator with a sinusoidal winding sees one coenergy at all angles, saturated or not.

    So T = 3/2 p (psi_d i_q - psi_q i_d) at every one; 1e-3, the Maxwell stress's own error here.
    """
    steel = s19_exact()
    model = ring_model(2, (0.040, 0.0405), steel, 6, shaft=0.012)
    laminated = laminated_model(model, Laminate(steel, 0.4), 0.012)
    for position in (0.0, 0.21):
        point = solve_laminated(laminated, 12.0, 20.0, position)
        by_linkage = 3.0 * (point.psi_d * 20.0 - point.psi_q * 12.0)
        assert by_linkage > 5.0
        assert point.torque == pytest.approx(by_linkage, rel=1e-3)
        assert point.newton.steps < 20


def test_slope_of_the_linkages_is_their_difference() -> None:
    """Central difference over 1 % of the current; errs by its third derivative, 1e-3."""
    steel = s19_exact()
    model = ring_model(2, (0.040, 0.0405), steel, shaft=0.012)
    laminated = laminated_model(model, Laminate(steel, 0.4), 0.012)
    at, step = (12.0, 20.0), (0.1, -0.2)
    middle = solve_laminated(laminated, *at, 0.1)
    ahead, behind = (
        solve_laminated(laminated, at[0] + s * step[0], at[1] + s * step[1], 0.1, middle.a)
        for s in (1.0, -1.0)
    )
    by_difference = (0.5 * (ahead.psi_d - behind.psi_d), 0.5 * (ahead.psi_q - behind.psi_q))
    found = laminated_slope(laminated, middle, *step)
    assert found == pytest.approx(by_difference, rel=2e-3)


def test_fast_form_is_the_plain_one() -> None:
    """The energy's variations as weak forms in x and y, in another library's elements: 1e-9.

    H = h_d t + h_q n with t along the sheets; residual int H . curl v, tangent by dH/dB.
    """
    steel = s19_exact()
    model = ring_model(2, (0.040, 0.0405), steel, 2, shaft=0.012)
    laminated = laminated_model(model, Laminate(steel, 0.4), 0.012)
    rotor, n_rotor = model.sector.rotor, model.iron.n_rotor
    elements = rotor.elements[rotor.elements_of("rotor_iron")]
    x, y = rotor.nodes.T
    nodal = 0.02 * np.sin(60.0 * x) + 1.3 * y * x / 0.04  # Wb/m, 0 to 2.5 T
    a_elem = nodal[elements]

    def frame(w):
        t = disc_directions(w.x[0] + 1j * w.x[1], 2, 0.012)
        b_x, b_y = grad(w.a)[1], -grad(w.a)[0]
        return t.real, t.imag, b_x * t.real + b_y * t.imag, b_y * t.real - b_x * t.imag

    @skfem.LinearForm
    def residual(v, w):
        t_x, t_y, b_d, b_q = frame(w)
        s = laminated.laminate.state(b_d, b_q)
        h_x, h_y = s.h_d * t_x - s.h_q * t_y, s.h_d * t_y + s.h_q * t_x
        return h_x * grad(v)[1] - h_y * grad(v)[0]

    @skfem.BilinearForm
    def tangent(u, v, w):
        t_x, t_y, b_d, b_q = frame(w)
        s = laminated.laminate.state(b_d, b_q)
        u_d, u_q = (c * grad(u)[1] - d * grad(u)[0] for c, d in ((t_x, t_y), (-t_y, t_x)))
        v_d, v_q = (c * grad(v)[1] - d * grad(v)[0] for c, d in ((t_x, t_y), (-t_y, t_x)))
        return s.dd * u_d * v_d + s.dq * (u_d * v_q + u_q * v_d) + s.qq * u_q * v_q

    points, weights = quadrature_rule(3)
    mesh = skfem.MeshTri2(rotor.nodes.T.copy(), elements.T.copy(), validate=False)
    basis = skfem.Basis(mesh, skfem.ElementTriP2(), quadrature=(points.T, weights))
    a = np.zeros(basis.N)
    a[basis.element_dofs] = a_elem.T
    field = basis.interpolate(a)
    stator = np.zeros((model.iron.dof.shape[0] - n_rotor, 6))
    state = tensor_state(laminated, np.concatenate([a_elem, stator]))
    quad = laminated.model.iron.quad
    own = weighted(quad, state.h)[:n_rotor]
    plain = residual.elemental(basis, a=field).tolocal()
    assert np.abs(own - plain).max() < 1e-9 * np.abs(plain).max()
    part = Quadrature(quad.grad[:n_rotor], quad.weight[:n_rotor])
    tensor = (part.weight.T * entry[:, :n_rotor] for entry in (state.d_xx, state.d_xy, state.d_yy))
    rows, columns = packed_indices(6)
    packed = packed_products(part, *tensor)
    local = tangent.elemental(basis, a=field).tolocal()
    assert np.abs(packed.T - local[:, rows, columns]).max() < 1e-9 * np.abs(local).max()


@pytest.mark.parametrize("pole_pairs", [2, 3, 5])
@pytest.mark.parametrize("shaft", [0.0, 0.012])
def test_directions_follow_a_barrier_of_flux_lines(pole_pairs: int, shaft: float) -> None:
    """Tangents of `streamline` barriers, in every pole; to rounding."""
    line = DiscLine(0.030, (shaft / 0.030) ** (2 * pole_pairs), pole_pairs)
    for pole in range(2 * pole_pairs):
        turn = cmath.rect(1.0, (pole + 0.5) * math.pi / pole_pairs)
        for parameter in (0.0, 0.3, 1.1):
            point, tangent = line.at(parameter)
            along = disc_directions(np.array([turn * point]), pole_pairs, shaft)[0]
            assert abs((along * (turn * tangent).conjugate()).imag) < 1e-9


def test_directions_of_two_poles_are_parallel_and_run_round_a_shaft() -> None:
    """P = 1 without shaft: along the d axis everywhere. With one: along its circle on it."""
    places = np.array([0.01 + 0.02j, -0.03j, 0.02 - 0.01j])
    assert np.abs(disc_directions(places, 1, 0.0).imag) == pytest.approx(0.0, abs=1e-12)
    on_shaft = 0.012 * np.exp(1j * np.array([0.3, 1.2, 2.0, 4.0]))
    radial = disc_directions(on_shaft, 2, 0.012) * np.conj(on_shaft) / 0.012
    assert radial.real == pytest.approx(0.0, abs=1e-9)
