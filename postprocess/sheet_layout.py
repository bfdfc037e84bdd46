"""Blocks on paper: the largest scales at which all find room, on the smallest paper."""

from collections.abc import Sequence
from dataclasses import dataclass

from lamwright.geometry.curves import Point

from .sheet_ink import Picture

GAP = 6.0  # mm between blocks


@dataclass(frozen=True, slots=True)
class Room:
    """A free rectangle in mm."""

    low: Point
    high: Point

    @property
    def width(self) -> float:
        """In mm."""
        return self.high.real - self.low.real

    @property
    def height(self) -> float:
        """In mm."""
        return self.high.imag - self.low.imag


@dataclass(frozen=True, slots=True)
class Block:
    """A picture to place, and the corner it prefers: from top left, or from bottom right."""

    picture: Picture
    is_right: bool = False


def packed(blocks: Sequence[Block], space: Room, taken: Sequence[Room]) -> list[Picture] | None:
    """Blocks moved to places of their own, in their order; None where one finds no room.

    Free space is kept as its greatest rectangles, which may overlap: common practice, no source.
    """
    free = [space]
    for room in taken:
        free = _without(free, room)
    found: list[Picture] = []
    for block in blocks:
        size = block.picture.size + GAP * (1 + 1j)
        fitting = [r for r in free if r.width >= size.real and r.height >= size.imag]
        if not fitting:
            return None
        room = min(fitting, key=lambda r: _rank(r, block, size))
        corner = (
            complex(room.high.real - size.real, room.low.imag)
            if block.is_right
            else complex(room.low.real, room.high.imag - size.imag)
        )
        own = Room(corner, corner + size)
        found.append(block.picture.moved(corner + 0.5 * GAP * (1 + 1j) - block.picture.box[0]))
        free = _without(free, own)
    return found


def _rank(room: Room, block: Block, size: Point) -> tuple[float, float]:
    if block.is_right:
        return (room.low.imag, -room.high.real)
    return (-room.high.imag, room.low.real)


def _without(free: Sequence[Room], taken: Room) -> list[Room]:
    """The greatest free rectangles that are left."""
    cut: list[Room] = []
    for room in free:
        if (
            taken.low.real >= room.high.real
            or taken.high.real <= room.low.real
            or taken.low.imag >= room.high.imag
            or taken.high.imag <= room.low.imag
        ):
            cut.append(room)
            continue
        low, high = room.low, room.high
        cut += [
            Room(low, complex(taken.low.real, high.imag)),
            Room(complex(taken.high.real, low.imag), high),
            Room(low, complex(high.real, taken.low.imag)),
            Room(complex(low.real, taken.high.imag), high),
        ]
    cut = [room for room in cut if room.width > GAP and room.height > GAP]
    return [room for room in cut if not any(_is_inside(room, o) for o in cut if o is not room)]


def _is_inside(room: Room, other: Room) -> bool:
    return (
        room.low.real >= other.low.real
        and room.low.imag >= other.low.imag
        and room.high.real <= other.high.real
        and room.high.imag <= other.high.imag
        and room != other
    )
