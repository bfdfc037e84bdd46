"""The shaft under a lamination: a solid or hollow elastic disc whose rim fits the bore's nodes.

Its mesh is drawn in rings, each edge of the bore continued inward, so that every node of the bore
has a partner at the same place; where the bore has a keyway the rim goes on evenly. The shaft's own
groove is left out. Plane stress, per metre of sheets, as the lamination: a long shaft that cannot
shorten freely is a little stiffer.
Axes: n_node; n_edge edges of the bore with start, middle and end.
"""

import math
from dataclasses import dataclass

import numpy as np

from .elastic import ElasticBody, ElasticMaterial, elastic_body
from .stiffness import SupportedBody, supported
from .supports import (
    CoupledSides,
    coupled_sides,
    unsupported,
    with_coupled_sides,
    with_fixed,
    without_drift,
)
from .types import FloatArray, PlanarMesh

# Rings grow inward: a wave of the pressure round the rim dies within its own length.
GROWTH = 1.5
SOLID_SHARE = 0.25  # of the radius, inside of which a solid shaft is one ring of wedges
ANGLE_TOL = 1e-9  # rad, of two edges of the bore that meet
FULL_TOL = 1e-9  # rad


@dataclass(frozen=True, slots=True)
class Shaft:
    """What a lamination is pressed on; as thick as its bore."""

    material: ElasticMaterial
    bore_radius: float = 0.0  # m, 0 where it is solid
    expansion: float = 12e-6  # 1/K


@dataclass(frozen=True, slots=True, eq=False)
class ShaftDisc:
    """A shaft's disc of the lamination's sector, on supports that carry nothing."""

    body: ElasticBody
    held: SupportedBody
    sides: CoupledSides


def shaft_disc(shaft: Shaft, rim: FloatArray, radius: float, sector_angle: float) -> ShaftDisc:
    """The disc whose rim has the nodes of the bore.

    Args:
        shaft: of a bore smaller than `radius`.
        rim: (n_edge, 3), angles in rad of the start, middle and end of the bore's edges, rising
            within 0 and `sector_angle`.
        radius: of the rim in m.
        sector_angle: in rad, 2 pi for the whole disc.
    """
    is_full = abs(sector_angle - 2.0 * math.pi) < FULL_TOL
    angles = _filled(rim, sector_angle)
    is_solid = shaft.bore_radius == 0.0
    levels = _levels(angles, radius, shaft.bore_radius)
    mesh = _rings(angles, levels, is_solid, is_full)
    none = np.zeros(0, dtype=np.int64)
    sides = CoupledSides(none, none, sector_angle) if is_full else coupled_sides(mesh, sector_angle)
    supports = with_coupled_sides(unsupported(mesh), mesh, sides)
    if is_full and is_solid:
        centre = np.zeros(1, dtype=np.int64)
        supports = with_fixed(with_fixed(supports, centre, 0), centre, 1)
        on_axis = np.flatnonzero((np.abs(mesh.nodes[:, 1]) < 1e-9) & (mesh.nodes[:, 0] > 1e-9))
        supports = with_fixed(supports, on_axis[:1], 1)
    else:
        supports = without_drift(supports, mesh, sides)
    body = elastic_body(mesh, shaft.material)
    return ShaftDisc(body, supported(body, supports), sides)


def _filled(rim: FloatArray, sector_angle: float) -> FloatArray:
    """Angles (2 n + 1,) of corners and middles all round the sector."""
    rim = rim[np.argsort(rim[:, 1])]
    step = float(np.max(rim[:, 2] - rim[:, 0]))
    angles = [0.0]
    for start, middle, end in (*rim.tolist(), (sector_angle, 0.0, 0.0)):
        last = angles[-1]
        if start - last > ANGLE_TOL:
            n = math.ceil((start - last) / step - ANGLE_TOL)
            angles += np.linspace(last, start, 2 * n + 1)[1:].tolist()
        if start < sector_angle - ANGLE_TOL:
            angles += [middle, end]
    return np.array(angles)


def _levels(angles: FloatArray, radius: float, bore: float) -> FloatArray:
    """Radii (n,) in m of the rings' corners, from the rim inward, 0 of a solid shaft left out."""
    least = bore if bore > 0.0 else SOLID_SHARE * radius
    step = radius * float(np.mean(np.diff(angles[::2])))
    levels = [radius]
    while levels[-1] > least:
        levels.append(levels[-1] - step)
        step *= GROWTH
    # Shrunk to end at the least radius; two rings at least.
    if len(levels) < 3:
        return np.linspace(radius, least, 3)
    share = (radius - np.array(levels)) / (radius - levels[-1])
    return np.asarray(radius - share * (radius - least))


def _rings(angles: FloatArray, levels: FloatArray, is_solid: bool, is_full: bool) -> PlanarMesh:
    """Quadrilaterals between radii and angles, each cut in two; of a solid shaft wedges inside.

    Node 0 is the axis of a solid shaft.
    """
    corners = np.append(levels, 0.0) if is_solid else levels
    middles = 0.5 * (corners[1:] + corners[:-1])
    radii = np.empty(2 * len(corners) - 1)
    radii[::2], radii[1::2] = corners, middles
    radii = radii[::-1]  # from inside
    number = np.arange(radii.size * angles.size).reshape(radii.size, angles.size)
    if is_full:
        number[:, -1] = number[:, 0]
    if is_solid:
        number[0] = 0
    z = (radii[:, None] * np.exp(1j * angles)).ravel()
    elements = []
    for k in range(0, radii.size - 1, 2):
        for j in range(0, angles.size - 1, 2):
            q = number[k : k + 3, j : j + 3]
            is_wedge = is_solid and k == 0  # its diagonal is the far ray
            diagonal = q[1, 2] if is_wedge else q[1, 1]
            elements.append([q[0, 0], q[2, 0], q[2, 2], q[1, 0], q[2, 1], diagonal])
            if not is_wedge:
                elements.append([q[0, 0], q[2, 2], q[0, 2], q[1, 1], q[1, 2], q[0, 1]])
    used, compact = np.unique(np.array(elements, dtype=np.int64), return_inverse=True)
    nodes = np.column_stack([z[used].real, z[used].imag])
    elements_of = compact.reshape(-1, 6).astype(np.int64)
    return PlanarMesh(nodes, elements_of, np.zeros(len(elements_of), dtype=np.int64), ("shaft",))
