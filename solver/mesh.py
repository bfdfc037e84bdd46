"""Regions to curved second-order triangles; owner of gmsh.

Idea: nodes on the edges are placed here, by a graded size function; gmsh only fills the polygons
between them with triangles. The second-order nodes are added here too, on the true arcs.
1. Fold the sector where it is symmetric (mesh_fold), weld the edges of the regions (mesh_outline).
   They share edges by construction, so there is no boolean operation.
2. Cut each edge into steps (mesh_sizes, mesh_steps); gmsh gets each step as a line with two nodes.
3. Triangulate, sizes inside extended from the boundary; the air gap is filled by rings (mesh_gap).
4. Add mid-side nodes, on the arcs where a side is part of one. An element that this turns over
   (a coarse arc beside a thin sliver) is cut another way together with its neighbours, where that
   is asked for (mesh_mend); else it has its edges cut finer, and all is done again.
5. Unfold.
"""

import math
import signal
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from threading import Lock, current_thread, main_thread

import numpy as np

from lamwright.geometry.curves import Edge
from lamwright.geometry.errors import MeshError
from lamwright.geometry.section import CrossSection, Region, rotor_cell, rotor_iron

from .mesh_checks import least_jacobian_share
from .mesh_fold import fold, folded_points, unfold
from .mesh_gap import Rings, fill_rings
from .mesh_mend import mended
from .mesh_outline import ComplexArray, Outline, outline_of
from .mesh_plan import (
    MeshSettings,
    circle_edges,
    gaps_of,
    lamination_sizing,
    section_sizing,
    side_twins,
)
from .mesh_sizes import NO_SOURCES, SizeSources, Sizing, node_shares
from .mesh_steps import Steps, read_only, second_order, steps_of
from .types import FloatArray, IntArray, PlanarMesh, SectorMesh

EdgeSizes = Callable[[Edge], float] | Mapping[Edge, float]
MM = 1e3  # gmsh's absolute tolerances (1e-8) are made for numbers of the order of 1
LEAST_JACOBIAN = 0.1  # of the mean; below it an element is taken for turned over
# gmsh's number of the 2D method: 6 and 5 gave the same counts within 5 %, least angle 24 degrees
# and the same time on two demo designs; 8 took twice as long, 1 gave angles of 3 degrees.
ALGORITHM = 6
GMSH_LOCK = Lock()  # gmsh has one current model per process
MAX_ROUNDS = 6  # of halving the steps beside bad elements
OCTAVE_PARTS = 4  # sizes of points inside are grouped by quarter octaves: one field per group


@dataclass(frozen=True, slots=True)
class RegionSettings:
    """How a set of regions is meshed."""

    growth: float = 0.35  # change of side per distance
    # Area of a full circle right to 1e-5 (derived: a parabola through three points of an arc of
    # radius r and angle f misses r^2 f^5 / 960 of its segment).
    step_angle: float = math.pi / 12.0


def mesh_regions(
    regions: Sequence[Region],
    edge_sizes: EdgeSizes,
    settings: RegionSettings | None = None,
    refine_at: SizeSources = NO_SOURCES,
    turn_sides: float | None = None,
) -> PlanarMesh:
    """Mesh of any regions that share their touching edges.

    Args:
        regions: areas with identical edges (either way) where they touch.
        edge_sizes: wanted element side in m on each edge, as a function or a table of every edge.
        settings: growth, steps on arcs and method.
        refine_at: points with a wanted side, on edges or inside.
        turn_sides: angle in rad of a sector whose two sides are to get the same nodes, turned.

    Returns:
        Mesh with `region_of_elem` in the order of `regions`.

    Raises:
        ValueError: where a path is open.
        MeshError: where the mesh cannot be made valid.
    """
    settings = settings or RegionSettings()
    outline = outline_of(regions)
    size_of = edge_sizes.__getitem__ if isinstance(edge_sizes, Mapping) else edge_sizes
    sizing = Sizing(
        edge_sizes=np.array([size_of(edge) for edge in outline.edges], dtype=np.float64),
        growth=settings.growth,
        step_angle=settings.step_angle,
        sources=refine_at,
        twins=() if turn_sides is None else side_twins(outline, turn_sides),
    )
    names = tuple(region.name for region in regions)
    return read_only(_mesh(outline, sizing, names, refine_at))


