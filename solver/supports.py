"""Supports of an elastic body, folded into the unknowns so that the matrix stays SPD.

Every node has a frame, a unit complex number: its displacement as a complex number is
u = frame * v, v being the unknown of its `master` node. So a roller is a turned frame with one
fixed component, and a coupled side is a side whose nodes take the unknowns of the other side in
frames turned by the sector's angle (elimination; source: derived from u(R x) = R u(x)).
Axes: n_node nodes; 2 components, along the frame's first direction and 90 degrees ahead of it.
"""

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from .types import FloatArray, IntArray, PlanarMesh

ComplexArray = npt.NDArray[np.complex128]
BoolArray = npt.NDArray[np.bool_]

SIDE_TOL = 1e-9  # m, far above rounding and far below any edge of a mesh
LOOSE_TOL = 1e-9  # of a unit motion, far above rounding


@dataclass(frozen=True, slots=True, eq=False)
class Supports:
    """How each node may move: master node, frame, fixed components and their values."""

    master: IntArray  # (n_node,), the node itself unless coupled
    frame: ComplexArray  # (n_node,), unit complex numbers
    fixed: BoolArray  # (n_node, 2), components in the frame; masters only
    value: FloatArray  # (n_node, 2), m, displacement of fixed components in the frame

    @property
    def unknowns(self) -> IntArray:
        """Number (n_node, 2) of each node's unknowns, -1 where the component is fixed."""
        own = self.master == np.arange(len(self.master))
        loose = ~self.fixed & own[:, None]
        number = np.full(loose.shape, -1, dtype=np.int64)
        number[loose] = np.arange(np.count_nonzero(loose))
        return number[self.master]


def unsupported(mesh: PlanarMesh) -> Supports:
    """A body that is held nowhere."""
    n_node = len(mesh.nodes)
    return Supports(
        master=np.arange(n_node),
        frame=np.ones(n_node, dtype=np.complex128),
        fixed=np.zeros((n_node, 2), dtype=np.bool_),
        value=np.zeros((n_node, 2)),
    )


def with_fixed(supports: Supports, nodes: IntArray, component: int, value: float = 0.0) -> Supports:
    """The same with one frame component of `nodes` held at `value` in m."""
    fixed, values = supports.fixed.copy(), supports.value.copy()
    masters = supports.master[nodes]
    fixed[masters, component] = True
    values[masters, component] = value
    return replace(supports, fixed=fixed, value=values)


def with_frame(supports: Supports, nodes: IntArray, frame: ComplexArray) -> Supports:
    """The same with the frames of `nodes` set; to be done before sides are coupled."""
    frames = supports.frame.copy()
    frames[nodes] = frame
    return replace(supports, frame=frames)


def with_roller(supports: Supports, nodes: IntArray, normal: complex) -> Supports:
    """The same with `nodes` on a symmetry line: no displacement along `normal`."""
    frame = np.full(len(nodes), normal / abs(normal))
    return with_fixed(with_frame(supports, nodes, frame), nodes, 0)


def with_radial(
    supports: Supports, mesh: PlanarMesh, nodes: IntArray, displacement: float
) -> Supports:
    """The same with `nodes` moved outward by `displacement` in m, free to slide round the axis."""
    place = mesh.nodes[nodes, 0] + 1j * mesh.nodes[nodes, 1]
    framed = with_frame(supports, nodes, place / np.abs(place))
    return with_fixed(framed, nodes, 0, displacement)


@dataclass(frozen=True, slots=True, eq=False)
class CoupledSides:
    """Two sides of a sector, the second the first turned by `angle` in rad."""

    first: IntArray  # (n_pair,), nodes from the axis outward
    second: IntArray  # (n_pair,), their partners
    angle: float


