"""Slopes of the flux linkages by the places of all nodes: the adjoint of the discrete field.

The field solves R(a, x) = r(a, x) - L(x)^T i - m(x) = 0, m being the magnets' load; the linkage of
an axis is psi = t . L(x) a with the weights t of the phases. With K = dR/da at the solution and
K lambda = L^T t,

    d psi / dx = t . dL/dx a + i . dL/dx lambda + lambda . dm/dx - lambda . dr/dx,

so each figure takes one linear solution with the factor of the last tangent, and none a key.
Everything is the derivative of the sums that `model` and `field` compute: the same quadrature
points, the same shear of the rotor's half of the gap. Source: derived; adjoint method, textbook
matter. Cost measured, one core, 15 000 unknowns: 60 ms for both axes.
Axes: n_node nodes of rotor and stator one after the other, 2 directions, 3 phases.
"""

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.section import CrossSection, Region, base_name
from lamwright.geometry.winding import WindingTable

from .design_motion import PartMotion, SizeMotion
from .field import MagneticModel, at_position, whole_energy
from .form_slope import flow_slope, form_slope, mean_slope, summed_slope
from .gap import rotor_place, sheared
from .integrals import phase_currents
from .model import region_reluctivity
from .pattern import node_values
from .steel import NU_0
from .types import FieldSolution, FloatArray, IntArray, ReluctivityLaw

LINEAR_POINTS = MAGNET_POINTS = 3  # quadrature of `model.magnetic_model`
GAP_POINTS = 6  # and of `field`


@dataclass(frozen=True, slots=True, eq=False)
class FieldSlope:
    """A figure and its slopes by all that a key can move, per m."""

    value: float
    rotor: FloatArray  # (n_node of rotor, 2)
    stator: FloatArray  # (n_node of stator, 2)
    rim_radius: float
    bore_radius: float
    stack_length: float
    # By each magnet's direction, x + iy of its unit vector; nothing where there are none.
    directions: Mapping[str, complex]


@dataclass(frozen=True, slots=True, eq=False)
class OutlineSlope:
    """The same gathered on the nodes that lie on outlines."""

    value: float
    rotor: FloatArray  # (n_on of rotor, 2)
    stator: FloatArray  # (n_on of stator, 2)
    rim_radius: float
    bore_radius: float
    stack_length: float
    directions: Mapping[str, complex]

    def by_key(
        self,
        rotor: FloatArray,
        stator: FloatArray,
        sizes: SizeMotion,
        turns: Mapping[str, complex] | None = None,
    ) -> float:
        """Slope by a key from the motion that it causes, all in m per unit of the key.

        Args:
            rotor: (n_on of rotor, 2).
            stator: (n_on of stator, 2).
            sizes: of radii and stack.
            turns: change of each magnet's direction per unit of the key, from `magnet_turns`.
        """
        turned = sum(
            (self.directions[name] * turn.conjugate()).real for name, turn in (turns or {}).items()
        )
        return (
            turned
            + float(np.sum(self.rotor * rotor) + np.sum(self.stator * stator))
            + self.rim_radius * sizes.rim_radius
            + self.bore_radius * sizes.bore_radius
            + self.stack_length * sizes.stack_length
        )


def on_outline(slope: FieldSlope, rotor: PartMotion, stator: PartMotion) -> OutlineSlope:
    """The slope with the mesh following its outline: one transposed extension a part."""
    return OutlineSlope(
        value=slope.value,
        rotor=rotor.extension.gathered(slope.rotor),
        stator=stator.extension.gathered(slope.stator),
        rim_radius=slope.rim_radius,
        bore_radius=slope.bore_radius,
        stack_length=slope.stack_length,
        directions=slope.directions,
    )


def mean_of(slopes: list[FieldSlope]) -> FieldSlope:
    """The mean of a figure over several positions."""
    return FieldSlope(
        value=float(np.mean([s.value for s in slopes])),
        rotor=np.mean([s.rotor for s in slopes], axis=0),
        stator=np.mean([s.stator for s in slopes], axis=0),
        rim_radius=float(np.mean([s.rim_radius for s in slopes])),
        bore_radius=float(np.mean([s.bore_radius for s in slopes])),
        stack_length=float(np.mean([s.stack_length for s in slopes])),
        directions={
            name: complex(np.mean([s.directions[name] for s in slopes]))
            for name in slopes[0].directions
        },
    )


def turned_forth(
    pair: tuple[FieldSlope, FieldSlope], angle_el: float
) -> tuple[FieldSlope, FieldSlope]:
    """Slopes of psi_d and psi_q of a skewed rotor's step as the whole rotor's frame sees them.

    Args:
        pair: of the step's own frame, `angle_el` rad ahead of the rotor's.
        angle_el: electrical.
    """
    d, q = pair
    cos, sin = math.cos(angle_el), math.sin(angle_el)
    return _combined(d, cos, q, -sin), _combined(d, sin, q, cos)


