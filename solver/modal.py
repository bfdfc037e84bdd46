"""Natural frequencies of a lamination in its own plane, from one of its periods.

    K u = omega^2 M u,  u on the far side = e^(2 pi j m / n) R u on the near side

A body of n like periods moves, in each of its modes, from period to period with one phase angle
2 pi m / n, R being the turn by a period; so the modes of the whole are those of one period for all
m = 0 .. n / 2. Between the two ends the eigenvalue problem is complex Hermitian, and each solution
stands for two modes of the whole that turn against each other. Source: derived (representations of
the cyclic group), as Thomas 1979. Plane stress, consistent mass, per metre of thickness, at rest:
neither centrifugal stiffening nor the Coriolis force is in it.

The eigenvalues next to a shift just below zero are found by Lanczos' or Arnoldi's iteration, then
once more within their own space, so that modes of one frequency come out orthogonal.
Axes: n_node, n_elem, 12 displacements of an element (x and y of each node in turn), n_mode.
"""

import math
from dataclasses import dataclass

import numpy as np
from scipy.linalg import eigh
from scipy.sparse import coo_matrix, csc_matrix, csr_matrix
from scipy.sparse.linalg import LinearOperator, eigs, eigsh, splu

from .elastic import ElasticBody
from .isoparametric import boundary_edges, shape, six_points
from .stiffness import element_stiffness
from .supports import SIDE_TOL, ComplexArray, CoupledSides, Supports
from .types import FloatArray, IntArray, PlanarMesh

# Of E / (rho R^2), near the square of the frequency at which a ring of radius R breathes.
SHIFT = -1e-2  # below zero, so that a loose body can be factorised too
RIGID = 1e-8  # eigenvalues below are rigid motions: rounding leaves 1e-11, thin rings have 1e-4
RIGID_MOTIONS = 3
START_SEED = 1  # of the iteration's first vector: the same modes at every run
LEAST_WAVES = 24  # orders round the circle that an edge's motion is taken apart into, at the least


@dataclass(frozen=True, slots=True, eq=False)
class Period:
    """One period of a body that repeats round the axis, as it is held; the whole has no sides."""

    body: ElasticBody
    supports: Supports  # with the sides coupled
    sides: CoupledSides
    periods: int  # of the whole


@dataclass(frozen=True, slots=True, eq=False)
class Mode:
    """One mode of the whole body, or two of one frequency that turn against each other.

    The complex displacement of period k is `shape` turned by k periods, times e^(2 pi j m k / n);
    its real part is the motion at one instant.
    """

    frequency: float  # Hz
    index: int  # m, cyclic index, 0 .. n / 2
    is_pair: bool  # whether it stands for two
    waves: int  # round the outer edge, those of most of its motion (nodal diameters)
    wave_share: float  # theirs of the mean square of the outer edge's motion
    # What the support sets in motion, as shares of the whole body's: of its moment of inertia when
    # turned, of its mass when shaken sideways. 0 where the body is free.
    turned_share: float
    shaken_share: float
    shape: ComplexArray  # (n_node, 2), (kg/m)^-1/2: of unit mass over the whole body
    is_rigid: bool


@dataclass(frozen=True, slots=True, eq=False)
class Matrices:
    """Stiffness in N/m and mass in kg of a period, per metre, for x and y of each node in turn."""

    period: Period
    stiffness: csr_matrix
    mass: csr_matrix
    scale: float  # E / (rho R^2), 1/s^2
    edge: IntArray  # (n_edge, 3), see `outer_edge`


