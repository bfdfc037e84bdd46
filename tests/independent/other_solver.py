"""Field and stress of a whole machine by a general-purpose finite element library (NGSolve).

Nothing of the solver room is used but the numbers of a magnet: own mesh of the full circle from the
exported rotor outline, order 2 or 3 on curved elements, no symmetry, the steel card's points
through another interpolation.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path as FilePath
from typing import Any

import numpy as np
from scipy.interpolate import PchipInterpolator

from lamwright.geometry.curves import Path, circle, turned
from lamwright.geometry.design import SteelCard
from lamwright.geometry.dxf_release import read_release
from lamwright.geometry.section import CrossSection
from lamwright.geometry.winding import WindingTable
from lamwright.solver.magnet import MagnetLaw

from .occ_faces import occ_face, stator_faces

MU_0 = 4e-7 * np.pi


@dataclass(frozen=True)
class OtherField:
    """Whole-machine figures in SI."""

    torque: float
    psi_abc: np.ndarray
    elements: int


@dataclass(frozen=True)
class OtherMagnet:
    """A block of the whole machine at its position, B = mu_0 mu_r H + B_r."""

    path: Path
    remanence: complex  # T, x + iy
    permeability: float  # relative


def other_magnets(section: CrossSection, law: MagnetLaw, angle: float) -> tuple[OtherMagnet, ...]:
    """The blocks of all poles, the rotor's d axis at `angle`; neighbours are magnetised round."""
    found = []
    for pole in range(2 * section.pole_pairs):
        turn = angle + pole * np.pi / section.pole_pairs
        for region in section.rotor:
            if region.material == "magnet":
                along = region.magnetisation * np.exp(1j * turn) * (-1) ** pole
                path = turned(region.outer, turn)
                found.append(OtherMagnet(path, law.remanence * along, law.recoil_permeability))
    return tuple(found)


def magnetisation(card: SteelCard, stacking_factor: float) -> tuple[np.ndarray, np.ndarray]:
    """B (T, mean over iron and insulation) and H (A/m), dense, ending in slope mu0."""
    b_fe = np.array([0.0, *card.magnetisation.b_t])
    h = np.array([0.0, *card.magnetisation.h_a_per_m])
    b = stacking_factor * b_fe + (1.0 - stacking_factor) * MU_0 * h
    grid = np.linspace(0.0, b[-1], 1500)
    h_grid = PchipInterpolator(b, h)(grid)
    beyond = b[-1] + np.linspace(0.01, 1.5, 100)
    return np.append(grid, beyond), np.append(h_grid, h[-1] + (beyond - b[-1]) / MU_0)


def rotor_faces(
    dxf: FilePath, section: CrossSection, angle: float, magnets: Sequence[OtherMagnet]
) -> list[Any]:
    """Faces of the exported rotor lamination, turned by `angle`, its shaft and its half gap."""
    contours = [(c.layer, turned(c.path, angle)) for c in read_release(dxf)]
    sizes = [abs(path.edges[0].start) for _, path in contours]
    rim = contours[int(np.argmax(sizes))][1]
    bore = contours[int(np.argmin(sizes))][1]
    barriers = [path for _, path in contours if path is not rim and path is not bore]
    named = [
        ("rotor_iron", occ_face(rim, [bore, *barriers])),
        ("shaft", occ_face(bore)),
        ("gap_rotor", occ_face(circle(0.0, section.circle_radius), [rim])),
        *(("barrier", occ_face(path, [m.path for m in magnets])) for path in barriers),
        *((f"magnet_{k}", occ_face(magnet.path)) for k, magnet in enumerate(magnets)),
    ]
    for name, face in named:
        face.faces.name = name
    return [face for _, face in named]