def mesh_section(section: CrossSection, settings: MeshSettings | None = None) -> SectorMesh:
    """Mesh of a sector for the magnetic field, rotor and stator apart.

    Args:
        section: the sector.
        settings: sizes.

    Returns:
        Both meshes in their own frames, with the same evenly spaced nodes on the turning circle.

    Raises:
        MeshError: where the mesh cannot be made valid.
    """
    settings = settings or MeshSettings()
    n_circle = circle_edges(section, settings)
    slots = section.sector_slots
    rotor, stator = rotor_copies(section), ((2 * slots, 2), (slots,))
    return SectorMesh(
        rotor=_mesh_part(section, section.rotor, rotor, n_circle, settings),
        stator=_mesh_part(section, section.stator, stator, n_circle, settings),
        pole_pairs=section.pole_pairs,
        circle_radius=section.circle_radius,
        n_circle=n_circle,
        sector_poles=section.sector_poles,
    )


def rotor_copies(section: CrossSection) -> tuple[tuple[int, ...], tuple[int, ...]]:
    """Numbers of wedges that the rotor's sector may fold into: mirrored and turned ones."""
    poles, periods = section.sector_poles, section.sector_poles // section.rotor_period
    turned = {n for n in (poles, periods) if n > 1}
    return tuple({2 * poles, 2 * periods}), tuple(turned)


def _mesh_part(
    section: CrossSection,
    regions: Sequence[Region],
    copies: tuple[Sequence[int], Sequence[int]],
    n_circle: int,
    settings: MeshSettings,
) -> PlanarMesh:
    """Rotor or stator, by its finest fan."""
    mirrored, turned = ([c for c in counts if n_circle % c == 0] for counts in copies)
    fan = fold(regions, section.sector_angle, mirrored, turned)
    outline = outline_of(fan.regions)
    sizing = section_sizing(section, fan, outline, n_circle, settings)
    names = tuple(region.name for region in regions)
    piece_names = tuple(region.name for region in fan.regions)
    mesh = _mesh(outline, sizing, piece_names, NO_SOURCES, gaps_of(fan), settings.mends)
    return read_only(unfold(fan, mesh, names))


def mesh_lamination(
    section: CrossSection,
    settings: MeshSettings | None = None,
    refine_at: SizeSources = NO_SOURCES,
) -> PlanarMesh:
    """Mesh of the rotor lamination's own period alone, for stress: one pole where all are alike.

    Args:
        section: a sector.
        settings: sizes; `scale` refines all of them.
        refine_at: points with a wanted side, as an adaptive loop asks for.

    Returns:
        The iron only; nodes on the far side are those at angle 0, turned.

    Raises:
        MeshError: where the mesh cannot be made valid.
    """
    settings = settings or MeshSettings()
    section = rotor_cell(section)
    iron = rotor_iron(section)
    fan = fold(iron, section.sector_angle, *rotor_copies(section))
    refine = SizeSources(folded_points(fan, refine_at.points), refine_at.sizes)
    outline = outline_of(fan.regions)
    sizing = lamination_sizing(section, fan, outline, refine, settings)
    names = tuple(region.name for region in iron)
    mesh = _mesh(outline, sizing, names, refine)
    return read_only(unfold(fan, mesh, names))