def lowest_modes(period: Period, count: int) -> tuple[Mode, ...]:
    """The `count` lowest modes of the whole body by frequency, rigid motions left out.

    Two of one frequency that turn against each other are one; where the period is the whole body
    they are told twice.

    Raises:
        ValueError: where a node of a period lies on the axis, whose motion belongs to no period.
    """
    matrices = matrices_of(period)
    found = [
        (square, index, form)
        for index in range(period.periods // 2 + 1)
        for square, form in _solutions(matrices, index, count + RIGID_MOTIONS)
        if square >= RIGID * matrices.scale
    ]
    lowest = sorted(found, key=lambda one: one[:2])[:count]
    return tuple(_mode(matrices, index, square, form) for square, index, form in lowest)


def index_modes(period: Period, index: int, count: int) -> tuple[Mode, ...]:
    """The `count` lowest modes of one cyclic index, rigid motions among them, near 0 Hz.

    Raises:
        ValueError: where a node of a period lies on the axis, or there is no such index.
    """
    if not 0 <= index <= period.periods // 2:
        raise ValueError(f"cyclic index {index} of {period.periods} periods")
    matrices = matrices_of(period)
    solved = _solutions(matrices, index, count)
    return tuple(_mode(matrices, index, square, form) for square, form in solved)


def element_mass(body: ElasticBody) -> FloatArray:
    """Consistent mass (n_elem, 6, 6) in kg per metre of thickness: int rho N_i N_j dA."""
    n = shape(six_points()[0])
    mass = body.density[:, None] * body.quad.weight
    return np.asarray(np.einsum("eq,qi,qj->eij", mass, n, n))


def matrices_of(period: Period) -> Matrices:
    """Stiffness and mass of a period.

    Raises:
        ValueError: where a node of a period lies on the axis, whose motion belongs to no period.
    """
    body, mesh = period.body, period.body.mesh
    radius = np.hypot(mesh.nodes[:, 0], mesh.nodes[:, 1])
    if period.periods > 1 and np.any(radius < SIDE_TOL):
        raise ValueError("a node on the axis moves with no period: take the whole body")
    mass = np.zeros((len(mesh.elements), 6, 2, 6, 2))
    mass[:, :, 0, :, 0] = mass[:, :, 1, :, 1] = element_mass(body)
    dofs = np.stack([2 * mesh.elements, 2 * mesh.elements + 1], axis=-1).reshape(-1, 12)
    size = 2 * len(mesh.nodes)
    least = float(np.min(body.youngs_modulus / body.density))
    return Matrices(
        period,
        _assembled(dofs, element_stiffness(body), size),
        _assembled(dofs, mass.reshape(-1, 12, 12), size),
        least / float(radius.max()) ** 2,
        outer_edge(mesh, period.sides),
    )


def _assembled(dofs: IntArray, values: FloatArray, size: int) -> csr_matrix:
    rows, columns = np.broadcast_arrays(dofs[:, :, None], dofs[:, None, :])
    return csr_matrix((values.ravel(), (rows.ravel(), columns.ravel())), shape=(size, size))


def unknown_motions(period: Period, index: int) -> csr_matrix:
    """From the unknowns to x and y of each node (2 n_node, n_unknown); real where it can be."""
    supports, number = period.supports, period.supports.unknowns
    turn = 2.0 * math.pi * index / period.periods
    phase = np.ones(len(number), dtype=np.complex128)
    phase[period.sides.second] = np.exp(1j * turn)
    c, s = supports.frame.real, supports.frame.imag
    frame = np.stack([np.stack([c, -s], axis=1), np.stack([s, c], axis=1)], axis=1)
    is_real = index == 0 or 2 * index == period.periods
    factor = phase.real if is_real else phase
    value = factor[:, None, None] * frame  # (n_node, 2 of x y, 2 of the frame)
    rows = 2 * np.arange(len(number))[:, None, None] + np.array([0, 1])[:, None]
    rows, columns = np.broadcast_arrays(rows, number[:, None, :])
    kept = columns >= 0
    shape_of = (2 * len(number), int(number.max()) + 1)
    return coo_matrix((value[kept], (rows[kept], columns[kept])), shape=shape_of).tocsr()


def _solutions(matrices: Matrices, index: int, count: int) -> list[tuple[float, ComplexArray]]:
    """Squares of angular frequency in 1/s^2, rising, and shapes (n_node, 2) of unit mass."""
    period = matrices.period
    expansion = unknown_motions(period, index)
    adjoint = expansion.conj().T
    stiffness = csc_matrix(adjoint @ matrices.stiffness @ expansion)
    mass = csc_matrix(adjoint @ matrices.mass @ expansion)
    squares, vectors = _lowest(stiffness, mass, SHIFT * matrices.scale, count)
    shapes = (expansion @ vectors).T.reshape(count, -1, 2) / math.sqrt(period.periods)
    return list(zip(squares.tolist(), np.asarray(shapes, dtype=np.complex128), strict=True))


def _lowest(
    stiffness: csc_matrix, mass: csc_matrix, shift: float, count: int
) -> tuple[FloatArray, ComplexArray]:
    """Eigenvalues (n_mode,) in 1/s^2, rising, and vectors (n_unknown, n_mode) of unit mass."""
    size = stiffness.shape[0]
    if count >= size - 1:
        raise ValueError(f"{count} modes of a body with {size} unknowns")
    shifted = csc_matrix(stiffness - shift * mass)
    factor = splu(
        shifted,
        permc_spec="MMD_AT_PLUS_A",
        diag_pivot_thresh=0.0,
        options={"SymmetricMode": True},
    )
    inverse = LinearOperator(shifted.shape, matvec=factor.solve, dtype=shifted.dtype)
    start = np.random.default_rng(START_SEED).standard_normal(size).astype(shifted.dtype)
    iteration = eigs if np.iscomplexobj(shifted.data) else eigsh
    _, vectors = iteration(stiffness, count, M=mass, sigma=shift, OPinv=inverse, v0=start)
    within = vectors.conj().T
    squares, turned = eigh(within @ (stiffness @ vectors), within @ (mass @ vectors))
    return squares, vectors @ turned


def _mode(matrices: Matrices, index: int, square: float, form: ComplexArray) -> Mode:
    period = matrices.period
    waves, share = _edge_waves(matrices, index, form)
    turned, shaken = _support_shares(matrices, index, form)
    return Mode(
        frequency=math.sqrt(max(square, 0.0)) / (2.0 * math.pi),
        index=index,
        is_pair=0 < 2 * index < period.periods,
        waves=waves,
        wave_share=share,
        turned_share=turned,
        shaken_share=shaken,
        shape=form,
        is_rigid=square < RIGID * matrices.scale,
    )


def _support_shares(matrices: Matrices, index: int, form: ComplexArray) -> tuple[float, float]:
    """Effective moment of inertia and mass of a mode over those of the whole body.

    |phi^H M r|^2 / (r^H M r) for a phi of unit mass, r being a rigid motion (derived: the part of
    r that lies along phi). A shift belongs to index 1 as x + j y, to index n - 1 as x - j y; where
    these are one index both count: the sum is then that along the mode's own direction.
    """
    n, mesh = matrices.period.periods, matrices.period.body.mesh
    turning = np.stack([-mesh.nodes[:, 1], mesh.nodes[:, 0]], axis=1)
    shifts = [np.tile([1.0, sign * 1j], (len(mesh.nodes), 1)) for sign in (1, -1)]
    turned = _along(matrices, form, turning) if index == 0 else 0.0
    shaken = sum(
        _along(matrices, form, shift)
        for shift, own in zip(shifts, (1, -1), strict=True)
        if (index - own) % n == 0
    )
    return turned, float(shaken)


def _along(matrices: Matrices, form: ComplexArray, motion: FloatArray | ComplexArray) -> float:
    pushed = matrices.mass @ motion.ravel()
    whole = matrices.period.periods * np.vdot(motion.ravel(), pushed).real
    both = matrices.period.periods * np.vdot(form.ravel(), pushed)
    return float(abs(both) ** 2 / whole)


def _edge_waves(matrices: Matrices, index: int, form: ComplexArray) -> tuple[int, float]:
    """Waves round the outer edge that carry most of its motion, and their share of its square.

    c_h = 1 / (2 pi) int u e^(-j h theta) d theta, u radial and tangential, summed over h and -h;
    only h = m + a multiple of n are not 0 (derived).
    """
    edges, n = matrices.edge, matrices.period.periods
    place = (matrices.period.body.mesh.nodes @ [1.0, 1j])[edges]  # (n_edge, 3): start, end, middle
    step = np.angle(place[:, 1] / place[:, 0])
    weight = step[:, None] / (2.0 * math.pi) * np.array([1.0, 1.0, 4.0]) / 6.0 * n
    unit = place / np.abs(place)
    u_x, u_y = form[edges, 0], form[edges, 1]
    moved = np.stack([u_x * unit.real + u_y * unit.imag, u_y * unit.real - u_x * unit.imag])
    highest = max(LEAST_WAVES, 2 * n)
    orders = np.arange(-highest, highest + 1)
    orders = orders[(orders - index) % n == 0]
    content = np.einsum("ces,es,hes->ch", moved, weight, unit ** -orders[:, None, None])
    power = np.bincount(np.abs(orders), np.sum(np.abs(content) ** 2, axis=0))
    most = int(power.argmax())
    return most, float(power[most] / np.sum(weight * np.sum(np.abs(moved) ** 2, axis=0)))


def outer_edge(mesh: PlanarMesh, sides: CoupledSides) -> IntArray:
    """Nodes (n_edge, 3) of the body's outer edge, counter-clockwise: start, end, middle."""
    edges = boundary_edges(mesh)
    edges = edges[~np.isin(edges[:, 2], np.concatenate([sides.first, sides.second]))]
    following = {int(edge[0]): edge for edge in edges}
    if sides.first.size:
        at, last = int(sides.first[-1]), int(sides.second[-1])
    else:
        radius = np.hypot(mesh.nodes[:, 0], mesh.nodes[:, 1])
        at = last = int(edges[radius[edges[:, 0]].argmax(), 0])
    found = [following[at]]
    while int(found[-1][1]) != last:
        found.append(following[int(found[-1][1])])
    return np.array(found)
