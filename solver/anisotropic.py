"""Fields with a rotor of sheets along curves: a `Laminate` with a direction at every place.

The rotor's gradients are turned into the frame of the sheets at each quadrature point, once: there
the first component is B_d and the second -B_q, and the law knows no place. The stator keeps its
steel. The energy is convex, and Newton's plain iteration finds its least. Readable twin: the weak
forms in x and y of tests/solver/test_anisotropic.py.

Directions of the ideal rotor: the flux lines of a solid disc round its shaft
(`geometry.flux_lines`), w(z) = z^p - s / z^p in the frame of the q axis, along i conj(w').
For p = 1 without shaft they are parallel lines.
"""

import math
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from .field import MagneticModel, Position, at_position
from .integrals import dq_values, gap_torque, phase_currents
from .kernel import flux_state, packed_products, quadrature_places, weighted
from .laminate import Laminate
from .newton import NewtonSettings, minimise
from .pattern import node_values, summed
from .types import FloatArray, NewtonReport, Quadrature

ComplexArray = npt.NDArray[np.complex128]
TINY = 1e-300  # keeps 0/0 out where two lines meet


@dataclass(frozen=True, slots=True, eq=False)
class LaminatedModel:
    """A machine's model, its rotor's gradients turned into the frame of the sheets."""

    model: MagneticModel  # its rotor's law is not used
    laminate: Laminate


@dataclass(frozen=True, slots=True, eq=False)
class LaminatedPoint:
    """A field at one operating point, of the whole machine, without end winding."""

    i_d: float
    i_q: float
    position: float  # mechanical rad
    a: FloatArray  # (n_dof,), a start for a neighbour at the same position
    psi_d: float
    psi_q: float
    torque: float  # N m, Maxwell stress
    newton: NewtonReport


@dataclass(frozen=True, slots=True, eq=False)
class TensorState:
    """Field strength and its slopes at the quadrature points of the iron, in the elements' frame.

    Axes: n_qp quadrature points, n_elem elements.
    """

    h: FloatArray  # (n_elem, n_qp, 2), turned as grad A is, A/m
    d_xx: FloatArray  # (n_qp, n_elem), m/H
    d_xy: FloatArray
    d_yy: FloatArray


def disc_directions(places: ComplexArray, pole_pairs: int, shaft_radius: float) -> ComplexArray:
    """Unit vectors along the flux lines of a solid disc round its shaft, d axis at angle 0.

    Args:
        places: x + iy in m, any shape, not 0 where there is no shaft and p > 1.
        pole_pairs: of the rotor.
        shaft_radius: in m; 0 for none.
    """
    turn = np.exp(0.5j * math.pi / pole_pairs)  # the q axis
    # In units of the shaft or of the farthest place: powers of metres would underflow.
    unit = shaft_radius or float(np.abs(places).max(initial=1e-9))
    z = places / (turn * unit)
    slope = z ** (pole_pairs - 1) + (z ** (-pole_pairs - 1) if shaft_radius else 0.0)
    along = 1j * np.conj(slope)
    found: ComplexArray = turn * along / np.maximum(np.abs(along), TINY)
    return found


def laminated_model(
    model: MagneticModel, laminate: Laminate, shaft_radius: float
) -> LaminatedModel:
    """The model with sheets along a disc's flux lines where its rotor has steel.

    Args:
        model: of a machine whose rotor's steel is the region `rotor_iron` alone.
        laminate: the rotor's material.
        shaft_radius: in m, that the sheets run round.
    """
    rotor, iron = model.sector.rotor, model.iron
    elements = rotor.elements[rotor.elements_of("rotor_iron")]
    if len(elements) != iron.n_rotor:
        raise ValueError("rotor: steel outside the region rotor_iron")
    at = quadrature_places(rotor.nodes, elements, iron.quad.weight.shape[1])
    along = disc_directions(at[..., 0] + 1j * at[..., 1], model.sector.pole_pairs, shaft_radius)
    t_x, t_y = along.real[..., None], along.imag[..., None]  # (n_rotor, n_qp, 1)
    grad = iron.quad.grad.copy(order="K")
    g_x, g_y = (iron.quad.grad[: iron.n_rotor, :, k] for k in (0, 1))
    # B = (dA/dy, -dA/dx): B_d = B . t, B_q = B . (-t_y, t_x)
    grad[: iron.n_rotor, :, 0] = t_x * g_y - t_y * g_x
    grad[: iron.n_rotor, :, 1] = t_x * g_x + t_y * g_y
    turned = replace(iron, quad=Quadrature(grad, iron.quad.weight))
    return LaminatedModel(replace(model, iron=turned), laminate)


