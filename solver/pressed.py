"""The lamination pressed on its shaft and loaded by its magnets, at rest, hot and at speed.

Everything is linear but the contacts: the lamination and the shaft are reduced to their answers at
the contacts, once, and every speed is then a small dense problem (see `contact`). With s = omega^2

    w(s) = C f + g_rest + s g_spin + B q,   B^T f = s b,

g_rest from interference, heat and the magnets' clearance, g_spin from the spin of both parts and
the shear under the magnets. So the contact at the bore is lost everywhere at the least s at which
no gap is negative without a force there. Loads and lengths are per metre of sheets.
Cost measured on one pole of a three-barrier rotor: see `tests/solver/test_pressed.py`.
Axes: n contacts, n_bore of them at the bore first; n_node, n_elem.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.section import CrossSection, Region, rotor_cell

from .bearings import Seat, bore_rim, magnet_seats
from .contact import ContactProblem, ContactState, closed_contacts
from .elastic import (
    ElasticBody,
    ElasticMaterial,
    centrifugal_force,
    elastic_body,
    free_strain_force,
)
from .refine import refined
from .rotor_stress import lamination_circles, sides_of, spin_centre
from .shaft import Shaft, ShaftDisc, shaft_disc
from .stiffness import SupportedBody, on_unknowns, supported
from .supports import (
    ComplexArray,
    CoupledSides,
    unsupported,
    with_coupled_sides,
    without_drift,
)
from .types import FloatArray, IntArray, PlanarMesh

# rad, of an edge of the bore: the standstill pressure of a ring is then right to 0.01 %, and its
# values at corners and middles are within 0.2 %; at 9 degrees 0.007 % and 1.7 %.
BORE_STEP = math.radians(4.0)
MOST_HALVINGS = 8
PARTNER_TOL = 1e-9  # m, between a node of the bore and the shaft's


@dataclass(frozen=True, slots=True)
class Fit:
    """A lamination on its shaft."""

    shaft: Shaft
    interference: float  # m of radius, at the reference temperature; negative: a gap


@dataclass(frozen=True, slots=True)
class Heat:
    """Temperatures over that of the drawing, in K.

    From bore to rim the lamination's grows with the square of the radius: loss spread evenly over
    a disc without a bore, derived; an assumption for a rotor.
    """

    expansion: float  # of the lamination, 1/K
    bore: float = 0.0
    rim_over_bore: float = 0.0
    shaft: float = 0.0


@dataclass(frozen=True, slots=True, eq=False)
class Pressed:
    """A lamination and its shaft, reduced to their contacts."""

    section: CrossSection
    body: ElasticBody
    sides: CoupledSides
    held: SupportedBody
    centre: complex  # of spinning, m
    strain: FloatArray | None  # (n_elem, 6), free
    bore: IntArray  # (n_bore_edge, 3), nodes of the bore's edges
    seats: tuple[Seat, ...]
    n_bore: int
    nodes: IntArray  # (n,), of the contacts
    direction: ComplexArray  # (n,), of the force on the lamination
    compliance: FloatArray  # (n, n)
    rest: FloatArray  # (n,), m
    spin: FloatArray  # (n,), m s^2
    motion: FloatArray  # (n, k)
    load: FloatArray  # (k,), N/m s^2
    spin_force: FloatArray  # (n_node, 2), N/m s^2, on the lamination, without contacts
    heat_force: FloatArray  # (n_node, 2), N/m
    has_fit: bool


def pressed(
    section: CrossSection,
    mesh: PlanarMesh,
    material: ElasticMaterial,
    fit: Fit | None = None,
    heat: Heat | None = None,
    magnets: tuple[Sequence[Region], float] = ((), 0.0),
) -> Pressed:
    """The lamination on its shaft and its magnets on their walls, ready for any speed.

    Args:
        section: the machine.
        mesh: of its lamination, as `mesh_lamination` or `rotor_stress` made it.
        material: of the sheet.
        fit: without it the bore is free.
        heat: without it all is as cold as the drawing.
        magnets: regions of the section's rotor, and their density in kg/m^3 over a metre of sheets.

    Raises:
        NotConverged: where a magnet would tip over.
    """
    section = rotor_cell(section)
    sides = sides_of(section, mesh)
    body = elastic_body(mesh, material)
    centre = spin_centre(body, sides)
    held = supported(
        body, without_drift(with_coupled_sides(unsupported(mesh), mesh, sides), mesh, sides)
    )
    seats = magnet_seats(mesh, *magnets)
    bore, rim = bore_rim(section, mesh)
    n_none = np.zeros(0, dtype=np.int64)
    on_bore = n_none if fit is None else np.setdiff1d(np.unique(bore), sides.second)
    nodes = np.concatenate([on_bore, *(seat.nodes for seat in seats)])
    place = mesh.nodes @ np.array([1.0, 1.0j])
    direction = np.concatenate(
        [
            place[on_bore] / np.abs(place[on_bore]),
            *(np.full(len(seat.nodes), seat.across) for seat in seats),
        ]
    )
    spin_force = _spin_force(body, seats, centre)
    spin = _along(held.displacement(spin_force), nodes, direction)
    rest = np.concatenate([np.zeros(len(on_bore)), *(seat.gap for seat in seats)])
    strain = None
    heat_force = np.zeros_like(spin_force)
    if heat is not None:
        strain = _free_strain(section, mesh, heat)
        heat_force = free_strain_force(body, strain)
        rest += _along(held.displacement(heat_force), nodes, direction)
    compliance = compliance_of(held, nodes, direction)
    if fit is not None:
        disc = shaft_disc(fit.shaft, rim, section.shaft_radius, section.sector_angle)
        at = _partners(disc, place[on_bore])
        n = len(on_bore)
        compliance[:n, :n] += compliance_of(disc.held, at, direction[:n])
        pull = disc.held.displacement(centrifugal_force(disc.body, 1.0))
        spin[:n] -= _along(pull, at, direction[:n])
        rise = 0.0 if heat is None else heat.shaft
        rest[:n] -= fit.interference + fit.shaft.expansion * rise * section.shaft_radius
    motion, load = _motions(section, direction, seats, len(on_bore), spin_force)
    return Pressed(
        section=section,
        body=body,
        sides=sides,
        held=held,
        centre=centre,
        strain=strain,
        bore=bore,
        seats=seats,
        n_bore=len(on_bore),
        nodes=nodes,
        direction=direction,
        compliance=0.5 * (compliance + compliance.T),
        rest=rest,
        spin=spin,
        motion=motion,
        load=load,
        spin_force=spin_force,
        heat_force=heat_force,
        has_fit=fit is not None,
    )


def with_fine_bore(section: CrossSection, mesh: PlanarMesh) -> PlanarMesh:
    """The mesh with elements at the bore halved until its edges are short."""
    section = rotor_cell(section)
    circles = lamination_circles(section)
    for _ in range(MOST_HALVINGS):
        edges, rim = bore_rim(section, mesh)
        wide = np.unique(edges[rim[:, 2] - rim[:, 0] > BORE_STEP])
        if not wide.size:
            return mesh
        touched = np.flatnonzero(np.any(np.isin(mesh.elements, wide), axis=1))
        mesh = refined(mesh, touched, circles, sides_of(section, mesh))
    return mesh


def compliance_of(held: SupportedBody, nodes: IntArray, direction: ComplexArray) -> FloatArray:
    """Displacement (n, n) in m along the directions at `nodes` of unit forces along them."""
    frame = held.supports.frame[nodes]
    local = np.conj(frame) * direction  # the directions in the nodes' frames
    number = held.number[nodes]  # (n, 2)
    parts = np.column_stack([local.real, local.imag]) * (number >= 0)
    found = np.empty((len(nodes), len(nodes)))
    for k in range(len(nodes)):
        unit = on_unknowns(number[k], parts[k], len(held.held_load))
        moved = held.solver.solve(unit)
        found[:, k] = np.sum(parts * moved[number], axis=1)
    return found


def contacts_at(item: Pressed, speed: float, *, without_bore: bool = False) -> ContactState:
    """The contacts at `speed` in rad/s; the bore's may be taken away.

    Magnets at rest bear on nothing: their contacts are open then, with a gap of 0.

    Raises:
        NotConverged: where no forces were found that keep the bodies apart.
    """
    square = speed * speed
    is_bore = np.arange(len(item.nodes)) < item.n_bore
    kept = ~is_bore if without_bore else np.ones_like(is_bore)
    if square == 0.0:
        kept &= is_bore
    used = np.any(item.motion[kept] != 0.0, axis=0)
    state = closed_contacts(
        ContactProblem(
            compliance=item.compliance[np.ix_(kept, kept)],
            gap=(item.rest + square * item.spin)[kept],
            motion=item.motion[np.ix_(kept, used)],
            load=square * item.load[used],
        )
    )
    n = len(item.nodes)
    force, gap, closed = np.zeros(n), np.zeros(n), np.zeros(n, dtype=np.bool_)
    force[kept], gap[kept], closed[kept] = state.force, state.gap, state.closed
    motion = np.zeros(len(item.load))
    motion[used] = state.motion
    return ContactState(force, gap, motion, closed, state.history)


def _spin_force(body: ElasticBody, seats: Sequence[Seat], centre: complex) -> FloatArray:
    """Nodal forces (n_node, 2) at 1 rad/s: the lamination's own, and the magnets' shear."""
    force = centrifugal_force(body, 1.0, centre)
    for seat in seats:
        shear = seat.shear * 1j * seat.across
        np.add.at(force, seat.nodes, np.column_stack([shear.real, shear.imag]))
    return force


def _free_strain(section: CrossSection, mesh: PlanarMesh, heat: Heat) -> FloatArray:
    """Free strain (n_elem, 6) at the elements' nodes."""
    a, b = section.shaft_radius, section.rotor_radius
    share = (np.sum(mesh.nodes**2, axis=1) - a * a) / (b * b - a * a)
    return np.asarray((heat.expansion * (heat.bore + heat.rim_over_bore * share))[mesh.elements])