def _mesh(
    outline: Outline,
    sizing: Sizing,
    names: tuple[str, ...],
    inside: SizeSources,
    gaps: Sequence[int] = (),
    mends: bool = False,
) -> PlanarMesh:
    """Mesh of an outline; regions number `gaps` are filled by rings; `MeshSettings.mends`."""
    for _ in range(MAX_ROUNDS):
        shares = node_shares(outline.edges, sizing)
        steps = steps_of(outline, shares)
        free = [k for k in range(len(outline.loops)) if k not in gaps]
        loops = [[steps.loop(loop) for loop in outline.loops[k]] for k in free]
        nodes, corners, count = _fill(steps, loops, inside, sizing.growth)
        region = np.repeat(free, count)
        sides, middles = steps.steps, steps.middles
        for gap in gaps:
            rings = _gap_rings(outline, steps, nodes, gap)
            nodes = np.concatenate([nodes, rings.nodes])
            corners = np.concatenate([corners, rings.corners])
            region = np.concatenate([region, np.full(len(rings.corners), gap)])
            sides = np.concatenate([sides, rings.steps])
            middles = np.concatenate([middles, rings.middles])
        mesh = second_order(nodes, corners, (sides, middles), region, names)
        bad = least_jacobian_share(mesh.nodes[mesh.elements]) < LEAST_JACOBIAN
        if mends and np.any(bad):
            curved = (sides, middles)
            corners = mended(nodes, corners, region, curved, bad, LEAST_JACOBIAN)
            mesh = second_order(nodes, corners, (sides, middles), region, names)
            bad = least_jacobian_share(mesh.nodes[mesh.elements]) < LEAST_JACOBIAN
        if not np.any(bad):
            return mesh
        # Corner numbers before unused nodes were dropped are those of `corners`.
        touched = np.isin(steps.steps, corners[bad]).all(axis=1)
        sizing = _finer(outline, sizing, np.unique(steps.edge_of_step[touched]), shares)
    raise MeshError(f"{int(bad.sum())} elements stay turned over after {MAX_ROUNDS} refinements")


def _finer(
    outline: Outline, sizing: Sizing, guilty: IntArray, shares: Sequence[FloatArray]
) -> Sizing:
    """The sizing with steps of half the length on the guilty edges."""
    sizes = sizing.edge_sizes.copy()
    for k in guilty.tolist():
        longest = float(np.diff(shares[k]).max()) * outline.edges[k].length
        sizes[k] = 0.5 * min(sizes[k], longest)
    return replace(sizing, edge_sizes=sizes)


def _gap_rings(outline: Outline, steps: Steps, nodes: ComplexArray, gap: int) -> Rings:
    """Rings between the two arcs of a gap region."""
    arcs: dict[int, list[IntArray]] = {1: [], -1: []}
    sides: list[IntArray] = []
    for signed in outline.loops[gap][0]:
        edge = outline.edges[abs(signed) - 1]
        chain = steps.chain(signed)
        if edge.is_line:
            sides.append(chain if abs(nodes[chain[0]]) < abs(nodes[chain[-1]]) else chain[::-1])
        else:
            # The outer path runs counter-clockwise: forward on the outer arc, back on the inner.
            arcs[1 if signed * edge.bulge > 0.0 else -1].append(chain)
    inner, outer = (np.unique(np.concatenate(arcs[k])) for k in (-1, 1))
    # A later pole's angles may jump within it: it is filled about the positive x axis.
    middle = complex(nodes[outer].mean())
    turn = middle.conjugate() / abs(middle) if np.any(np.angle(nodes[outer]) < 0.0) else 1.0 + 0.0j
    at = nodes * turn
    sides.sort(key=lambda chain: float(np.angle(at[chain[0]])))
    inner, outer = (ring[np.argsort(np.angle(at[ring]))] for ring in (inner, outer))
    rings = fill_rings(at, inner, outer, (sides[0], sides[1]))
    return replace(rings, nodes=rings.nodes / turn, middles=rings.middles / turn)


