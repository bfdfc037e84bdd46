"""Sectors that repeat inside meshed once: cut into equal wedges, mesh the first, unfold the copies.

A sector from angle 0 to `angle` that is symmetric about its bisector and repeats inside (slots)
is cut by rays into `copies` wedges; wedge j, folded back onto wedge 0 like a paper fan (turned if
j is even, mirrored if odd), must have the same outline. The unfolded mesh is then symmetric to
the last bit, its two sides match, and every slot has the same mesh: no torque on the axes and no
cogging order comes from the mesh. Where slots or poles are not symmetric in themselves, wedges are
turned only. Of a whole circle the last wedge joins the first. Source: derived.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import numpy.typing as npt

from lamwright.geometry.curves import Edge, Path, area
from lamwright.geometry.section import Region

from .mesh_outline import WELD_TOL, ComplexArray, EdgeBook, weld
from .types import FloatArray, IntArray, PlanarMesh

FULL_TOL = 1e-9  # rad, far above rounding and far below any wedge
LEFT_STEP = 1e-7  # m, to the left of an edge: far above WELD_TOL, far below any feature


@dataclass(frozen=True, slots=True, eq=False)
class Fan:
    """A sector as equal wedges: the regions of wedge 0 and what they are in each copy."""

    regions: tuple[Region, ...]  # pieces of wedge 0, named as the regions they are part of
    angle: float  # of one wedge, rad
    copies: int
    owner: IntArray  # (copies, n_piece), number of the sector's region
    mirrored: bool = False  # every second copy

    @property
    def is_full_circle(self) -> bool:
        """Whether the wedges go all the way round."""
        return abs(self.copies * self.angle - 2.0 * math.pi) < FULL_TOL

    @property
    def has_twin_sides(self) -> bool:
        """Whether the two sides of wedge 0 must get the same nodes."""
        return not self.mirrored and not (self.copies == 1 and self.is_full_circle)


def fold(
    regions: Sequence[Region], angle: float, copies: Sequence[int], turned: Sequence[int] = ()
) -> Fan:
    """The sector's finest fan; one wedge if none fits.

    Args:
        regions: of the sector.
        angle: of the sector in rad, up to the whole circle.
        copies: even numbers of wedges to try, every second one mirrored.
        turned: numbers of wedges to try after these, none mirrored.
    """
    tried = [(count, True) for count in sorted(copies, reverse=True)]
    tried += [(count, False) for count in sorted(turned, reverse=True)]
    for count, mirrored in tried:
        fan = _try_fold(regions, angle, count, mirrored)
        if fan is not None:
            return fan
    return Fan(tuple(regions), angle, 1, np.arange(len(regions))[None, :])


def on_ray(points: ComplexArray, angle: float) -> npt.NDArray[np.bool_]:
    """Which points lie on the ray from the axis at `angle`, the axis included."""
    back = points * np.exp(-1j * angle)
    return np.asarray((np.abs(back.imag) < WELD_TOL) & (back.real > -WELD_TOL))


def folded_points(fan: Fan, points: ComplexArray) -> ComplexArray:
    """Points of the sector brought into wedge 0."""
    lead = _leads(points, fan.copies * fan.angle)
    wedge = np.clip(np.floor(lead / fan.angle), 0, fan.copies - 1)
    even = points * np.exp(-1j * wedge * fan.angle)
    if not fan.mirrored:
        return np.asarray(even)
    odd = points.conj() * np.exp(1j * (wedge + 1) * fan.angle)
    return np.asarray(np.where(wedge % 2 == 0, even, odd))


def _leads(points: ComplexArray, angle: float) -> FloatArray:
    """Angles of points of a sector from 0 to `angle`, without a jump inside it."""
    if angle < math.pi + FULL_TOL:
        return np.angle(points)
    return np.asarray(np.angle(points * np.exp(-0.5j * angle)) + 0.5 * angle)


def unfold(fan: Fan, mesh: PlanarMesh, names: tuple[str, ...]) -> PlanarMesh:
    """The sector's mesh from that of wedge 0; corners are numbered before mid-side nodes."""
    z = mesh.nodes[:, 0] + 1j * mesh.nodes[:, 1]
    if fan.copies == 1:
        return mesh
    number = np.arange(z.size)
    nodes, elements, total = [z], [mesh.elements], z.size
    for j in range(1, fan.copies):
        here, there = _shared(fan, z, j)
        before, number = number, np.full(z.size, -1)
        number[here] = before[there]
        if j == fan.copies - 1 and fan.is_full_circle:
            here, there = _shared(fan, z, 0)
            number[there] = here
        fresh = number < 0
        number[fresh] = np.arange(total, total + fresh.sum())
        total += int(fresh.sum())
        nodes.append(_unfolded(fan, z[fresh], j))
        copy = number[mesh.elements]
        elements.append(copy[:, [0, 2, 1, 5, 4, 3]] if fan.mirrored and j % 2 else copy)
    every = np.concatenate(elements)
    is_corner = np.zeros(total, dtype=np.bool_)
    is_corner[every[:, :3]] = True
    order = np.argsort(~is_corner, kind="stable")
    rank = np.empty(total, dtype=np.int64)
    rank[order] = np.arange(total)
    at = np.concatenate(nodes)[order]
    region = np.concatenate([fan.owner[j][mesh.region_of_elem] for j in range(fan.copies)])
    return PlanarMesh(np.column_stack([at.real, at.imag]), rank[every], region, names)