def solve_field(
    dxf: FilePath,
    section: CrossSection,
    winding: WindingTable,
    cards: tuple[SteelCard, SteelCard],
    stacking_factor: float,
    i_abc: np.ndarray,
    position: float,
    law: MagnetLaw | None = None,
    order: int = 3,
) -> OtherField:
    """Torque and linkages at phase currents `i_abc` (A), rotor `position` (mechanical rad)."""
    import ngsolve as ngs
    from netgen.occ import Glue, OCCGeometry

    poles = 2 * section.pole_pairs
    at = position + winding.axis_a
    magnets = () if law is None else other_magnets(section, law, at)
    faces = rotor_faces(dxf, section, at, magnets)
    for pole in range(poles):
        faces += stator_faces(section.stator, pole, pole * np.pi / section.pole_pairs)
    for face in faces:
        thin = face.faces[0].name.startswith(("gap", "opening"))
        face.faces.maxh = section.gap * 1e3 if thin else 5.0
    shape = Glue(faces)
    outer = section.stator_outer_radius * 1e3
    for edge in shape.edges:
        if edge_on(edge, outer):
            edge.name = "outer"
    mesh = ngs.Mesh(OCCGeometry(shape, dim=2).GenerateMesh(maxh=5.0, grading=0.4))
    mesh.Curve(order)

    space = ngs.H1(mesh, order=order, dirichlet="outer")
    a, v = space.TnT()
    b_abs = ngs.sqrt(1e-12 + 1e6 * (ngs.grad(a) * ngs.grad(a)))  # coordinates in mm
    form = ngs.BilinearForm(space, symmetric=True)
    for part, card in (("rotor_iron", cards[0]), ("stator_iron@.*", cards[1])):
        b, h = magnetisation(card, stacking_factor)
        curve = ngs.BSpline(2, [0.0, *b], [*h]).Integrate()
        form += ngs.Variation(curve(b_abs) * ngs.dx(part))
    air = "shaft|gap_.*|barrier|opening_.*|wedge_.*|slot_.*"
    form += ngs.Variation(b_abs * b_abs / (2 * MU_0) * ngs.dx(air))
    load = ngs.LinearForm(space)
    for k, magnet in enumerate(magnets):
        nu = 1.0 / (MU_0 * magnet.permeability)
        form += ngs.Variation(0.5 * nu * b_abs * b_abs * ngs.dx(f"magnet_{k}"))
        b_x, b_y = magnet.remanence.real, magnet.remanence.imag
        # int nu B_r . curl v, curl v = (dv/dy, -dv/dx), lengths in mm
        load += 1e3 * nu * (b_x * ngs.grad(v)[1] - b_y * ngs.grad(v)[0]) * ngs.dx(f"magnet_{k}")
    sides = list(coil_sides(section, winding))
    for name, conductors in sides:
        area = ngs.Integrate(1.0, mesh, definedon=mesh.Materials(name))
        # Integrals run over mm^2, so the energy is in uJ/m; hence 1e6 A for each ampere.
        load += 1e6 * float(conductors @ i_abc) / area * v * ngs.dx(name)
    load.Assemble()
    solution = newton(space, form, load)

    psi = np.zeros(3)
    for name, conductors in sides:
        where = mesh.Materials(name)
        mean = ngs.Integrate(solution, mesh, definedon=where) / ngs.Integrate(
            1.0, mesh, definedon=where
        )
        psi += section.stack_length * conductors * mean
    field = 1e3 * ngs.grad(solution)
    radius = ngs.sqrt(ngs.x * ngs.x + ngs.y * ngs.y)
    b_r = (-ngs.y * field[0] + ngs.x * field[1]) / radius  # (1/r) dA/dtheta
    b_t = -(ngs.x * field[0] + ngs.y * field[1]) / radius
    # The mean over radii needs a ring of even thickness: beside a rim that is no circle, the
    # stator's half of the gap.
    is_even = section.ring_radius is None
    gap = mesh.Materials("gap_.*" if is_even else "gap_stator.*")
    wide = section.gap if is_even else section.stator_bore_radius - section.circle_radius
    integral = ngs.Integrate(radius * b_r * b_t, mesh, definedon=gap, order=8) * 1e-9
    torque = section.stack_length / (MU_0 * wide) * integral
    return OtherField(torque, psi, mesh.ne)


def edge_on(edge: Any, radius: float) -> bool:
    """Whether both ends of the edge lie on the circle of this radius (mm)."""
    return all(abs(np.hypot(v.p.x, v.p.y) - radius) < 1e-6 for v in edge.vertices)


def coil_sides(section: CrossSection, winding: WindingTable) -> Any:
    """Region name and signed conductors (3,) of each coil side of the full circle."""
    per_pole = section.slots // (2 * section.pole_pairs)
    for slot in range(section.slots):
        pole, local = divmod(slot, per_pole)
        for layer in range(winding.layers):
            yield f"slot_{local}_layer_{layer}@{pole}", winding.conductors[slot, layer]


def newton(space: Any, form: Any, load: Any) -> Any:
    """Damped Newton on the convex energy: the step is halved until the energy falls."""
    import ngsolve as ngs

    solution = ngs.GridFunction(space)
    residual, step = solution.vec.CreateVector(), solution.vec.CreateVector()

    def energy() -> float:
        return float(form.Energy(solution.vec) - ngs.InnerProduct(load.vec, solution.vec))

    for _ in range(60):
        form.AssembleLinearization(solution.vec)
        form.Apply(solution.vec, residual)
        residual.data -= load.vec
        inverse = form.mat.Inverse(space.FreeDofs(), inverse="sparsecholesky")
        step.data = inverse * residual
        decrement = abs(ngs.InnerProduct(step, residual))
        before, share = energy(), 1.0
        solution.vec.data -= step
        while energy() > before + 1e-12 * abs(before) and share > 1e-4:
            share *= 0.5
            solution.vec.data += share * step
        if decrement < 1e-14 * abs(before):
            return solution
    raise AssertionError("the other solver did not converge")