def _combined(
    first: FieldSlope, by_first: float, second: FieldSlope, by_second: float
) -> FieldSlope:
    def mixed(name: str) -> FloatArray:
        value = by_first * getattr(first, name) + by_second * getattr(second, name)
        return value  # type: ignore[no-any-return]

    return FieldSlope(
        value=float(mixed("value")),
        rotor=mixed("rotor"),
        stator=mixed("stator"),
        rim_radius=float(mixed("rim_radius")),
        bore_radius=float(mixed("bore_radius")),
        stack_length=float(mixed("stack_length")),
        directions={
            name: by_first * own + by_second * second.directions[name]
            for name, own in first.directions.items()
        },
    )


@dataclass(frozen=True, slots=True, eq=False)
class _Group:
    """Elements of one law with the places of their nodes."""

    nodes: FloatArray  # (n_node, 2), m
    elements: IntArray  # (n_elem, 6), numbers in the model
    n_qp: int
    law: ReluctivityLaw
    is_sheared: bool = False


def linkage_slopes(
    model: MagneticModel, section: CrossSection, winding: WindingTable, solution: FieldSolution
) -> tuple[FieldSlope, FieldSlope]:
    """Slopes of psi_d and psi_q (V s, of the whole machine) at constant dq currents.

    Args:
        model: the machine; its Newton tolerance bounds the slopes' error.
        section: the pole it was made of, for its materials.
        winding: its winding.
        solution: converged field of the model.
    """
    theta_e = model.sector.pole_pairs * solution.position
    currents = phase_currents(solution.i_d, solution.i_q, theta_e)
    place = at_position(model, solution.position)
    a_node = np.concatenate([solution.a_rotor, solution.a_stator])
    energy = whole_energy(model, place, currents @ model.linkage + model.magnet.load)
    _, state = energy.residual(a_node[model.representative])
    # psi_d = 2/3 sum psi_k cos(theta_k): the weights of an axis are its unit current's, times 2/3.
    weights = [2.0 / 3.0 * phase_currents(*axis, theta_e) for axis in ((1.0, 0.0), (0.0, 1.0))]
    loads = [weight @ model.linkage for weight in weights]
    # The second solution reuses the factor that the first has made.
    duals = [energy.solve_tangent(state, loads[0]), place.linear.solver.solve(loads[1])]
    values = (solution.psi_d, solution.psi_q)
    first, second = (
        _slope(model, section, winding, solution, _Dual(value, weight, currents, dual_node))
        for value, weight, dual_node in zip(
            values, weights, (node_values(place.dof, place.sign, d) for d in duals), strict=True
        )
    )
    return first, second


@dataclass(frozen=True, slots=True, eq=False)
class _Dual:
    value: float  # of the figure, V s
    weight: FloatArray  # (3,), of the phases' linkages in the figure
    currents: FloatArray  # (3,), A
    node: FloatArray  # (n_node,), nodal values of lambda


def _slope(
    model: MagneticModel,
    section: CrossSection,
    winding: WindingTable,
    solution: FieldSolution,
    dual: _Dual,
) -> FieldSlope:
    sector = model.sector
    a_node = np.concatenate([solution.a_rotor, solution.a_stator])
    n_rotor, n_node = len(sector.rotor.nodes), a_node.size
    rest = rotor_place(sector, model.axis_a + solution.position).rest
    total, gap = np.zeros((n_node, 2)), np.zeros((n_node, 2))
    for group in _groups(model, section, rest):
        fields = a_node[group.elements], dual.node[group.elements]
        slope = form_slope(group.nodes, group.elements, group.n_qp, fields, group.law)
        (gap if group.is_sheared else total)[:] -= summed_slope(n_node, group.elements, slope)
    for side, conductors in _coil_sides(model, winding):
        for weight, node in ((dual.weight, a_node), (dual.currents, dual.node)):
            elements = side + n_rotor
            slope = mean_slope(_nodes(model), elements, node[elements])
            total += float(conductors @ weight) * summed_slope(n_node, elements, slope)
    directions: dict[str, complex] = {}
    for name, elements, strength, along in _magnets(model, section):
        c = strength * np.array([-along.imag, along.real])  # B_r . curl lambda
        slope, by_c = flow_slope(_nodes(model), elements, MAGNET_POINTS, dual.node[elements], c)
        total += summed_slope(n_node, elements, slope)
        directions[name] = strength * complex(by_c[1], -by_c[0])
    at_rest, rim, circle = _unsheared(model, rest, gap[:n_rotor])
    total[:n_rotor] += at_rest
    per_machine = sector.sectors * model.stack_length
    return FieldSlope(
        value=dual.value,
        rotor=per_machine * total[:n_rotor],
        stator=per_machine * total[n_rotor:],
        # The circle's radius is the mean of rim and bore.
        rim_radius=per_machine * (rim + 0.5 * circle),
        bore_radius=per_machine * 0.5 * circle,
        stack_length=dual.value / model.stack_length,
        directions={name: per_machine * value for name, value in directions.items()},
    )