def _shared(fan: Fan, z: ComplexArray, j: int) -> tuple[IntArray, IntArray]:
    """Nodes of wedge 0 that copy j shares with the one before, and their numbers in that one."""
    lower, upper = (np.flatnonzero(on_ray(z, angle)) for angle in (0.0, fan.angle))
    if fan.mirrored:
        one = upper if j % 2 else lower
        both = np.union1d(one, np.intersect1d(lower, upper))
        return both, both
    lower, upper = (side[np.argsort(np.abs(z[side]))] for side in (lower, upper))
    if lower.size != upper.size or np.any(np.abs(np.abs(z[lower]) - np.abs(z[upper])) > WELD_TOL):
        raise ValueError("the two sides of a wedge do not have the same nodes")
    return lower, upper


def _unfolded(fan: Fan, z: ComplexArray, j: int) -> ComplexArray:
    """Points of wedge 0 in copy j."""
    if j % 2 == 0 or not fan.mirrored:
        return z * cmath.exp(1j * j * fan.angle)
    return z.conj() * cmath.exp(1j * (j + 1) * fan.angle)


def _try_fold(regions: Sequence[Region], angle: float, copies: int, mirrored: bool) -> Fan | None:
    """The fan with `copies` wedges, or None where the wedges differ."""
    wedge = angle / copies
    parts = _folded_edges(regions, wedge, copies, mirrored)
    flat = np.array([p for edges in parts.values() for e in edges for p in (e.start, e.end)])
    flat = np.append(flat, 0.0)
    points, number = weld(flat)
    book, origin, at = EdgeBook(points), int(number[-1]), 0
    pieces: list[dict[frozenset[int], int]] = [{} for _ in range(copies)]
    loops_of: dict[frozenset[int], list[list[int]]] = {}
    for (j, k), edges in parts.items():
        ends = number[at : at + 2 * len(edges)].reshape(-1, 2)
        at += 2 * len(edges)
        signed = [book.add(e, int(a), int(b)) for e, (a, b) in zip(edges, ends, strict=True)]
        directed = [(s, int(a), int(b)) for s, (a, b) in zip(signed, ends, strict=True) if s]
        directed += _closing(directed, points, origin, wedge, book)
        for loops in _grouped(_chains(directed), book):
            key = frozenset(s for loop in loops for s in loop)
            pieces[j][key] = k
            loops_of[key] = loops
    first = pieces[0]
    materials = [[regions[piece.get(key, -1)].material for key in first] for piece in pieces]
    if any(p.keys() != first.keys() for p in pieces) or any(m != materials[0] for m in materials):
        return None
    built = []
    for key, k in first.items():
        outer, *holes = (_path(book, loop) for loop in loops_of[key])
        built.append(Region(regions[k].name, regions[k].material, outer, tuple(holes)))
    owner = np.array([[piece[key] for key in first] for piece in pieces], dtype=np.int64)
    return Fan(tuple(built), wedge, copies, owner, mirrored)


def _folded_edges(
    regions: Sequence[Region], wedge: float, copies: int, mirrored: bool
) -> dict[tuple[int, int], list[Edge]]:
    """Edges of each region, cut at the rays and folded onto wedge 0, by (wedge, region)."""
    parts: dict[tuple[int, int], list[Edge]] = {}
    angle = wedge * copies
    # Angles are taken from the middle of a sector so wide that they would jump inside it.
    middle = 0.0 if angle < math.pi + FULL_TOL else 0.5 * angle
    back = cmath.exp(-1j * middle)
    for k, region in enumerate(regions):
        for path in (region.outer, *region.holes):
            for edge in path.edges:
                for part in _cut(edge, wedge, copies):
                    beside = part.point(0.5) + 1j * LEFT_STEP * part.direction(0.5)
                    lead = cmath.phase(beside * back) + middle
                    j = min(max(math.floor(lead / wedge), 0), copies - 1)
                    parts.setdefault((j, k), []).append(_folded(part, j, wedge, mirrored))
    return parts


def _folded(edge: Edge, j: int, wedge: float, mirrored: bool) -> Edge:
    """The edge of wedge j in wedge 0; mirrored ones run the other way to keep areas left."""
    if j % 2 == 0 or not mirrored:
        turn = cmath.exp(-1j * j * wedge)
        return Edge(edge.start * turn, edge.end * turn, edge.bulge)
    turn = cmath.exp(1j * (j + 1) * wedge)
    return Edge(edge.end.conjugate() * turn, edge.start.conjugate() * turn, edge.bulge)