def _along(moved: FloatArray, nodes: IntArray, direction: ComplexArray) -> FloatArray:
    """Displacement (n,) in m of nodes along directions."""
    return np.asarray(
        moved[nodes, 0] * direction.real + moved[nodes, 1] * direction.imag, dtype=np.float64
    )


def _partners(disc: ShaftDisc, place: ComplexArray) -> IntArray:
    """The shaft's node (n,) at each place of the bore."""
    on_shaft = disc.body.mesh.nodes @ np.array([1.0, 1.0j])
    away = np.abs(on_shaft[:, None] - place)
    partner: IntArray = np.argmin(away, axis=0)
    assert np.all(away[partner, np.arange(len(place))] < PARTNER_TOL)
    return partner


def _motions(
    section: CrossSection,
    direction: ComplexArray,
    seats: Sequence[Seat],
    n_bore: int,
    spin_force: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Rigid motions (n, k) of the magnets, and of a whole ring on its shaft; their loads (k,)."""
    n = len(direction)
    columns, loads = [], []
    start = n_bore
    for seat in seats:
        stop = start + len(seat.nodes)
        for k in range(2):
            column = np.zeros(n)
            column[start:stop] = seat.motion[:, k]
            columns.append(column)
            loads.append(float(seat.load[k]))
        start = stop
    if section.is_full_circle and n_bore:
        # Nothing else holds the ring: all forces on it together are in balance.
        columns += [direction.real, direction.imag]
        loads += (-spin_force.sum(axis=0)).tolist()
    motion = np.column_stack(columns) if columns else np.zeros((n, 0))
    return motion, np.array(loads)
