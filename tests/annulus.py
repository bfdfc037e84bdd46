"""Machines of plain rings, meshed by hand, for cases with a closed form."""

import dataclasses
import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.curves import Path
from lamwright.geometry.section import CrossSection, Material, Region
from lamwright.geometry.winding import WindingTable
from lamwright.solver.field import FieldSettings, MagneticModel, magnetic_model
from lamwright.solver.model import stator_functional
from lamwright.solver.steel import SteelLaw
from lamwright.solver.types import FloatArray, PlanarMesh, SectorMesh

MATERIALS: dict[str, Material] = {
    "shaft": "shaft",
    "magnet": "magnet",
    "rotor_iron": "rotor_steel",
    "gap_rotor": "air",
    "gap_stator": "air",
    "slot_0_layer_0": "copper",
    "stator_iron": "stator_steel",
}


@dataclass(frozen=True)
class Ring:
    """A ring of one region: outer radius in m, layers of elements."""

    region: str
    outer: float
    layers: int


def ring_mesh(inner: float, rings: Sequence[Ring], sweep: float, n_theta: int) -> PlanarMesh:
    """Rings from radius `inner` (0: to the centre) over the angles 0 .. `sweep` rad.

    Quadrilaterals between radii and angles, each cut in two curved triangles with their middles
    at the middle angle and radius.
    """
    radii, names, region = [inner], [], []
    for ring in rings:
        names.append(ring.region)
        radii += list(np.linspace(radii[-1], ring.outer, ring.layers + 1)[1:])
        region += [len(names) - 1] * ring.layers
    corner_radii = np.array(radii)
    all_radii = np.interp(np.arange(2 * len(radii) - 1) / 2.0, np.arange(len(radii)), corner_radii)
    theta = np.linspace(0.0, sweep, 2 * n_theta + 1)
    number = np.arange(all_radii.size * theta.size).reshape(all_radii.size, theta.size)
    if math.isclose(sweep, 2.0 * math.pi):  # a whole circle has no sides
        number[:, -1] = number[:, 0]
    if inner == 0.0:
        number[0] = 0
    z = all_radii[:, None] * np.exp(1j * theta)
    elements, of_elem = [], []
    for k, name in enumerate(region):
        for j in range(n_theta):
            q = number[2 * k : 2 * k + 3, 2 * j : 2 * j + 3]
            is_fan = all_radii[2 * k] == 0.0  # the diagonal is the far ray
            diagonal = q[1, 2] if is_fan else q[1, 1]
            elements.append([q[0, 0], q[2, 0], q[2, 2], q[1, 0], q[2, 1], diagonal])
            of_elem.append(name)
            if not is_fan:
                elements.append([q[0, 0], q[2, 2], q[0, 2], q[1, 1], q[1, 2], q[0, 1]])
                of_elem.append(name)
    used, compact = np.unique(np.array(elements), return_inverse=True)
    points = z.ravel()[used]
    return PlanarMesh(
        nodes=np.stack([points.real, points.imag], axis=-1),
        elements=compact.reshape(-1, 6).astype(np.int64),
        region_of_elem=np.array(of_elem, dtype=np.int64),
        region_names=tuple(names),
    )


@dataclass(frozen=True)
class RingMachine:
    """A slotless machine: rings of the rotor from the centre, rings of the stator from the bore."""

    pole_pairs: int
    rotor: tuple[Ring, ...]
    bore: float
    stator: tuple[Ring, ...]
    stack_length: float
    gap_layers: int = 4
    n_circle: int = 64
    inner: float = 0.0
    sector_poles: int = 1

    @property
    def rim(self) -> float:
        """Rotor radius in m."""
        return self.rotor[-1].outer

    @property
    def circle(self) -> float:
        """Radius of the turning circle in m."""
        return 0.5 * (self.rim + self.bore)