def _fill(
    steps: Steps,
    loops: Sequence[Sequence[Sequence[int]]],
    inside: SizeSources,
    growth: float,
) -> tuple[ComplexArray, IntArray, list[int]]:
    """Corner nodes (given nodes first), triangles (n_elem, 3), number of triangles per region."""
    with GMSH_LOCK:
        tags, coords, found = _run_gmsh(steps, loops, inside, growth)
    xyz = coords.reshape(-1, 3)[np.argsort(tags)]
    nodes = np.asarray((xyz[:, 0] + 1j * xyz[:, 1]) / MM, dtype=np.complex128)
    given = slice(steps.nodes.size)
    assert np.allclose(nodes[given], steps.nodes, rtol=0.0, atol=1e-12)  # gmsh keeps the order
    nodes[given] = steps.nodes
    corners = np.concatenate(found).reshape(-1, 3).astype(np.int64) - 1
    return nodes, corners, [f.size // 3 for f in found]


def _run_gmsh(
    steps: Steps,
    loops: Sequence[Sequence[Sequence[int]]],
    inside: SizeSources,
    growth: float,
) -> tuple[IntArray, FloatArray, list[IntArray]]:
    """Node tags, their coordinates and the corner tags of each region's triangles."""
    import gmsh

    # Begun anew each time (1 ms): a second mesh of the same regions in one process was another.
    is_ours = not gmsh.isInitialized()
    if is_ours:
        begin_gmsh()
    for option, value in {
        "General.Terminal": 0,
        "General.NumThreads": 1,
        "Mesh.RandomSeed": 1,
        "Mesh.Algorithm": ALGORITHM,
        "Mesh.MeshSizeFromPoints": 0,
        "Mesh.MeshSizeFromCurvature": 0,
        "Mesh.MeshSizeExtendFromBoundary": 1,
    }.items():
        gmsh.option.setNumber(option, value)
    gmsh.model.add("lamwright")
    try:
        geo = gmsh.model.geo
        for z in (steps.nodes * MM).tolist():
            geo.addPoint(z.real, z.imag, 0.0)
        needed = {abs(n) for region in loops for loop in region for n in loop}
        pairs = (steps.steps + 1).tolist()
        for n in sorted(needed):
            geo.addLine(*pairs[n - 1], n)
            geo.mesh.setTransfiniteCurve(n, 2)
        for k, region in enumerate(loops):
            geo.addPlaneSurface([geo.addCurveLoop(list(loop)) for loop in region], k + 1)
        geo.synchronize()
        if inside.sizes.size:
            _add_size_field(inside, growth)
        try:
            gmsh.model.mesh.generate(2)
        except Exception as fault:  # gmsh raises no narrower kind
            raise MeshError(f"no mesh between these edges: {fault}") from fault
        tags, coords, _ = gmsh.model.mesh.getNodes()
        found = [gmsh.model.mesh.getElementsByType(2, k + 1)[1] for k in range(len(loops))]
    finally:
        gmsh.model.remove()
        if is_ours:
            gmsh.finalize()
    return tags, coords, found


def begin_gmsh() -> None:
    """Begin gmsh without its side effects on the process.

    It makes SIGPIPE end the process without a word, where Python has the write fail: a reader of
    our output, or a worker, that goes away would take us along.
    """
    import gmsh

    at_pipe = signal.getsignal(signal.SIGPIPE) if hasattr(signal, "SIGPIPE") else None
    # interruptible=False: no handler of the interrupt key, so that it works in any thread.
    gmsh.initialize(readConfigFiles=False, interruptible=False)
    if at_pipe is not None and current_thread() is main_thread():  # others may not set it
        signal.signal(signal.SIGPIPE, at_pipe)


def _add_size_field(inside: SizeSources, growth: float) -> None:
    """Let sizes inside grow from the given points; one distance field per quarter octave."""
    import gmsh

    field = gmsh.model.mesh.field
    octave = np.floor(OCTAVE_PARTS * np.log2(inside.sizes)).astype(np.int64)
    grown = []
    for group in np.unique(octave):
        chosen = octave == group
        points = [gmsh.model.geo.addPoint(z.real, z.imag, 0.0) for z in inside.points[chosen] * MM]
        gmsh.model.geo.synchronize()
        distance, law = field.add("Distance"), field.add("MathEval")
        field.setNumbers(distance, "PointsList", points)
        size = float(inside.sizes[chosen].min()) * MM
        field.setString(law, "F", f"{size!r} + {growth!r} * F{distance}")
        grown.append(law)
    least = field.add("Min")
    field.setNumbers(least, "FieldsList", grown)
    field.setAsBackgroundMesh(least)
