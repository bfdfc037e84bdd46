"""Magnet blocks in the cavities of a barrier: rectangles across its bottom, or along its arms.

A block stands square to the barrier where its middle is: the cavity is cut by a line whose angles
with both walls are equal, and the block's thickness lies along that line. It keeps the clearance
to every wall, measured as the nearest distance; where no thickness is stated it takes what the
clearance leaves, where one is stated it lies in the middle. All is found on the cavity's outline
itself, so any family of barriers may hold magnets.

Everything is in the q axis's frame (shaft axis at 0, q axis along +x), in m.
Source of all formulas: derived, plane geometry.
"""

from collections.abc import Sequence
from dataclasses import dataclass

from .corners import crossings, is_within
from .curves import (
    Edge,
    Path,
    Point,
    closed,
    line,
    mirrored_edge,
    offset_edge,
    reversed_edge,
    reversed_path,
    share_of,
    turned,
)
from .design import BarrierMagnetDesign
from .section import Region

MM = 1e-3  # m
SEAT_TOL = 1e-13  # m, rounding of a machine's size
TURN_TOL = 1e-12  # rad
SEAT_STEPS = 100  # the walls' angle shrinks by half or more in each, 45 bring it to rounding
LETTERS = "ab"


class NoRoom(ValueError):
    """A block that has no place in its barrier, whatever its clearance."""


@dataclass(frozen=True, slots=True)
class Block:
    """One block: its counter-clockwise outline, and the unit vector along its remanence."""

    path: Path
    magnetisation: complex
    cavity: int  # number of the cavity that holds it


@dataclass(frozen=True, slots=True)
class _Seat:
    """Where a block stands: its cavity, a point between the walls, and the way across."""

    cavity: int
    origin: Point
    across: complex  # unit vector from the shaft's side to the rim's


def magnet_blocks(magnet: BarrierMagnetDesign, cavities: Sequence[Path]) -> tuple[Block, ...]:
    """The blocks of a barrier, clockwise one first; whether they fit is left to `magnet_checks`.

    Args:
        magnet: of the barrier.
        cavities: of the barrier, counter-clockwise.

    Raises:
        NoRoom: when a block has no place, or nothing is left of its thickness.
    """
    height = MM * magnet.offset_mm
    upper = _block(magnet, cavities, height)
    if height == 0.0:
        return (upper,)
    # The other half of the pole may be unlike this one, so its block is placed for itself.
    mirrored = _block(magnet, [_mirrored(path) for path in cavities], height)
    lower = Block(_mirrored(mirrored.path), mirrored.magnetisation.conjugate(), mirrored.cavity)
    return (lower, upper)


def with_magnets(
    number: int, magnet: BarrierMagnetDesign | None, cavities: Sequence[Region], q_axis: float
) -> tuple[Region, ...]:
    """The cavities of barrier `number`, those with magnets holed by them, and the magnets.

    Args:
        number: from 1 at the rim.
        magnet: of the barrier, None for an empty one.
        cavities: in the rotor's frame.
        q_axis: angle of the q axis there, rad.

    Raises:
        NoRoom: when a block has no place.
    """
    if magnet is None:
        return tuple(cavities)
    blocks = magnet_blocks(magnet, [turned(region.outer, -q_axis) for region in cavities])
    turn = turned(Path((line(0j, 1.0 + 0j),)), q_axis).edges[0].end
    magnets = []
    holes: dict[int, tuple[Path, ...]] = {}
    for letter, block in zip(LETTERS, blocks, strict=False):
        name = f"magnet_{number}" if len(blocks) == 1 else f"magnet_{number}_{letter}"
        path = turned(block.path, q_axis)
        magnets.append(Region(name, "magnet", path, (), block.magnetisation * turn))
        holes[block.cavity] = (*holes.get(block.cavity, ()), reversed_path(path))
    holed = [
        Region(region.name, region.material, region.outer, holes.get(k, ()))
        for k, region in enumerate(cavities)
    ]
    return (*holed, *magnets)


