"""Stress of a whole spinning lamination by a general-purpose finite element library (NGSolve).

Own mesh of the full disc from the exported outline, order 4 on curved elements, no symmetry.
"""

from dataclasses import dataclass
from pathlib import Path as FilePath
from typing import Any

import numpy as np

from lamwright.geometry.curves import Path
from lamwright.geometry.design import SteelCard
from lamwright.geometry.dxf_release import read_release

from .occ_faces import occ_face

INSIDE = 1e-7  # m


@dataclass(frozen=True)
class OtherStress:
    """Largest von Mises stress (Pa), where (m), and largest growth of the rim (m)."""

    peak: float
    at: complex
    rim_growth: float


def solve_stress(dxf: FilePath, card: SteelCard, speed: float, fine: float) -> OtherStress:
    """Plane stress at `speed` (rad/s), bore free; `fine` is the element size at the ribs in mm."""
    import ngsolve as ngs
    from netgen.occ import OCCGeometry

    contours = [c.path for c in read_release(dxf)]
    sizes = [abs(path.edges[0].start) for path in contours]
    rim, bore = contours[int(np.argmax(sizes))], contours[int(np.argmin(sizes))]
    barriers = [path for path in contours if path is not rim and path is not bore]
    face = occ_face(rim, [bore, *barriers])
    for edge in face.edges:
        # Short arcs are the ends and fillets where the stress peaks.
        edge.maxh = fine if edge.mass < 12.0 else 1.5
    mesh = ngs.Mesh(OCCGeometry(face, dim=2).GenerateMesh(maxh=2.0, grading=0.25))
    mesh.Curve(4)

    young, nu = card.youngs_modulus_gpa.value * 1e9, card.poissons_ratio.value
    rho = card.density_kg_per_m3.value
    plane, multipliers = ngs.VectorH1(mesh, order=4), ngs.NumberSpace(mesh)
    space = plane * multipliers * multipliers * multipliers
    (u, *tie), (v, *test) = space.TnT()

    def stress(w: object) -> object:
        strain = ngs.Sym(ngs.Grad(w))
        return young / (1 - nu**2) * ((1 - nu) * strain + nu * ngs.Trace(strain) * ngs.Id(2))

    form = ngs.BilinearForm(space, symmetric=True)
    form += ngs.InnerProduct(stress(u), ngs.Sym(ngs.Grad(v))) / young * ngs.dx
    # Three numbers take away the rigid movements: no mean shift, no mean turn.
    for k, mode in enumerate((ngs.CF((1, 0)), ngs.CF((0, 1)), ngs.CF((-ngs.y, ngs.x)))):
        form += (tie[k] * (mode * v) + test[k] * (mode * u)) * 1e-3 * ngs.dx
    load = ngs.LinearForm(space)
    load += rho * speed**2 / young * ngs.CF((ngs.x, ngs.y)) * v * 1e-6 * ngs.dx
    with ngs.TaskManager():
        form.Assemble()
        load.Assemble()
        solution = ngs.GridFunction(space)
        solution.vec.data = form.mat.Inverse(inverse="umfpack") * load.vec
    shift = solution.components[0]

    tensor = stress(shift)
    s_x, s_y, s_xy = tensor[0, 0], tensor[1, 1], tensor[0, 1]
    mises = ngs.sqrt(s_x**2 - s_x * s_y + s_y**2 + 3 * s_xy**2)
    places = np.concatenate([edge_points(path) for path in contours])
    values = at_places(mesh, mises, places)[:, 0]
    worst = int(np.argmax(values))
    on_rim = edge_points(rim)
    moved = at_places(mesh, shift, on_rim)
    growth = (moved[:, 0] * on_rim.real + moved[:, 1] * on_rim.imag) / abs(on_rim)
    return OtherStress(float(values[worst]), complex(places[worst]), 1e-3 * float(growth.max()))


def edge_points(path: Path) -> np.ndarray:
    """Points along all edges of a closed path, 200 an edge (m).

    0.1 um inside the iron, which is left of its contours: 1e-4 of a peak's stress at a fillet of
    1 mm, and no point is lost beside the mesh.
    """
    share = np.linspace(0.0, 1.0, 200)
    return np.array([e.point(s) + INSIDE * 1j * e.direction(s) for e in path.edges for s in share])


def at_places(mesh: Any, function: Any, places: np.ndarray) -> np.ndarray:
    """Values of a coefficient function at points in m, one row a point."""
    return np.array(function(mesh(1e3 * places.real, 1e3 * places.imag))).reshape(len(places), -1)
