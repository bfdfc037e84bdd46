"""Modes by cyclic symmetry: laws that hold for any body."""

import cmath
import math

import numpy as np
import pytest

from lamwright.solver.elastic import elastic_body
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.mesh_fold import Fan, unfold
from lamwright.solver.modal import Period, element_mass, index_modes, lowest_modes
from lamwright.solver.supports import (
    CoupledSides,
    coupled_sides,
    unsupported,
    with_coupled_sides,
    with_fixed,
)
from tests.plates import STEEL, at_radius, nodes_on, round_hole, sector

INNER, OUTER, PERIODS = 0.02, 0.06, 5
ANGLE = 2.0 * math.pi / PERIODS


def _region():
    """A fifth of a ring with a hole off its middle: no period is symmetric in itself."""
    return sector(INNER, OUTER, ANGLE, (round_hole(cmath.rect(0.045, 0.35 * ANGLE), 0.01),))


def _bodies(is_held: bool) -> tuple[Period, Period]:
    """One period, and the whole made of the same mesh."""
    region = _region()
    mesh = mesh_regions([region], lambda _: 0.008, turn_sides=ANGLE)
    fan = Fan((region,), ANGLE, PERIODS, np.zeros((PERIODS, 1), dtype=np.int64))
    found = []
    for one in (mesh, unfold(fan, mesh, ("plate",))):
        supports = unsupported(one)
        if is_held:
            bore = nodes_on(one, at_radius(INNER))
            supports = with_fixed(with_fixed(supports, bore, 0), bore, 1)
        if one is mesh:
            sides = coupled_sides(one, ANGLE)
            supports = with_coupled_sides(supports, one, sides)
        else:
            none = np.zeros(0, dtype=np.int64)
            sides = CoupledSides(none, none, 2.0 * math.pi)
        body = elastic_body(one, STEEL)
        found.append(Period(body, supports, sides, PERIODS if one is mesh else 1))
    return found[0], found[1]


@pytest.mark.parametrize("is_held", [False, True])
def test_one_period_knows_the_modes_of_the_whole(is_held):
    """The same mesh all round: equal to 1e-8, pairs twice; shares of a pair hold for each."""
    period, whole = _bodies(is_held)
    one = lowest_modes(period, 9)
    told = [mode for mode in one for _ in range(2 if mode.is_pair else 1)]
    all_round = lowest_modes(whole, len(told))
    assert [m.frequency for m in told] == pytest.approx([m.frequency for m in all_round], rel=1e-8)
    assert [m.turned_share for m in told] == pytest.approx(
        [m.turned_share for m in all_round], abs=1e-7
    )
    assert [m.shaken_share for m in told] == pytest.approx(
        [m.shaken_share for m in all_round], abs=1e-7
    )


def test_a_free_body_has_three_rigid_motions():
    """A turn of index 0 and a pair of shifts of index 1; held there is none.

    The whole has all three. Rounding leaves 1e-5 of the lowest frequency at the most.
    """
    period, whole = _bodies(is_held=False)
    lowest = lowest_modes(period, 1)[0].frequency
    for body, index, count in ((period, 0, 1), (period, 1, 1), (period, 2, 0), (whole, 0, 3)):
        modes = index_modes(body, index, 5)
        rigid = [mode for mode in modes if mode.is_rigid]
        assert len(rigid) == count
        assert all(mode.frequency < 1e-5 * lowest for mode in rigid)
        assert all(m.turned_share < 1e-9 and m.shaken_share < 1e-9 for m in modes[count:])
    assert not any(mode.is_rigid for mode in index_modes(_bodies(is_held=True)[0], 0, 3))


def test_modes_are_orthogonal_and_of_unit_mass():
    """phi_i^H M phi_j over all periods = 1 for i = j, else 0, to rounding."""
    period, _ = _bodies(is_held=False)
    elements = period.body.mesh.elements
    forms = np.array([mode.shape for mode in index_modes(period, 2, 6)])[:, elements]
    product = np.einsum("meid,eij,nejd->mn", forms.conj(), element_mass(period.body), forms)
    assert PERIODS * product == pytest.approx(np.eye(6), abs=1e-9)


def test_all_modes_together_carry_the_whole_mass():
    """Effective shares of a held body sum up to 1 but for the mass that its support holds.

    The held nodes' own mass is a few percent of the whole; ninety modes have most of the rest.
    """
    period, _ = _bodies(is_held=True)
    turned = [m.turned_share for m in index_modes(period, 0, 60)]
    shaken = [m.shaken_share for m in index_modes(period, 1, 60)]
    assert 0.95 < sum(turned) < 1.0
    assert 0.9 < sum(shaken) < 1.0


def test_mass_of_the_elements_is_that_of_the_plate():
    """Sum N_i = 1: all entries add up to rho times the area, closed form."""
    period, _ = _bodies(is_held=False)
    area = 0.5 * ANGLE * (OUTER**2 - INNER**2) - math.pi * 0.01**2
    total = float(element_mass(period.body).sum())
    assert total == pytest.approx(STEEL.density * area, rel=1e-5)


def test_a_wrong_index_is_refused():
    """Five periods have indices 0 to 2."""
    period, _ = _bodies(is_held=False)
    with pytest.raises(ValueError, match=r"^cyclic index 3 of 5 periods$"):
        index_modes(period, 3, 1)


def test_a_period_with_a_node_on_the_axis_is_refused():
    """That node belongs to all periods at once."""
    mesh = mesh_regions([sector(0.0, OUTER, ANGLE)], lambda _: 0.02, turn_sides=ANGLE)
    sides = coupled_sides(mesh, ANGLE)
    supports = with_coupled_sides(unsupported(mesh), mesh, sides)
    with pytest.raises(ValueError, match="a node on the axis moves with no period"):
        lowest_modes(Period(elastic_body(mesh, STEEL), supports, sides, PERIODS), 1)