@dataclass(frozen=True, slots=True, eq=False)
class _LaminatedEnergy:
    """Energy of the field less that of the currents, by its derivatives."""

    laminated: LaminatedModel
    position: Position
    load: FloatArray  # (n_dof,), A

    def residual(self, a: FloatArray) -> tuple[FloatArray, TensorState]:
        """Residual (n_dof,) in A and the state of rotor and stator."""
        iron = self.laminated.model.iron
        state = tensor_state(self.laminated, iron.sign * np.append(a, 0.0)[iron.dof])
        r = summed(iron.residual_scatter, weighted(iron.quad, state.h).T)
        r += self.position.linear.times(a)
        r -= self.load
        return r, state

    def solve_tangent(self, state: TensorState, rhs: FloatArray) -> FloatArray:
        """Solution of the tangent system for a right side (n_dof,)."""
        iron, weight = self.laminated.model.iron, self.laminated.model.iron.quad.weight.T
        tensor = (weight * entry for entry in (state.d_xx, state.d_xy, state.d_yy))
        values = summed(iron.scatter, packed_products(iron.quad, *tensor))
        values += self.position.linear.values
        self.position.linear.solver.factorise(values)
        return self.position.linear.solver.solve(rhs)


def tensor_state(laminated: LaminatedModel, a_elem: FloatArray) -> TensorState:
    """State of the iron at nodal potentials (n_elem, 6) in Wb/m."""
    iron, n_rotor = laminated.model.iron, laminated.model.iron.n_rotor
    flux = flux_state(
        Quadrature(iron.quad.grad[n_rotor:], iron.quad.weight[n_rotor:]),
        a_elem[n_rotor:],
        iron.stator_law,
    )
    s_x, s_y = flux.grad_a.transpose(2, 1, 0)
    nu, bend = flux.nu.T, 2.0 * flux.dnu.T
    grad = iron.quad.grad[:n_rotor].transpose(1, 2, 3, 0)
    b_d, minus_b_q = np.einsum("qdie,ie->dqe", grad, a_elem[:n_rotor].T)
    rotor = laminated.laminate.state(b_d, -minus_b_q)
    h_x = np.concatenate([rotor.h_d, nu * s_x], axis=1)
    h_y = np.concatenate([-rotor.h_q, nu * s_y], axis=1)
    return TensorState(
        h=np.stack([h_x.T, h_y.T], axis=-1),
        d_xx=np.concatenate([rotor.dd, nu + bend * s_x**2], axis=1),
        d_xy=np.concatenate([-rotor.dq, bend * s_x * s_y], axis=1),
        d_yy=np.concatenate([rotor.qq, nu + bend * s_y**2], axis=1),
    )


def solve_laminated(
    laminated: LaminatedModel,
    i_d: float,
    i_q: float,
    position: float,
    start: FloatArray | None = None,
    settings: NewtonSettings | None = None,
) -> LaminatedPoint:
    """The field with given dq currents at one rotor position.

    Args:
        laminated: the machine.
        i_d: peak d-axis current in A, not 0 together with i_q.
        i_q: peak q-axis current in A.
        position: mechanical rad of the rotor's d axis ahead of phase A's axis.
        start: (n_dof,) potentials of a neighbour at the same position.
        settings: of the iteration; the model's own by default.

    Raises:
        NotConverged: when Newton's iteration fails, with its history.
    """
    model = laminated.model
    theta_e = model.sector.pole_pairs * position
    place = at_position(model, position)
    load = phase_currents(i_d, i_q, theta_e) @ model.linkage
    energy = _LaminatedEnergy(laminated, place, load)
    first = np.zeros(load.size) if start is None else start
    use = settings or model.settings.newton
    a, _, report = minimise(energy, first, float(np.linalg.norm(load)), use)
    per_machine = model.sector.sectors * model.stack_length
    psi_d, psi_q = dq_values(per_machine * (model.linkage @ a), theta_e)
    a_node = node_values(place.dof, place.sign, a)
    thickness = model.bore_radius - model.rim_radius
    in_gap = a_node[place.gap_elements]
    torque = per_machine * gap_torque(place.gap_quad, place.gap_places, in_gap, thickness)
    return LaminatedPoint(i_d, i_q, position, a, psi_d, psi_q, torque, report)


def laminated_slope(
    laminated: LaminatedModel, point: LaminatedPoint, di_d: float, di_q: float
) -> tuple[float, float]:
    """Changes of psi_d and psi_q in V s for small changes of the currents in A, position fixed.

    Exact for the discrete field, as `chains.linkage_slope`.
    """
    model = laminated.model
    theta_e = model.sector.pole_pairs * point.position
    load = phase_currents(point.i_d, point.i_q, theta_e) @ model.linkage
    energy = _LaminatedEnergy(laminated, at_position(model, point.position), load)
    _, state = energy.residual(point.a)
    change = energy.solve_tangent(state, phase_currents(di_d, di_q, theta_e) @ model.linkage)
    per_machine = model.sector.sectors * model.stack_length
    return dq_values(per_machine * (model.linkage @ change), theta_e)
