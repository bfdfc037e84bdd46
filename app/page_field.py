"""The fields of a quick evaluation as arrays for the page's own drawing, in its SVG coordinates.

The magnetic field is that with the rotor exactly where the page draws it, so that field and outline
lie on each other and flux lines pass the gap unbroken. Elements of second order are drawn as four
flat triangles. Flux density jumps from element to element, so each has vertices of its own; stress
is that recovered at the nodes.

File: length of the head as a little-endian 32-bit number, the head as JSON padded to a multiple of
4 bytes, then the arrays one after the other, each at the offset from the head's end that it states.
"""

import cmath
import json
import struct
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.section import CrossSection
from lamwright.solver.isoparametric import NODE_PLACES, gradients_at
from lamwright.solver.types import FieldSolution, FloatArray, IntArray, PlanarMesh, StressSolution

from .page_drawing import MM, upright, view_box
from .study_quick import QuickField

MPA = 1e-6  # MPa per Pa
QUARTERS: IntArray = np.array([[0, 3, 5], [3, 1, 4], [5, 4, 2], [3, 4, 5]])  # of a triangle


@dataclass(frozen=True, slots=True, eq=False)
class DrawnField:
    """Vertices with values, and the triangles between them."""

    positions: FloatArray  # (n, 2), mm, y downward
    triangles: IntArray  # (m, 3)
    values: Mapping[str, FloatArray]  # (n,) each


def drawn_field(
    section: CrossSection, work: QuickField, solution: FieldSolution, sign: float
) -> DrawnField:
    """A_z in Wb/m and |B| in T over rotor and stator."""
    turn, sector = upright(section), work.model.sector
    parts = [
        _part(sector.rotor, sign * solution.a_rotor, turn),
        _part(sector.stator, solution.a_stator, turn),
    ]
    count = len(parts[0].positions)
    return DrawnField(
        np.concatenate([part.positions for part in parts]),
        np.concatenate([parts[0].triangles, parts[1].triangles + count]),
        {
            name: np.concatenate([part.values[name] for part in parts])
            for name in ("field_a_z", "field_b")
        },
    )


def _part(mesh: PlanarMesh, potential: FloatArray, turn: complex) -> DrawnField:
    grad, _ = gradients_at(mesh.nodes[mesh.elements], NODE_PLACES)
    slope = np.einsum("epdi,ei->epd", grad, potential[mesh.elements])  # B turned by 90 degrees, T
    places = _picture(mesh.nodes, turn)[mesh.elements]
    first = 6 * np.arange(len(mesh.elements))[:, None, None]
    return DrawnField(
        places.reshape(-1, 2),
        (first + QUARTERS).reshape(-1, 3),
        {
            "field_a_z": potential[mesh.elements].ravel(),
            "field_b": np.hypot(slope[..., 0], slope[..., 1]).ravel(),
        },
    )


def drawn_stress(section: CrossSection, solution: StressSolution) -> DrawnField:
    """Von Mises stress in MPa, known over the rotor's own period, in each of the sector's."""
    nodes, count = solution.mesh.nodes, len(solution.mesh.nodes)
    triangles = solution.mesh.elements[:, QUARTERS].reshape(-1, 3)
    turns = [
        upright(section) * cmath.exp(1j * pole * section.pole_angle)
        for pole in range(0, section.sector_poles, section.rotor_period)
    ]
    return DrawnField(
        np.concatenate([_picture(nodes, turn) for turn in turns]),
        np.concatenate([triangles + k * count for k in range(len(turns))]),
        {"stress_von_mises": np.tile(MPA * solution.von_mises, len(turns))},
    )


def _picture(nodes: FloatArray, turn: complex) -> FloatArray:
    at = MM * turn * (nodes[:, 0] + 1j * nodes[:, 1])
    return np.stack([at.real, -at.imag], axis=1)


def field_file(section: CrossSection, field: DrawnField, stress: DrawnField) -> bytes:
    """The file of both."""
    arrays = [
        *_arrays("field", field),
        *_arrays("stress", stress),
    ]
    listed, offset = [], 0
    for name, array in arrays:
        kind = "u4" if array.dtype == np.dtype("<u4") else "f4"
        shape = list(array.shape)
        listed.append({"name": name, "type": kind, "shape": shape, "offset": offset})
        offset += array.nbytes
    ranges = {
        "a_z": _range(field.values["field_a_z"]),
        "b": [0.0, float(field.values["field_b"].max())],
        "von_mises": [0.0, float(stress.values["stress_von_mises"].max())],
    }
    head = json.dumps({"arrays": listed, "ranges": ranges, "view": view_box(section)}).encode()
    head += b" " * (-len(head) % 4)
    return b"".join([struct.pack("<I", len(head)), head, *(array.tobytes() for _, array in arrays)])


def _arrays(mesh: str, drawn: DrawnField) -> Sequence[tuple[str, np.ndarray]]:
    return [
        (f"{mesh}_positions", drawn.positions.astype("<f4")),
        (f"{mesh}_triangles", drawn.triangles.astype("<u4")),
        *((name, values.astype("<f4")) for name, values in drawn.values.items()),
    ]


def _range(values: FloatArray) -> list[float]:
    return [float(values.min()), float(values.max())]
