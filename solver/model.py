"""The magnetic model of one machine: everything that no operating point changes, prebuilt.

Nodes are those of the rotor's mesh followed by the stator's. Elements fall into three groups:
`iron` (nonlinear, assembled every Newton step), the rotor's half of the gap (linear, its geometry
and its partners on the circle change with the position) and all others (linear, assembled once).
Axes: n_node nodes, n_dof unknowns, n_slot matrix entries, n_elem elements of a group.
"""

from dataclasses import dataclass, field, replace
from typing import Literal

import numpy as np
import numpy.typing as npt

from lamwright.geometry.section import CrossSection, Region
from lamwright.geometry.sectors import repeats
from lamwright.geometry.winding import WindingTable

from .cache import Cache
from .first_order import Lift, first_order
from .kernel import FluxState, packed_tangent, quadrature, quadrature_places, shape_integrals
from .linear import Method
from .magnet import MagnetLaw, MagnetSource, magnet_source
from .newton import NewtonSettings
from .pattern import (
    Entries,
    Numbering,
    Pattern,
    SparseRows,
    edge_ends,
    gap_slots,
    lower_pattern,
    number_unknowns,
    packed_entries,
    residual_scatter,
    scatter,
    summed,
)
from .steel import NU_0, SteelLaw
from .steel_kernel import Metric, metric_of
from .types import FloatArray, IntArray, PlanarMesh, Quadrature, SectorMesh

# Of the sources' norm, where a first guess is good enough: see `first_order`.
COARSE_TOLERANCE = 1e-1
CACHED_UNKNOWNS = 400_000  # of all factors kept; 20 factors of 20 k unknowns hold 150 MB


@dataclass(frozen=True, slots=True)
class FieldSettings:
    """How fields are computed."""

    # Six points instead of three in the steel change torque and linkages by less than 0.01 %.
    iron_points: Literal[1, 3, 6] = 3  # one is for first-order elements
    shaft_relative_permeability: float = 1.0
    magnet: MagnetLaw | None = None  # of every magnet region; needed where there is one
    newton: NewtonSettings = field(default_factory=NewtonSettings)
    solver: Method = "auto"