def coupled_sides(mesh: PlanarMesh, angle: float) -> CoupledSides:
    """Nodes on the side at angle 0 and their partners on the side at `angle`, by radius.

    A node on the axis belongs to neither.

    Raises:
        ValueError: where the sides do not carry the same nodes.
    """
    place = mesh.nodes[:, 0] + 1j * mesh.nodes[:, 1]
    back = place * np.exp(-1j * angle)
    first = np.flatnonzero((np.abs(place.imag) < SIDE_TOL) & (place.real > SIDE_TOL))
    second = np.flatnonzero((np.abs(back.imag) < SIDE_TOL) & (back.real > SIDE_TOL))
    first = first[np.argsort(place.real[first])]
    second = second[np.argsort(back.real[second])]
    if len(first) != len(second) or not np.allclose(
        place.real[first], back.real[second], rtol=0.0, atol=SIDE_TOL
    ):
        raise ValueError(f"sides at 0 and {angle:g} rad do not carry the same nodes")
    return CoupledSides(first, second, angle)


def with_coupled_sides(supports: Supports, mesh: PlanarMesh, sides: CoupledSides) -> Supports:
    """The same with the second side moving as the first, turned.

    Supports of the first side's nodes hold for their partners too. A node on the axis is held:
    a displacement that equals itself turned by less than 360 degrees is 0.
    """
    master, frame = supports.master.copy(), supports.frame.copy()
    master[sides.second] = sides.first
    frame[sides.second] = frame[sides.first] * np.exp(1j * sides.angle)
    coupled = replace(supports, master=master, frame=frame)
    axis = np.flatnonzero(np.hypot(mesh.nodes[:, 0], mesh.nodes[:, 1]) < SIDE_TOL)
    for component in (0, 1):
        coupled = with_fixed(coupled, axis, component)
    return coupled


def without_drift(supports: Supports, mesh: PlanarMesh, sides: CoupledSides) -> Supports:
    """The same held so that it neither turns about the axis nor, as a whole ring, moves aside.

    Loads in equilibrium leave these supports without a force. Nodes of a bore moved outward
    cannot move aside already.
    """
    if sides.first.size:
        return with_fixed(supports, sides.first[:1], 1)
    place = mesh.nodes[:, 0] + 1j * mesh.nodes[:, 1]
    one = np.argmin(np.abs(place), keepdims=True)
    if supports.fixed[one, 0].all():
        return with_fixed(supports, one, 1)
    across = np.argmax((place / -place[one]).real * (np.abs(place) < 1.01 * abs(place[one])))
    held = with_fixed(with_fixed(supports, one, 0), one, 1)
    return with_roller(held, np.array([across]), complex(1j * (place[across] - place[one[0]])))


def leaves_motion(supports: Supports, mesh: PlanarMesh) -> bool:
    """Whether some rigid motion of the body breaks no support.

    A factorisation alone does not tell: rounding gives a loose body a tiny pivot.
    """
    place = mesh.nodes[:, 0] + 1j * mesh.nodes[:, 1]
    reach = np.abs(place - place.mean()).max()
    motions = np.stack([np.ones_like(place), np.full_like(place, 1j), 1j * (place / reach)], axis=1)
    local = np.conj(supports.frame)[:, None] * motions
    coupled = (local - local[supports.master])[supports.master != np.arange(len(place))]
    breaks = [
        coupled.real,
        coupled.imag,
        local.real[supports.fixed[:, 0]],
        local.imag[supports.fixed[:, 1]],
    ]
    broken = np.concatenate(breaks)
    return bool(np.linalg.matrix_rank(broken, tol=LOOSE_TOL * len(broken) ** 0.5) < 3)


def scattered(
    supports: Supports, number: IntArray, reduced: FloatArray, *, held: bool = True
) -> FloatArray:
    """Displacement (n_node, 2) in m, in x and y, from the unknowns (n_unknown,) in m.

    `number` (n_node, 2) is `supports.unknowns`; prescribed displacements enter only if `held`.
    """
    value = supports.value[supports.master] if held else np.zeros(number.shape)
    local = np.where(number >= 0, reduced[number], value)
    turned = supports.frame * (local[:, 0] + 1j * local[:, 1])
    return np.stack([turned.real, turned.imag], axis=1)
