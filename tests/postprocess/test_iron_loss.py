"""Iron loss of a machine's fields, its coefficients, and their map over currents."""

import functools

import numpy as np
import pytest

from lamwright.geometry.curves import area
from lamwright.postprocess.iron_loss import (
    IronLaws,
    iron_laws,
    loss_coefficients,
    loss_density,
    loss_of_orders,
)
from lamwright.postprocess.iron_loss_map import iron_loss, iron_loss_map
from lamwright.postprocess.loss_surface import loss_surface
from lamwright.postprocess.torque import waveform_positions
from lamwright.solver.field import solve_point
from lamwright.solver.iron_period import steel_points
from lamwright.solver.types import FieldSolution
from tests.shipped import shipped, shipped_model

NAME = "demo_24s4p_arc"
OMEGA = 2.0 * np.pi * 50.0


@functools.cache
def _fields() -> tuple[FieldSolution, ...]:
    model, one = shipped_model(NAME, 2.0), shipped(NAME, 2.0)
    positions = waveform_positions(one.section.pole_pairs, 12)
    return tuple(solve_point(model, 0.5 * one.rated, 0.8 * one.rated, x) for x in positions)


@functools.cache
def _laws() -> IronLaws:
    one = shipped(NAME, 2.0)
    surface = loss_surface(one.machine.rotor_steel)
    factor = one.machine.design.rotor.stacking_factor
    return iron_laws(
        shipped_model(NAME, 2.0), surface, surface, slots=24, rotor_period=1, stacking_factor=factor
    )


@functools.cache
def _coefficients() -> np.ndarray:
    return loss_coefficients(shipped_model(NAME, 2.0), _fields(), _laws())


def test_masses_are_those_of_the_sheets():
    """Area by closed form times length, stacking factor and density.

    1e-4, as the meshed corners are curves of second order.
    """
    one = shipped(NAME, 2.0)
    for part, regions in ((_laws().rotor, one.section.rotor), (_laws().stator, one.section.stator)):
        iron = [region for region in regions if region.material.endswith("_steel")]
        own = sum(area(r.outer) + sum(area(hole) for hole in r.holes) for r in iron)
        mass = 4 * own * 0.1 * 0.97 * 7650.0
        assert part.mass.sum() == pytest.approx(mass, rel=1e-4)


def test_orders_are_those_theory_says():
    """Odd ones in the stator, 6 k in the rotor.

    The stator's flux density changes sign after half a period. The rotor's strongest order is that
    of the slots, 12 a pole pair.
    """
    _, loss = loss_of_orders(_coefficients(), _laws(), OMEGA)
    of_order = loss.sum(axis=2)  # (3, 36)
    order = np.arange(1, 37)
    assert of_order[1:, order % 2 == 0].sum() < 1e-6 * of_order[1:].sum()
    assert of_order[0, order % 6 != 0].sum() == 0.0
    assert order[np.argmax(of_order[0])] == 12
    assert order[np.argmax(of_order[2])] == 1


def test_loss_density_sums_to_the_loss():
    """Points' W/kg times their mass are the coefficients' loss.

    1 %: the skin factor of a mean permeability against each point's own.
    """
    laws, model = _laws(), shipped_model(NAME, 2.0)
    _, loss = loss_of_orders(_coefficients(), laws, OMEGA)
    density = loss_density(model, _fields(), laws, OMEGA)
    for own, part, total in zip(
        density, (laws.rotor, laws.stator), (loss[0].sum(), loss[1:].sum()), strict=True
    ):
        assert own[part.chosen] @ part.mass == pytest.approx(total, rel=0.01)
        assert np.all(own >= 0.0)
    rotor, _ = steel_points(model, 24, 1)
    assert density[0].size == rotor.area.size


def test_loss_rises_with_frequency_between_f_and_f_squared():
    """Hysteresis alone rises as f, eddy currents as f^2."""
    loss = [loss_of_orders(_coefficients(), _laws(), k * OMEGA)[1].sum() for k in (1.0, 2.0)]
    assert 2.0 < loss[1] / loss[0] < 4.0


def test_the_map_meets_its_grid_and_a_polynomial_between():
    """Splines of degree 3 are exact for coefficients that are even cubics of the currents."""
    i_d, i_q = np.linspace(0.0, 15.0, 7), np.linspace(0.0, 12.0, 6)
    share = (1.0 + 0.1 * i_d[:, None] ** 2) * (1.0 + 0.2 * i_q**2)
    grid = share[:, :, None, None, None] * _coefficients()
    loss_map = iron_loss_map(i_d, i_q, grid, _laws())
    _, loss = loss_of_orders(_coefficients(), _laws(), OMEGA)
    for d, q in ((7.3, 4.4), (-7.3, 4.4), (7.3, -4.4), (0.0, 0.0), (15.0, 12.0)):
        factor = (1.0 + 0.1 * d**2) * (1.0 + 0.2 * q**2)
        found = iron_loss(loss_map, np.array(d), np.array(q), np.array(-OMEGA))
        assert found[0] == pytest.approx(factor * loss[1:].sum(), rel=1e-9)
        assert found[1] == pytest.approx(factor * loss[0].sum(), rel=1e-9)
    stator, _ = iron_loss(loss_map, i_d[:, None], i_q, np.array(0.0))
    assert stator.shape == (7, 6)
    assert np.all(stator == 0.0)


def test_currents_outside_the_map_are_refused():
    """In one line with the range."""
    axis = np.array([0.0, 5.0, 10.0])
    grid = np.ones((3, 3, 1, 1, 1)) * _coefficients()
    loss_map = iron_loss_map(axis, axis, grid, _laws())
    with pytest.raises(ValueError, match="i_q: outside the map's 0 to 10 A"):
        iron_loss(loss_map, np.array(5.0), np.array(10.1), np.array(OMEGA))
    with pytest.raises(ValueError, match="not those of the currents' grid"):
        iron_loss_map(axis, axis, grid[:2], _laws())