@dataclass(frozen=True, slots=True, eq=False)
class Iron:
    """The nonlinear elements: the rotor's, then the stator's."""

    element: IntArray  # (n_elem,), numbers among all elements, the rotor's first
    dof: IntArray  # (n_elem, 6), n_dof where A = 0
    sign: FloatArray  # (n_elem, 6)
    quad: Quadrature
    n_rotor: int  # elements of the rotor
    rotor_law: SteelLaw
    stator_law: SteelLaw
    scatter: SparseRows  # (n_slot, 21 n_elem)
    residual_scatter: SparseRows  # (n_dof, 6 n_elem)
    metric: Metric = field(init=False)  # that of `quad`

    def __post_init__(self) -> None:
        """Bring the gradients into the form that Newton's iteration takes."""
        object.__setattr__(self, "metric", metric_of(self.quad))

    def law(self, b2: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Reluctivity and slope for |B|^2 of shape (n_qp, n_elem)."""
        if self.rotor_law is self.stator_law:
            return self.rotor_law(b2)
        rotor = self.rotor_law(b2[:, : self.n_rotor])
        stator = self.stator_law(b2[:, self.n_rotor :])
        nu, dnu = (np.concatenate(pair, axis=1) for pair in zip(rotor, stator, strict=True))
        return nu, dnu

    def inverse(self, h: FloatArray) -> FloatArray:
        """|B| in T for |H| in A/m of shape (n_qp, n_elem), near enough to linearise at."""
        if self.rotor_law is self.stator_law:
            return self.rotor_law.flux_density(h)
        rotor = self.rotor_law.flux_density(h[:, : self.n_rotor])
        stator = self.stator_law.flux_density(h[:, self.n_rotor :])
        return np.concatenate([rotor, stator], axis=1)


@dataclass(frozen=True, slots=True, eq=False)
class FirstOrder:
    """The same machine on first-order elements, for first guesses."""

    model: "MagneticModel"
    lift: Lift


@dataclass(frozen=True, slots=True, eq=False)
class RotorGap:
    """The rotor's half of the gap, at rest and at shift 0."""

    nodes: FloatArray  # (n_gap_node, 2), m
    elements: IntArray  # (n_elem, 6), numbers in `nodes`
    node: IntArray  # (n_gap_node,), numbers in the model
    row: IntArray  # (n_gap_slot,), distinct matrix entries
    column: IntArray
    scatter: SparseRows  # (n_gap_slot, 21 n_elem)


@dataclass(frozen=True, slots=True, eq=False)
class StatorGap:
    """The stator's half of the gap."""

    elements: IntArray  # (n_elem, 6), numbers in the model
    quad: Quadrature
    places: FloatArray  # (n_elem, n_qp, 2), m


@dataclass(frozen=True, slots=True, eq=False)
class MagneticModel:
    """A machine ready to be solved at any current and position. Picklable."""

    sector: SectorMesh
    stack_length: float
    rim_radius: float
    bore_radius: float
    axis_a: float  # rad, phase A's axis in the stator's frame
    settings: FieldSettings
    numbering: Numbering
    pattern: Pattern
    ends: IntArray  # (n_dof, 2), see `edge_ends`
    iron: Iron
    fixed_values: FloatArray  # (n_slot,), linear elements outside the rotor's gap
    rotor_gap: RotorGap
    stator_gap: StatorGap
    linkage: FloatArray  # (3, n_dof), phase linkage of the sector per metre of stack
    magnet: MagnetSource  # in the rotor's numbering, so it turns with the rotor
    representative: IntArray  # (n_dof,), a node with sign + for every unknown
    factors: Cache = field(repr=False)
    positions: Cache = field(repr=False)
    condensed: Cache = field(repr=False)  # one `Condensed`, made when it is first asked for
    coarse: FirstOrder | None = None  # none on first-order elements themselves


def magnetic_model(
    sector: SectorMesh,
    section: CrossSection,
    winding: WindingTable,
    rotor_law: SteelLaw,
    stator_law: SteelLaw,
    settings: FieldSettings | None = None,
) -> MagneticModel:
    """Everything of a machine that no operating point changes.

    Args:
        sector: meshes of a sector.
        section: the same sector's regions, for their materials.
        winding: conductors of all slots.
        rotor_law: law of the rotor's stack.
        stator_law: law of the stator's stack.
        settings: quadrature, tolerance, solver.

    Raises:
        ValueError: when meshes, regions and winding do not belong together.
    """
    settings = settings or FieldSettings()
    coarse_sector, lift = first_order(sector)
    coarse_settings = replace(
        settings, iron_points=1, newton=replace(settings.newton, tolerance=COARSE_TOLERANCE)
    )
    laws = (rotor_law, stator_law)
    # A node, tied or held, is an unknown at most; both orders keep the same positions.
    kept = max(1, CACHED_UNKNOWNS // (sector.rotor.nodes.shape[0] + sector.stator.nodes.shape[0]))
    coarse = _model(coarse_sector, section, winding, *laws, coarse_settings, kept)
    model = _model(sector, section, winding, *laws, settings, kept)
    return replace(model, coarse=FirstOrder(coarse, lift))


def _model(
    sector: SectorMesh,
    section: CrossSection,
    winding: WindingTable,
    rotor_law: SteelLaw,
    stator_law: SteelLaw,
    settings: FieldSettings,
    kept: int,
) -> MagneticModel:
    """The model without first guesses, on elements of either order; `kept` factors at most."""
    numbering = number_unknowns(sector)
    materials = material_of_elem(sector, section)
    nodes, elements = joined_parts(sector)
    is_gap = np.zeros(materials.size, dtype=bool)
    is_gap[sector.rotor.elements_of("gap_rotor")] = True
    is_iron = np.isin(materials, ("rotor_steel", "stator_steel"))
    groups = [np.flatnonzero(g) for g in (is_iron, is_gap, ~is_iron & ~is_gap)]
    n_dof = numbering.n_dof
    entries = [packed_entries(numbering.dof, numbering.sign, elements[g], n_dof) for g in groups]
    pattern = lower_pattern(n_dof, tuple(entries))
    iron, gap, others = groups
    quad = quadrature(nodes, elements[others])
    nu = linear_reluctivity(sector, section, settings)[others]
    stator_gap = sector.rotor.elements.shape[0] + sector.stator.elements_of("gap_stator")
    return MagneticModel(
        sector=sector,
        stack_length=section.stack_length,
        rim_radius=section.gap_ring_radius,
        bore_radius=section.stator_bore_radius,
        axis_a=winding.axis_a,
        settings=settings,
        numbering=numbering,
        pattern=pattern,
        ends=edge_ends(numbering, elements),
        iron=Iron(
            element=iron,
            dof=np.asfortranarray(numbering.dof[elements[iron]]),
            sign=np.asfortranarray(numbering.sign[elements[iron]]),
            quad=quadrature(nodes, elements[iron], settings.iron_points),
            n_rotor=int(np.sum(materials[iron] == "rotor_steel")),
            rotor_law=rotor_law,
            stator_law=stator_law,
            scatter=scatter(pattern, entries[0]),
            residual_scatter=residual_scatter(numbering, elements[iron]),
        ),
        fixed_values=summed(scatter(pattern, entries[2]), linear_tangent(quad, nu)),
        rotor_gap=_rotor_gap(sector.rotor, gap, entries[1], n_dof),
        stator_gap=StatorGap(
            elements=elements[stator_gap],
            quad=quadrature(nodes, elements[stator_gap], 6),
            places=quadrature_places(nodes, elements[stator_gap], 6),
        ),
        linkage=linkage_functional(sector, winding, numbering),
        magnet=magnet_source(sector.rotor, section.rotor, numbering, settings.magnet),
        representative=representatives(numbering, sector),
        factors=Cache(kept),
        positions=Cache(2 * kept),
        condensed=Cache(1),
    )


def remagnetised(model: MagneticModel, law: MagnetLaw) -> MagneticModel:
    """The model with its magnets at another temperature; factors and positions are shared.

    Args:
        model: with magnets.
        law: of the same recoil permeability as the model's.

    Raises:
        ValueError: for another permeability, or a model without magnets.
    """
    own = model.settings.magnet
    if own is None or own.recoil_permeability != law.recoil_permeability:
        raise ValueError("only the remanence of a model's magnets can be changed")
    coarse = model.coarse
    return replace(
        model,
        settings=replace(model.settings, magnet=law),
        magnet=model.magnet.scaled(law.remanence / own.remanence),
        coarse=coarse and FirstOrder(remagnetised(coarse.model, law), coarse.lift),
    )


def linear_tangent(quad: Quadrature, nu: FloatArray) -> FloatArray:
    """Packed tangents (21, n_elem) of linear elements with reluctivity `nu` (n_elem,)."""
    shape = quad.weight.shape
    still = np.zeros((*shape, 2))
    state = FluxState(still, np.broadcast_to(nu[:, None], shape), np.zeros(shape))
    return packed_tangent(quad, state)


def linear_reluctivity(
    sector: SectorMesh, section: CrossSection, settings: FieldSettings
) -> FloatArray:
    """Reluctivity (n_elem,) in m/H of every element, rotor first; of use where it is no steel."""
    found = []
    for mesh, regions in ((sector.rotor, section.rotor), (sector.stator, section.stator)):
        of_name = {region.name: region_reluctivity(region, settings) for region in regions}
        found.append(np.array([of_name[name] for name in mesh.region_names])[mesh.region_of_elem])
    return np.concatenate(found)


def region_reluctivity(region: Region, settings: FieldSettings) -> float:
    """Reluctivity in m/H of a region that is no steel sheet."""
    if region.material == "magnet" and settings.magnet is not None:
        return settings.magnet.reluctivity
    is_shaft = region.material == "shaft"
    return NU_0 / (
        settings.shaft_relative_permeability if is_shaft else region.relative_permeability
    )


def material_of_elem(sector: SectorMesh, section: CrossSection) -> npt.NDArray[np.str_]:
    """Material of every element, rotor first."""
    parts: tuple[tuple[PlanarMesh, tuple[Region, ...]], ...] = (
        (sector.rotor, section.rotor),
        (sector.stator, section.stator),
    )
    materials = []
    for mesh, regions in parts:
        of_name = {region.name: region.material for region in regions}
        missing = sorted(set(mesh.region_names) - set(of_name))
        if missing:
            raise ValueError(f"regions of the mesh that the section lacks: {', '.join(missing)}")
        of_region = np.array([of_name[name] for name in mesh.region_names])
        materials.append(of_region[mesh.region_of_elem])
    return np.concatenate(materials)


def joined_parts(sector: SectorMesh) -> tuple[FloatArray, IntArray]:
    """Nodes and elements of both parts in the model's numbering."""
    n_rotor = sector.rotor.nodes.shape[0]
    nodes = np.concatenate([sector.rotor.nodes, sector.stator.nodes])
    return nodes, np.concatenate([sector.rotor.elements, sector.stator.elements + n_rotor])


def _rotor_gap(rotor: PlanarMesh, gap: IntArray, entries: Entries, n_dof: int) -> RotorGap:
    node, local = np.unique(rotor.elements[gap], return_inverse=True)
    row, column, matrix = gap_slots(entries, n_dof)
    return RotorGap(
        nodes=rotor.nodes[node],
        elements=local.reshape(len(gap), -1).astype(np.int64),
        node=node,
        row=row,
        column=column,
        scatter=matrix,
    )


def linkage_functional(
    sector: SectorMesh, winding: WindingTable, numbering: Numbering
) -> FloatArray:
    """Phase linkage (3, n_dof) of the sector per metre of stack, in turns: psi = linkage @ a.

    It is the right side of the field equation too, for 1 A in a phase (reciprocity).
    """
    if not repeats(winding, sector.sector_poles):
        raise ValueError("winding: the next sector's conductors are not those of the first, turned")
    stator = sector.stator
    nodal = np.zeros((3, stator.nodes.shape[0]))
    for s in range(winding.slots // sector.sectors):
        for layer in range(winding.layers):
            side = stator.elements_of(f"slot_{s}_layer_{layer}")
            if not side.size:
                raise ValueError(f"mesh: no element in slot_{s}_layer_{layer}")
            integrals = shape_integrals(stator.nodes, stator.elements[side])  # m^2
            mean = np.bincount(
                stator.elements[side].ravel(), integrals.ravel(), stator.nodes.shape[0]
            )
            nodal += np.outer(winding.conductors[s, layer], mean / integrals.sum())
    return stator_functional(numbering, sector, nodal)


def stator_functional(numbering: Numbering, sector: SectorMesh, nodal: FloatArray) -> FloatArray:
    """Functionals of the stator's nodal potentials (m, n_node of stator) as (m, n_dof)."""
    first = sector.rotor.nodes.shape[0]
    dof, sign = numbering.dof[first:], numbering.sign[first:]
    rows = [np.bincount(dof, row * sign, numbering.n_dof + 1)[:-1] for row in nodal]
    return np.array(rows)


def representatives(numbering: Numbering, sector: SectorMesh) -> IntArray:
    """A node of every unknown; the circle's are the stator's."""
    candidates = np.flatnonzero(numbering.sign > 0.0)
    n_rotor = sector.rotor.nodes.shape[0]
    on_circle = numbering.dof[candidates] >= numbering.first_ring
    candidates = candidates[~(on_circle & (candidates < n_rotor))]
    node = np.zeros(numbering.n_dof + 1, dtype=np.int64)
    node[numbering.dof[candidates]] = candidates
    return node[:-1]
