"""A rotor beside the stator's axis: static eccentricity, by the whole circle.

The stator is moved against the rotor as a whole, the turning circle stays with the rotor's axis,
and the stator's half of the gap is stretched between the two. Moving a part as a whole changes no
gradient, so only the matrix of that half of the gap is made anew; rotor, stator, windings, pattern
and factors of the centred model hold on. The rotor turns about its own axis, which is what static
eccentricity is.

The stress averaged over the gap is for a ring of even thickness, so the torque of these solutions
is that on the circle.
"""

from dataclasses import dataclass, replace

import numpy as np

from .cache import Cache
from .field import MagneticModel, solve_point
from .gap_circle import CircleReader, circle_field, circle_torque, reader_of
from .kernel import quadrature, quadrature_places
from .model import StatorGap, linear_tangent
from .pattern import packed_entries, scatter, summed
from .steel import NU_0
from .types import FieldSolution, FloatArray

MOST_SHARE = 0.4  # of the gap: half of it is where the bore would touch the turning circle


@dataclass(frozen=True, slots=True, eq=False)
class EccentricModel:
    """A machine whose rotor stands beside the stator's axis."""

    model: MagneticModel  # its solutions' torque is not to be used
    reader: CircleReader  # about the rotor's axis
    offset: complex  # m, of the rotor's axis from the stator's, in the stator's frame


def eccentric_model(model: MagneticModel, offset: complex) -> EccentricModel:
    """The machine with its rotor's axis moved.

    Args:
        model: of the whole circle, centred.
        offset: of the rotor's axis from the stator's in m, x + jy in the stator's frame.

    Raises:
        ValueError: the model is of a sector, or the offset is over 40 % of the gap.
    """
    sector, gap = model.sector, model.bore_radius - model.rim_radius
    if not sector.is_full_circle:
        raise ValueError("a rotor beside the axis needs the whole circle")
    if abs(offset) > MOST_SHARE * gap:
        raise ValueError(
            f"an offset of {abs(offset) / gap:.3g} of the gap; accepted to {MOST_SHARE}"
        )
    n_rotor = sector.rotor.nodes.shape[0]
    elements = model.stator_gap.elements - n_rotor
    nodes = _moved(model, -offset)
    quad = quadrature(nodes, elements, 6)
    nu = np.full(elements.shape[0], NU_0)
    change = linear_tangent(quad, nu) - linear_tangent(model.stator_gap.quad, nu)
    numbering = model.numbering
    entries = packed_entries(
        numbering.dof, numbering.sign, model.stator_gap.elements, numbering.n_dof
    )
    moved = replace(
        model,
        fixed_values=model.fixed_values + summed(scatter(model.pattern, entries), change),
        stator_gap=StatorGap(
            model.stator_gap.elements, quad, quadrature_places(nodes, elements, 6)
        ),
        factors=Cache(1),
        positions=Cache(1),
        condensed=Cache(1),  # what has gone lies in this half of the gap too
        coarse=None,  # its gap is the centred one; a centred field is the better guess
    )
    return EccentricModel(moved, reader_of(model, elements, quad.grad, quad.weight), offset)


def solve_eccentric(
    machine: EccentricModel,
    i_d: float,
    i_q: float,
    position: float,
    start: FieldSolution | None = None,
) -> FieldSolution:
    """The field with given dq currents; the torque is that on the circle about the rotor's axis.

    Args:
        machine: the rotor beside the axis.
        i_d: peak d-axis current in A.
        i_q: peak q-axis current in A.
        position: mechanical angle in rad of the rotor's d axis ahead of phase A's axis.
        start: a neighbouring solution, as that of the centred model.

    Raises:
        NotConverged: when Newton's iteration fails, with its history.
    """
    model = machine.model
    solution = solve_point(model, i_d, i_q, position, start)
    torque = circle_torque(machine.reader, circle_field(machine.reader, solution))
    return replace(solution, torque=model.stack_length * torque)


def _moved(model: MagneticModel, shift: complex) -> FloatArray:
    """The stator's nodes (n_node, 2), the bore moved by `shift`, the turning circle held."""
    nodes, circle = model.sector.stator.nodes, model.sector.circle_radius
    share = (np.hypot(nodes[:, 0], nodes[:, 1]) - circle) / (model.bore_radius - circle)
    share = np.clip(share, 0.0, 1.0)
    return np.asarray(nodes + share[:, None] * np.array([shift.real, shift.imag]))
