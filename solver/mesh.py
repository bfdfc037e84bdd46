"""Regions to curved second-order triangles; owner of gmsh.

Idea: nodes on the edges are placed here, by a graded size function; gmsh only fills the polygons
between them with triangles. The second-order nodes are added here too, on the true arcs.
1. Weld the regions' edges (they share them by construction, so there is no boolean operation).
2. Cut each edge into steps; gmsh gets each step as a straight line with two nodes.
3. Triangulate, sizes inside extended from the boundary.
4. Add mid-side nodes, on the arcs where a side is part of one. An element that this turns over
   (a coarse arc beside a thin sliver) has its arcs cut finer and all is done again.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.curves import Edge
from lamwright.geometry.section import Region

from .mesh_checks import least_jacobian_share
from .mesh_outline import ComplexArray, Outline, outline_of
from .mesh_sizes import SizeSources, node_shares, points_at
from .types import FloatArray, IntArray, PlanarMesh

EdgeSizes = Callable[[Edge], float] | Mapping[Edge, float]
MM = 1e3  # gmsh's absolute tolerances (1e-8) are made for numbers of the order of 1
LEAST_JACOBIAN = 0.1  # of the mean; below it an element is taken for turned over
MAX_ROUNDS = 6  # of halving the arcs beside bad elements


@dataclass(frozen=True, slots=True)
class RegionSettings:
    """How a set of regions is meshed."""

    growth: float = 0.35  # change of edge length per distance
    algorithm: int = 6  # gmsh's number of the 2D method


@dataclass(frozen=True, slots=True, eq=False)
class _Steps:
    """Straight steps between nodes on the edges: what gmsh gets."""

    nodes: ComplexArray  # (n_node,), m
    steps: IntArray  # (n_step, 2), node numbers
    middles: ComplexArray  # (n_step,), the true middle on the edge
    edge_of_step: IntArray  # (n_step,)
    loops: tuple[tuple[tuple[int, ...], ...], ...]  # signed step numbers from 1


def mesh_regions(
    regions: Sequence[Region],
    edge_sizes: EdgeSizes,
    settings: RegionSettings | None = None,
    refine_at: SizeSources | None = None,
) -> PlanarMesh:
    """Mesh of any regions that share their touching edges.

    Args:
        regions: areas with identical edges (either way) where they touch.
        edge_sizes: wanted element side in m on each edge, as a function or a table of every edge.
        settings: growth and method.
        refine_at: more points with a wanted size, on edges or inside.

    Returns:
        Mesh with `region_of_elem` in the order of `regions`.

    Raises:
        ValueError: where a path is open or the mesh cannot be made valid.
    """
    settings = settings or RegionSettings()
    outline = outline_of(regions)
    size_of = edge_sizes.__getitem__ if isinstance(edge_sizes, Mapping) else edge_sizes
    sizes = np.array([size_of(edge) for edge in outline.edges], dtype=np.float64)
    names = tuple(region.name for region in regions)
    for _ in range(MAX_ROUNDS):
        shares = node_shares(outline.edges, sizes, refine_at, settings.growth)
        steps = _steps_of(outline, shares)
        mesh = _second_order(steps, *_fill(steps, settings, refine_at), names)
        bad = least_jacobian_share(mesh.nodes[mesh.elements]) < LEAST_JACOBIAN
        if not np.any(bad):
            return mesh
        touched = np.isin(steps.steps, mesh.elements[bad][:, :3]).all(axis=1)
        guilty = np.unique(steps.edge_of_step[touched])
        sizes[guilty] = 0.5 * np.minimum(sizes[guilty], [_step(outline, shares, g) for g in guilty])
    raise ValueError(f"{int(bad.sum())} elements stay turned over after {MAX_ROUNDS} refinements")


def _step(outline: Outline, shares: list[FloatArray], edge: int) -> float:
    """Longest step on an edge in m."""
    return float(np.diff(shares[edge]).max()) * outline.edges[edge].length


def _steps_of(outline: Outline, shares: list[FloatArray]) -> _Steps:
    """Number the nodes (points of the outline first) and the steps of all edges."""
    nodes, steps, middles, edge_of_step = [outline.points], [], [], []
    numbers: list[list[int]] = []  # steps of each edge, from 1
    n_node, n_step = outline.points.size, 0
    for k, (edge, share) in enumerate(zip(outline.edges, shares, strict=True)):
        inner = np.arange(n_node, n_node + share.size - 2)
        chain = np.concatenate([outline.ends[k, :1], inner, outline.ends[k, 1:]])
        nodes.append(points_at(edge, share[1:-1]))
        steps.append(np.column_stack([chain[:-1], chain[1:]]))
        middles.append(points_at(edge, 0.5 * (share[1:] + share[:-1])))
        edge_of_step.append(np.full(share.size - 1, k))
        numbers.append(list(range(n_step + 1, n_step + share.size)))
        n_node, n_step = n_node + inner.size, n_step + share.size - 1

    def cut(loop: tuple[int, ...]) -> tuple[int, ...]:
        return tuple(
            n
            for s in loop
            for n in (numbers[s - 1] if s > 0 else [-n for n in reversed(numbers[-s - 1])])
        )

    return _Steps(
        nodes=np.concatenate(nodes),
        steps=np.concatenate(steps).astype(np.int64),
        middles=np.concatenate(middles),
        edge_of_step=np.concatenate(edge_of_step).astype(np.int64),
        loops=tuple(tuple(cut(loop) for loop in loops) for loops in outline.loops),
    )


def _fill(
    steps: _Steps, settings: RegionSettings, refine_at: SizeSources | None
) -> tuple[ComplexArray, IntArray, IntArray]:
    """Corner nodes (given nodes first), triangles (n_elem, 3) and their regions, by gmsh."""
    import gmsh

    if not gmsh.isInitialized():
        # interruptible=False: no signal handler, so that it works in any thread.
        gmsh.initialize(readConfigFiles=False, interruptible=False)
    for option, value in {
        "General.Terminal": 0,
        "General.NumThreads": 1,
        "Mesh.RandomSeed": 1,
        "Mesh.Algorithm": settings.algorithm,
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
        for n, (a, b) in enumerate((steps.steps + 1).tolist(), start=1):
            geo.addLine(a, b, n)
            geo.mesh.setTransfiniteCurve(n, 2)
        for k, loops in enumerate(steps.loops):
            geo.addPlaneSurface([geo.addCurveLoop(list(loop)) for loop in loops], k + 1)
        geo.synchronize()
        if refine_at is not None and refine_at.sizes.size:
            _add_size_field(refine_at, settings.growth)
        gmsh.model.mesh.generate(2)
        tags, coords, _ = gmsh.model.mesh.getNodes()
        found = [gmsh.model.mesh.getElementsByType(2, k + 1)[1] for k in range(len(steps.loops))]
    finally:
        gmsh.model.remove()
    xyz = coords.reshape(-1, 3)[np.argsort(tags)]
    n_given = steps.nodes.size
    nodes = (xyz[:, 0] + 1j * xyz[:, 1]) / MM
    assert np.allclose(nodes[:n_given], steps.nodes, rtol=0.0, atol=1e-12)  # gmsh keeps the order
    nodes[:n_given] = steps.nodes
    corners = np.concatenate(found).reshape(-1, 3).astype(np.int64) - 1
    region = np.repeat(np.arange(len(found)), [f.size // 3 for f in found])
    used, back = np.unique(corners, return_inverse=True)  # points of size fields are no nodes
    return nodes[used], back.reshape(-1, 3), region


def _add_size_field(refine_at: SizeSources, growth: float) -> None:
    """Let sizes inside grow from the given points; one distance field per quarter octave."""
    import gmsh

    field = gmsh.model.mesh.field
    octave = np.floor(4.0 * np.log2(refine_at.sizes)).astype(np.int64)
    grown = []
    for group in np.unique(octave):
        chosen = octave == group
        points = [
            gmsh.model.geo.addPoint(z.real, z.imag, 0.0) for z in refine_at.points[chosen] * MM
        ]
        gmsh.model.geo.synchronize()
        distance, law = field.add("Distance"), field.add("MathEval")
        field.setNumbers(distance, "PointsList", points)
        size = float(refine_at.sizes[chosen].min()) * MM
        field.setString(law, "F", f"{size!r} + {growth!r} * F{distance}")
        grown.append(law)
    least = field.add("Min")
    field.setNumbers(least, "FieldsList", grown)
    field.setAsBackgroundMesh(least)


def _second_order(
    steps: _Steps, nodes: ComplexArray, corners: IntArray, region: IntArray, names: tuple[str, ...]
) -> PlanarMesh:
    """Add mid-side nodes, on the true edges where a side is a step of one."""
    turned = _cross(nodes, corners) < 0.0
    corners[turned] = corners[turned][:, [0, 2, 1]]
    sides = np.sort(corners[:, [[0, 1], [1, 2], [0, 2]]].reshape(-1, 2), axis=1)
    code, back = np.unique(sides[:, 0] * nodes.size + sides[:, 1], return_inverse=True)
    low, high = np.divmod(code, nodes.size)
    middles = 0.5 * (nodes[low] + nodes[high])
    step = np.sort(steps.steps, axis=1)
    middles[np.searchsorted(code, step[:, 0] * nodes.size + step[:, 1])] = steps.middles
    every = np.concatenate([nodes, middles])
    elements = np.concatenate([corners, nodes.size + back.reshape(-1, 3)], axis=1)
    return _frozen(every, elements, region, names)


def _cross(nodes: ComplexArray, corners: IntArray) -> FloatArray:
    """Twice the signed areas of triangles, m^2."""
    a, b, c = (nodes[corners[:, k]] for k in range(3))
    return np.asarray(((b - a).conj() * (c - a)).imag)


def _frozen(
    nodes: ComplexArray, elements: IntArray, region: IntArray, names: tuple[str, ...]
) -> PlanarMesh:
    """The mesh with read-only arrays."""
    xy = np.column_stack([nodes.real, nodes.imag])
    for array in (xy, elements, region):
        array.setflags(write=False)
    return PlanarMesh(xy, elements, region, names)
