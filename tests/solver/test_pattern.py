"""Scatter into the fixed pattern against the plain product T' K T of a dense assembly."""

import numpy as np
import pytest
from annulus import Ring, RingMachine, ring_sector, sheet_model
from scipy.sparse import csc_matrix

from lamwright.solver.field import Position, at_position
from lamwright.solver.gap import sheared
from lamwright.solver.kernel import PACKED_COLUMNS, PACKED_ROWS, quadrature
from lamwright.solver.model import MagneticModel, linear_tangent
from lamwright.solver.pattern import node_values, number_unknowns, turned_ends, turned_numbering
from lamwright.solver.steel import NU_0, linear_law
from lamwright.solver.types import FloatArray

MACHINE = RingMachine(
    pole_pairs=3,
    rotor=(Ring("rotor_iron", 0.039, 2),),
    bore=0.040,
    stator=(Ring("stator_iron", 0.050, 2),),
    stack_length=0.1,
    gap_layers=2,
    n_circle=5,
)
EDGE = np.pi / 15.0  # rad
# The coarsest possible disc: one element of its fan may carry both sides of the pole.
COARSE = RingMachine(3, MACHINE.rotor, 0.040, MACHINE.stator, 0.1, 1, n_circle=3)


@pytest.fixture(scope="module")
def model() -> MagneticModel:
    return sheet_model(MACHINE, linear_law(1.0), linear_law(1.0), 100)


def lower_matrix(place: Position, values: FloatArray) -> csc_matrix:
    """The lower triangle with these values in the whole pattern."""
    pattern = place.linear.pattern
    n_dof = pattern.indptr.size - 1
    return csc_matrix((values, pattern.indices, pattern.indptr), shape=(n_dof, n_dof))


def dense_matrix(model: MagneticModel, angle: float) -> FloatArray:
    """T' K T for a machine of air: K of both meshes, T from nodes to unknowns with signs."""
    sector = model.sector
    shift = round(angle / EDGE)
    rotor = sheared(sector.rotor.nodes, angle - shift * EDGE, MACHINE.rim, sector.circle_radius)
    nodes = np.concatenate([rotor, sector.stator.nodes])
    elements = np.concatenate(
        [sector.rotor.elements, sector.stator.elements + sector.rotor.nodes.shape[0]]
    )
    k = np.zeros((nodes.shape[0], nodes.shape[0]))
    # Three points as the model takes them, six in the rotor's half of the gap.
    for n_qp in (3, 6):
        gap = np.isin(np.arange(elements.shape[0]), sector.rotor.elements_of("gap_rotor"))
        own = elements[gap if n_qp == 6 else ~gap]
        packed = linear_tangent(quadrature(nodes, own, n_qp), np.full(own.shape[0], NU_0))
        for entry, i, j in zip(packed, PACKED_ROWS, PACKED_COLUMNS, strict=True):
            np.add.at(k, (own[:, i], own[:, j]), entry)
            if i != j:
                np.add.at(k, (own[:, j], own[:, i]), entry)
    dof, sign = turned_numbering(model.numbering, shift)
    t = np.zeros((nodes.shape[0], model.numbering.n_dof + 1))
    t[np.arange(nodes.shape[0]), dof] = sign
    t = t[:, :-1]
    return np.asarray(t.T @ k @ t)


@pytest.mark.parametrize("edges", [0.0, 1.0, 4.0, 5.0, 13.0, -2.0, 0.4, 7.5])
def test_pattern_holds_the_constrained_matrix(model: MagneticModel, edges: float) -> None:
    """All of T' K T and nothing else, at any shift, with the signs of the sides: to rounding."""
    place = at_position(model, edges * EDGE)
    iron = model.iron
    packed = linear_tangent(iron.quad, np.full(iron.dof.shape[0], NU_0))
    values = place.linear.values + iron.scatter @ packed.ravel()
    lower_dense = lower_matrix(place, values).toarray()
    whole = lower_dense + np.tril(lower_dense, -1).T
    expected = dense_matrix(model, edges * EDGE)
    assert np.abs(whole - expected).max() < 1e-12 * np.abs(expected).max()


def test_rows_rise_with_the_diagonal_first(model: MagneticModel) -> None:
    """What the solvers rely on, for every shift."""
    for shift in range(10):
        pattern = at_position(model, shift * EDGE).linear.pattern
        for k in range(model.numbering.n_dof):
            rows = pattern.indices[pattern.indptr[k] : pattern.indptr[k + 1]]
            assert rows[0] == k
            assert np.all(np.diff(rows) > 0)


@pytest.mark.parametrize("shift", [0, 3, 5, 11])
def test_middles_know_their_corners(model: MagneticModel, shift: int) -> None:
    """A mid-side unknown is coupled to both its ends, wherever the rotor stands."""
    ends = turned_ends(model.numbering, model.ends, shift)
    place = at_position(model, shift * EDGE)
    # The pattern alone: steel's entries come with its state.
    lower = lower_matrix(place, np.ones(place.linear.values.size))
    coupled = (lower + lower.T).tocsr()
    n_dof = model.numbering.n_dof
    middles = np.flatnonzero(ends[:, 0] != np.arange(n_dof))
    assert middles.size > n_dof / 2
    pairs = [(k, end) for k in middles for end in ends[k] if end < n_dof]
    rows, columns = np.array(pairs).T
    assert np.all(np.asarray(coupled[rows, columns]) != 0.0)


@pytest.mark.parametrize("machine", [MACHINE, COARSE])
def test_sides_are_tied_with_a_minus(machine: RingMachine) -> None:
    """A node on the far side is minus its partner; A = 0 in the centre and on the outer circle."""
    sector = ring_sector(machine)
    numbering = number_unknowns(sector)
    a = node_values(
        numbering.dof, numbering.sign, np.random.default_rng(3).normal(size=numbering.n_dof)
    )
    n_rotor = sector.rotor.nodes.shape[0]
    for nodes, values in (
        (sector.rotor.nodes, a[:n_rotor]),
        (sector.stator.nodes, a[n_rotor:]),
    ):
        radius, angle = np.hypot(*nodes.T), np.arctan2(nodes[:, 1], nodes[:, 0])
        away = radius > 1e-9
        near = np.flatnonzero(away & (np.abs(angle) < 1e-9))
        far = np.flatnonzero(away & (np.abs(angle - np.pi / 3.0) < 1e-9))
        near, far = near[np.argsort(radius[near])], far[np.argsort(radius[far])]
        assert near.size == far.size > 2
        assert values[far] == pytest.approx(-values[near], rel=1e-15)
        assert np.all(values[~away] == 0.0)
        assert np.all(values[radius > 0.0499999] == 0.0)
    assert np.unique(numbering.dof).size == numbering.n_dof + 1


def test_sides_that_do_not_match_are_refused(model: MagneticModel) -> None:
    """A node missing on one side would leave a tear in the field."""
    sector = model.sector
    nodes = sector.rotor.nodes.copy()
    nodes[np.abs(np.hypot(*nodes.T) - 0.0195) < 1e-6] *= 1.0 + 1e-3 * np.random.default_rng(
        0
    ).random((np.sum(np.abs(np.hypot(*nodes.T) - 0.0195) < 1e-6), 1))
    torn = type(sector)(
        rotor=type(sector.rotor)(
            nodes, sector.rotor.elements, sector.rotor.region_of_elem, sector.rotor.region_names
        ),
        stator=sector.stator,
        pole_pairs=3,
        circle_radius=sector.circle_radius,
        n_circle=5,
    )
    with pytest.raises(ValueError, match=r"sides of the sector: .* do not match"):
        number_unknowns(torn)
