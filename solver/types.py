"""Value objects shared inside the solver room and carried out of it.

Axes: n_node nodes, n_elem elements, n_qp quadrature points, 2 directions, 6 nodes of a
second-order triangle in the order corners 0 1 2, then middles of the edges 01, 12, 02.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from lamwright.geometry.section import base_name

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]

# |B|^2 in T^2 -> nu in m/H and d nu / d |B|^2 in m/(H T^2), any shape.
ReluctivityLaw = Callable[[FloatArray], tuple[FloatArray, FloatArray]]
# |H| in A/m -> |B| in T, any shape.
MagnetisationInverse = Callable[[FloatArray], FloatArray]


@dataclass(frozen=True, slots=True, eq=False)
class Quadrature:
    """Gradients and weights at quadrature points of a set of elements."""

    grad: FloatArray  # (n_elem, n_qp, 2, 6), 1/m
    weight: FloatArray  # (n_elem, n_qp), m^2


@dataclass(frozen=True, slots=True, eq=False)
class PlanarMesh:
    """Curved second-order triangles with a region each; no node is stored twice."""

    nodes: FloatArray  # (n_node, 2), m
    elements: IntArray  # (n_elem, 6), counter-clockwise
    region_of_elem: IntArray  # (n_elem,), index into region_names
    region_names: tuple[str, ...]

    def elements_of(self, prefix: str) -> IntArray:
        """Indices of the elements whose region's name, pole aside, starts with `prefix`."""
        wanted = [
            k for k, name in enumerate(self.region_names) if base_name(name).startswith(prefix)
        ]
        return np.flatnonzero(np.isin(self.region_of_elem, wanted))


@dataclass(frozen=True, slots=True, eq=False)
class SectorMesh:
    """A sector of whole poles, rotor and stator meshed once each, in their own frames.

    Both meshes have vertices on the turning circle at angles k * sector_angle / n_circle,
    k = 0 .. n_circle, and mid-edge nodes half-way between. The nodes on the side at angle
    sector_angle are those on the side at angle 0, turned; of a whole circle they are the same.
    """

    rotor: PlanarMesh
    stator: PlanarMesh
    pole_pairs: int
    circle_radius: float
    n_circle: int  # edges on the sector's part of the turning circle
    sector_poles: int = 1

    @property
    def sectors(self) -> int:
        """Sectors of the whole machine."""
        return 2 * self.pole_pairs // self.sector_poles

    @property
    def sector_angle(self) -> float:
        """Angle of the sector in rad."""
        return self.sector_poles * math.pi / self.pole_pairs

    @property
    def is_full_circle(self) -> bool:
        """Whether the meshes go all the way round and have no sides."""
        return self.sectors == 1

    @property
    def side_sign(self) -> float:
        """What a potential is multiplied by from one sector to the next: 1 or -1."""
        return -1.0 if self.sector_poles % 2 else 1.0


@dataclass(frozen=True, slots=True)
class NewtonReport:
    """How a Newton iteration went."""

    steps: int  # each one tangent, or two where Newton's own was needed after all
    history: tuple[float, ...]  # relative residual norms, one more than steps
    seconds: float
    coarse_steps: int = 0  # of the first-order iteration that gave the first guess


@dataclass(frozen=True, slots=True, eq=False)
class FieldSolution:
    """The magnetic field of one operating point at one rotor position, per machine in SI.

    Linkages and torque are of the whole machine (all poles, full stack, series turns per phase),
    without end-winding leakage. Energies are of the whole machine in J.
    """

    i_d: float
    i_q: float
    position: float  # mechanical rad, rotor's d axis ahead of phase A's axis
    a_rotor: FloatArray  # (n_node of rotor mesh,), A_z in Wb/m
    a_stator: FloatArray  # (n_node of stator mesh,), A_z in Wb/m
    psi_abc: FloatArray  # (3,), V s
    psi_d: float
    psi_q: float
    torque: float  # N m, Maxwell stress averaged over the gap's area
    energy: float
    coenergy: float
    newton: NewtonReport
    # (n_corner,), A_z in Wb/m of the first-order elements at the same point, rotor first
    corner_a: FloatArray | None = None


@dataclass(frozen=True, slots=True, eq=False)
class StressSolution:
    """Plane stress of one pole of the rotor lamination at one speed."""

    mesh: PlanarMesh  # nodes in the rotor's frame, undeformed
    displacement: FloatArray  # (n_node, 2), m
    stress: FloatArray  # (n_node, 3), sxx syy sxy in Pa, recovered at nodes
    von_mises: FloatArray  # (n_node,), Pa
    speed: float  # mechanical rad/s
    peak: float  # Pa, largest von Mises
    peak_error: float  # Pa, estimated absolute error of `peak`
    rib_loads: FloatArray  # (n_rib, 3), N/m N/m N, force x, y and moment on each rib's section
    refinements: int