def ring_sector(machine: RingMachine) -> SectorMesh:
    """A sector of a ring machine, one pole or more."""
    sweep = machine.sector_poles * math.pi / machine.pole_pairs
    rotor = (*machine.rotor, Ring("gap_rotor", machine.circle, machine.gap_layers))
    stator = (Ring("gap_stator", machine.bore, machine.gap_layers), *machine.stator)
    return SectorMesh(
        rotor=ring_mesh(machine.inner, rotor, sweep, machine.n_circle),
        stator=ring_mesh(machine.circle, stator, sweep, machine.n_circle),
        pole_pairs=machine.pole_pairs,
        circle_radius=machine.circle,
        n_circle=machine.n_circle,
        sector_poles=machine.sector_poles,
    )


def ring_section(machine: RingMachine) -> CrossSection:
    """Names and materials of a ring machine; its outlines stay empty, the mesh is made by hand."""

    def region(name: str) -> Region:
        along = 1.0 + 0.0j if name == "magnet" else 0j  # parallel, along the d axis
        return Region(name, MATERIALS[name], Path(()), (), along)

    return CrossSection(
        pole_pairs=machine.pole_pairs,
        stack_length=machine.stack_length,
        rotor_radius=machine.rim,
        shaft_radius=machine.inner,
        stator_bore_radius=machine.bore,
        stator_outer_radius=machine.stator[-1].outer,
        slots=2 * machine.pole_pairs,
        rotor=tuple(region(n) for n in (*(r.region for r in machine.rotor), "gap_rotor")),
        stator=tuple(region(n) for n in ("gap_stator", *(r.region for r in machine.stator))),
        ribs=(),
        sector_poles=machine.sector_poles,
    )


def sheet_model(
    machine: RingMachine,
    rotor_law: SteelLaw,
    stator_law: SteelLaw,
    turns: float,
    settings: FieldSettings | None = None,
) -> MagneticModel:
    """A ring machine with a sinusoidal three-phase winding spread on the bore.

    Conductors of phase A per radian: (turns / 2) sin(p theta), so that its axis is at angle 0.
    """
    section, sector = ring_section(machine), ring_sector(machine)
    poles = 2 * machine.pole_pairs
    no_slots = WindingTable(poles, poles, 0, np.zeros((poles, 0, 3)), 0.0, turns)
    model = magnetic_model(sector, section, no_slots, rotor_law, stator_law, settings)
    nodal = sheet_functional(sector, machine.bore, turns)
    return dataclasses.replace(model, linkage=stator_functional(model.numbering, sector, nodal))


def sheet_functional(sector: SectorMesh, bore: float, turns: float) -> FloatArray:
    """Phase linkages (3, n_node of stator) of a sector: int (turns/2) sin(p theta - ..) A."""
    nodes = sector.stator.nodes
    found = np.flatnonzero(np.abs(np.hypot(*nodes.T) - bore) < 1e-9 * bore)
    theta = np.mod(np.arctan2(nodes[found, 1], nodes[found, 0]) + 1e-6, 2.0 * np.pi) - 1e-6
    found, theta = found[np.argsort(theta)], np.sort(theta)
    if sector.is_full_circle:
        found, theta = np.append(found, found[0]), np.append(theta, theta[0] + 2.0 * np.pi)
    x, weight = np.polynomial.legendre.leggauss(5)
    shape = np.stack([x * (x - 1.0) / 2.0, 1.0 - x**2, x * (x + 1.0) / 2.0])  # on -1 .. 1
    nodal = np.zeros((3, nodes.shape[0]))
    for k in range(0, theta.size - 2, 2):
        half = 0.5 * (theta[k + 2] - theta[k])
        at = theta[k + 1] + half * x
        for phase in range(3):
            density = 0.5 * turns * np.sin(sector.pole_pairs * at - 2.0 * np.pi / 3.0 * phase)
            nodal[phase, found[k : k + 3]] += half * shape @ (weight * density)
    return nodal


def ring_on_shaft(inner: float, outer: float, poles: int = 1) -> CrossSection:
    """The rotor of a 4-pole machine without anything in it, `poles` of it; outlines stay empty."""
    return CrossSection(
        pole_pairs=2,
        stack_length=0.1,
        rotor_radius=outer,
        shaft_radius=inner,
        stator_bore_radius=outer + 0.5e-3,
        stator_outer_radius=outer + 30e-3,
        slots=24,
        rotor=(),
        stator=(),
        ribs=(),
        sector_poles=poles,
        rotor_period=poles,
    )