def _block(magnet: BarrierMagnetDesign, cavities: Sequence[Path], height: float) -> Block:
    seat = _seat(cavities, height)
    half_width = 0.5 * MM * magnet.width_mm
    low, high = _room(cavities[seat.cavity], seat, half_width, MM * magnet.clearance_mm)
    if magnet.thickness_mm is not None:
        middle, half = 0.5 * (low + high), 0.5 * MM * magnet.thickness_mm
        low, high = middle - half, middle + half
    if high <= low:
        raise NoRoom("nothing is left of its thickness")
    corners = [
        seat.origin + seat.across * complex(u, v)
        for u, v in (
            (low, -half_width),
            (high, -half_width),
            (high, half_width),
            (low, half_width),
        )
    ]
    path = Path(tuple(line(a, b) for a, b in zip(corners, corners[1:] + corners[:1], strict=True)))
    along = seat.across if magnet.polarity == "outward" else -seat.across
    return Block(path, along, seat.cavity)


def _seat(cavities: Sequence[Path], height: float) -> _Seat:
    """Square to both walls, with its middle at `height` above the q axis."""
    starts = []
    for k, path in enumerate(cavities):
        hits = sorted(u for u, _ in _hits(path, complex(0.0, height), 1.0 + 0j))
        if len(hits) > 1:
            starts.append((hits[0], k, complex(0.5 * (hits[0] + hits[1]), height)))
    if not starts:
        raise NoRoom("no cavity lies at that distance from the q axis")
    _, cavity, origin = min(starts, key=lambda start: start[0])
    across = 1.0 + 0j
    for _ in range(SEAT_STEPS):
        hits_both = _hits(cavities[cavity], origin, across)
        below = max((hit for hit in hits_both if hit[0] < 0.0), key=_height, default=None)
        above = min((hit for hit in hits_both if hit[0] > 0.0), key=_height, default=None)
        if below is None or above is None:
            break
        along = above[1] - below[1]  # the path runs up on the rim's side, down on the shaft's
        if abs(along) < 0.5 or along.imag <= 0.0:
            break
        along /= abs(along)
        middle = origin + across * 0.5 * (below[0] + above[0])
        moved = middle + along * (height - middle.imag) / along.imag
        step, turn = abs(moved - origin), abs(-1j * along - across)
        origin, across = moved, -1j * along
        if step < SEAT_TOL and turn < TURN_TOL:
            return _Seat(cavity, origin, across)
    raise NoRoom("the barrier has no two walls there")


def _height(hit: tuple[float, complex]) -> float:
    return hit[0]


def _hits(path: Path, origin: Point, across: complex) -> list[tuple[float, complex]]:
    """Where the line through `origin` meets the path: distance along it, the path's direction."""
    probe = line(origin, origin + across)
    return [
        (((point - origin) / across).real, edge.direction(share_of(edge, point)))
        for edge in path.edges
        for point in crossings(probe, edge)
        if is_within(edge, point)
    ]


def _room(path: Path, seat: _Seat, half_width: float, clearance: float) -> tuple[float, float]:
    """Between which distances from the seat a block keeps the clearance from both walls."""
    rim: list[float] = []
    shaft: list[float] = []
    for edge in path.edges:
        try:
            wall = _local(offset_edge(edge, clearance), seat)
        except ValueError:  # a round tighter than the clearance has no parallel inside
            continue
        for point, direction in _within(wall, half_width):
            (rim if direction.imag > 0.0 else shaft).append(point.real)
    high = min((u for u in rim if u > 0.0), default=0.0)
    return max((u for u in shaft if u < high), default=high), high


def _local(edge: Edge, seat: _Seat) -> Edge:
    start, end = ((point - seat.origin) / seat.across for point in (edge.start, edge.end))
    return Edge(start, end, edge.bulge)


def _within(edge: Edge, half_width: float) -> list[tuple[Point, complex]]:
    """Ends and extremes of the part of a wall beside the block, with the wall's direction."""
    points = [edge.start, edge.end]
    for v in (-half_width, half_width):
        points += crossings(edge, line(complex(0.0, v), complex(1.0, v)))
    if not edge.is_line:
        points += [edge.centre + edge.radius, edge.centre - edge.radius]
    room = half_width * (1.0 + 1e-12)
    return [
        (point, edge.direction(share_of(edge, point)))
        for point in points
        if abs(point.imag) <= room and is_within(edge, point)
    ]


def _mirrored(path: Path) -> Path:
    return closed([mirrored_edge(reversed_edge(edge)) for edge in reversed(path.edges)])