def _cut(edge: Edge, wedge: float, copies: int) -> list[Edge]:
    """The edge cut where it crosses a ray between two wedges."""
    shares = {0.0: edge.start, 1.0: edge.end}
    # The edge lies inside the circle about its chord's middle that also holds its rise.
    middle = 0.5 * (edge.start + edge.end)
    reach = 0.5 * abs(edge.end - edge.start) * max(1.0, abs(edge.bulge))
    for j in range(1, copies):
        turn = cmath.exp(1j * j * wedge)
        if abs((middle / turn).imag) > reach:
            continue
        for share, radius in _crossings(edge, turn):
            shares[share] = radius * turn
    at = sorted(shares)
    return [
        Edge(shares[a], shares[b], math.tan(0.25 * (b - a) * edge.sweep) if edge.bulge else 0.0)
        for a, b in pairwise(at)
    ]


def _crossings(edge: Edge, turn: complex) -> list[tuple[float, float]]:
    """(share, radius) at which the inside of the edge crosses the ray along `turn`."""
    start, end = edge.start / turn, edge.end / turn
    found = []
    if edge.is_line:
        # A line along the ray, as the side of a pole, is not crossed by its own rounding.
        is_across = max(abs(start.imag), abs(end.imag)) > WELD_TOL
        if is_across and start.imag * end.imag < 0.0:
            share = start.imag / (start.imag - end.imag)
            found.append((share, (start + share * (end - start)).real))
    else:
        centre = edge.centre / turn
        under = edge.radius**2 - centre.imag**2
        # A ray that only touches the arc cuts nothing.
        if under > WELD_TOL * edge.radius:
            for x in (centre.real - math.sqrt(under), centre.real + math.sqrt(under)):
                swept = cmath.phase((x - centre) / (start - centre)) % (2.0 * math.pi)
                full = swept if edge.bulge > 0.0 else swept - 2.0 * math.pi
                found.append((full / edge.sweep, x))
    room = WELD_TOL / edge.length
    return [(share, x) for share, x in found if room < share < 1.0 - room and x > WELD_TOL]


def _closing(
    directed: list[tuple[int, int, int]],
    points: ComplexArray,
    origin: int,
    wedge: float,
    book: EdgeBook,
) -> list[tuple[int, int, int]]:
    """Edges along the wedge's two sides that close a cut region: outward below, inward above."""
    missing: dict[int, int] = {}
    for _, a, b in directed:
        missing[a] = missing.get(a, 0) + 1
        missing[b] = missing.get(b, 0) - 1
    made = []
    for is_upper in (False, True):
        on_side = on_ray(points, wedge if is_upper else 0.0)
        side = [n for n, lack in missing.items() if lack and n != origin and on_side[n]]
        if len(side) % 2:
            side.append(origin)
        side.sort(key=lambda n: abs(points[n]), reverse=is_upper)
        for a, b in zip(side[::2], side[1::2], strict=True):
            made.append((book.add(Edge(points[a], points[b]), a, b), a, b))
    return made


def _chains(directed: list[tuple[int, int, int]]) -> list[list[int]]:
    """Directed edges joined to closed loops of signed edge numbers."""
    leaving = {a: (signed, b) for signed, a, b in directed}
    loops = []
    while leaving:
        first = next(iter(leaving))
        loop: list[int] = []
        at = first
        while not loop or at != first:
            signed, at = leaving.pop(at)
            loop.append(signed)
        loops.append(loop)
    return loops


def _path(book: EdgeBook, loop: Sequence[int]) -> Path:
    """A loop of signed edges as a path."""
    edges = []
    for signed in loop:
        edge = book.edges[abs(signed) - 1]
        edges.append(edge if signed > 0 else Edge(edge.end, edge.start, -edge.bulge))
    return Path(tuple(edges))


def _grouped(loops: list[list[int]], book: EdgeBook) -> list[list[list[int]]]:
    """Loops as [outer, hole, ...] for each piece of a region."""
    outers = [[loop] for loop in loops if area(_path(book, loop)) > 0.0]
    for loop in loops:
        path = _path(book, loop)
        if area(path) > 0.0:
            continue
        inside = path.edges[0].start
        home = [o for o in outers if len(outers) == 1 or _winds(_path(book, o[0]), inside)]
        home[0].append(loop)
    return outers


def _winds(path: Path, point: complex) -> bool:
    """Whether the path, drawn with short chords, runs around the point."""
    shares: FloatArray = np.linspace(0.0, 1.0, 17)[:-1]
    around = np.array([edge.point(float(s)) for edge in path.edges for s in shares]) - point
    return bool(abs(np.sum(np.angle(np.roll(around, -1) / around))) > math.pi)