def _magnets(
    model: MagneticModel, section: CrossSection
) -> Iterator[tuple[str, IntArray, float, complex]]:
    """Name, elements, nu B_r in A/m and direction of each magnet."""
    rotor, law = model.sector.rotor, model.settings.magnet
    for region in section.rotor:
        if region.material == "magnet":
            assert law is not None  # the model was made with one
            elements = rotor.elements[rotor.elements_of(region.name)]
            yield region.name, elements, law.reluctivity * law.remanence, region.magnetisation


def _nodes(model: MagneticModel) -> FloatArray:
    return np.concatenate([model.sector.rotor.nodes, model.sector.stator.nodes])


def _groups(model: MagneticModel, section: CrossSection, rest: float) -> Iterator[_Group]:
    """All elements by law and quadrature, as the model groups them."""
    sector, iron_points = model.sector, model.settings.iron_points
    nodes = _nodes(model)
    turned = nodes.copy()
    n_rotor = len(sector.rotor.nodes)
    turned[:n_rotor] = sheared(sector.rotor.nodes, rest, model.rim_radius, sector.circle_radius)
    for mesh, regions, first, steel in (
        (sector.rotor, section.rotor, 0, model.iron.rotor_law),
        (sector.stator, section.stator, n_rotor, model.iron.stator_law),
    ):
        by_name = {region.name: region for region in regions}
        kinds = np.array([_kind(by_name[name]) for name in mesh.region_names])
        nus = np.array([region_reluctivity(by_name[n], model.settings) for n in mesh.region_names])
        nus[kinds != "linear"] = 0.0
        laws: list[tuple[str, float, int, ReluctivityLaw]] = [("iron", 0.0, iron_points, steel)]
        laws += [
            ("linear", nu, LINEAR_POINTS, constant_law(nu))
            for nu in np.unique(nus[kinds == "linear"]).tolist()
        ]
        laws.append(("gap", 0.0, GAP_POINTS, constant_law(NU_0)))
        for kind, nu, n_qp, law in laws:
            chosen = ((kinds == kind) & (nus == nu))[mesh.region_of_elem]
            elements = mesh.elements[chosen] + first
            if elements.size:
                yield _Group(turned if kind == "gap" else nodes, elements, n_qp, law, kind == "gap")


def _kind(region: Region) -> str:
    if base_name(region.name) == "gap_rotor":
        return "gap"
    return "iron" if region.material in ("rotor_steel", "stator_steel") else "linear"


def constant_law(nu: float) -> ReluctivityLaw:
    """The law of a linear material of reluctivity `nu` in m/H."""

    def law(b2: FloatArray) -> tuple[FloatArray, FloatArray]:
        return np.full_like(b2, nu), np.zeros_like(b2)

    return law


def _coil_sides(
    model: MagneticModel, winding: WindingTable
) -> Iterator[tuple[IntArray, FloatArray]]:
    """Elements of each coil side, numbered in the stator, and its conductors (3,)."""
    stator = model.sector.stator
    for s in range(winding.slots // model.sector.sectors):
        for layer in range(winding.layers):
            side = stator.elements_of(f"slot_{s}_layer_{layer}")
            yield stator.elements[side], winding.conductors[s, layer]


def _unsheared(
    model: MagneticModel, rest: float, slope: FloatArray
) -> tuple[FloatArray, float, float]:
    """Slopes by nodes before the shear (n_rotor, 2), by rim and by circle radius.

    The shear turns a node at radius r by alpha = -rest (r - rim) / (circle - rim); see `gap`.
    """
    nodes, rim, circle = model.sector.rotor.nodes, model.rim_radius, model.sector.circle_radius
    height = circle - rim
    radius = np.hypot(nodes[:, 0], nodes[:, 1])
    share = np.where(np.any(slope != 0.0, axis=1), (radius - rim) / height, 0.0)
    alpha = -rest * share
    cos, sin = np.cos(alpha), np.sin(alpha)
    x, y = nodes.T
    turned_x, turned_y = x * cos - y * sin, x * sin + y * cos
    g_x, g_y = slope.T
    moment = -rest / height * (g_y * turned_x - g_x * turned_y)  # slope by r
    outward = moment / np.maximum(radius, 0.5 * rim)  # nodes at the centre have no moment
    back = np.stack([g_x * cos + g_y * sin + outward * x, g_y * cos - g_x * sin + outward * y], 1)
    return back, float(np.sum(moment * (share - 1.0))), float(-np.sum(moment * share))
