"""The cavities of one barrier: a band cut by its radial ribs into closed paths."""

from collections.abc import Sequence
from dataclasses import dataclass

from .bands import Band, merged
from .curves import Edge, Path, Point, closed, mirrored_edge, piece, reversed_edge, share_of
from .rib_cuts import RibCut, RibSide, rib_sides, thinnest

SLIVER = 1e-12  # m, an edge so short is rounding: a fillet that ends where an arc does


@dataclass(frozen=True, slots=True)
class CutBarrier:
    """Cavities counter-clockwise about the shaft axis, and the thinnest place of each rib (m)."""

    cavities: tuple[Path, ...]
    ribs: tuple[tuple[Point, Point], ...]  # on the clockwise cavity, on the other


def cut_barrier(band: Band, cuts: tuple[RibCut, ...]) -> CutBarrier:
    """A barrier's cavities, one more than there are ribs, all corners rounded.

    Args:
        band: the barrier in the q axis's frame.
        cuts: its radial ribs, counter-clockwise.

    Raises:
        ValueError: if a rib or fillet does not fit; `checks` says what would.
    """
    return joined(band, cuts, [rib_sides(band, cut) for cut in cuts])


def joined(
    band: Band, cuts: tuple[RibCut, ...], sides: Sequence[tuple[RibSide, RibSide]]
) -> CutBarrier:
    """As `cut_barrier`, from the sides of the ribs as `rib_cuts.rib_sides` gives them."""
    lows: list[RibSide | None] = [None, *(above for _, above in sides)]
    highs: list[RibSide | None] = [*(below for below, _ in sides), None]
    paths = [_cavity(band, low, high) for low, high in zip(lows, highs, strict=True)]
    ribs = [thinnest(below, above, cut) for (below, above), cut in zip(sides, cuts, strict=True)]
    if cuts and are_symmetric(band, cuts):
        for k in range(len(paths) // 2):
            paths[k] = _mirrored(paths[-1 - k])
        for k in range(len(ribs) // 2):
            start, end = ribs[-1 - k]
            ribs[k] = (end.conjugate(), start.conjugate())
    return CutBarrier(tuple(paths), tuple(ribs))


def are_symmetric(band: Band, cuts: tuple[RibCut, ...]) -> bool:
    """Whether a barrier and its ribs are their own mirror image in the q axis."""
    return band.is_symmetric and all(
        low.height == -high.height and low.tilt == -high.tilt
        for low, high in zip(cuts, reversed(cuts), strict=True)
    )


def _mirrored(path: Path) -> Path:
    return closed([mirrored_edge(reversed_edge(edge)) for edge in reversed(path.edges)])


def _cavity(band: Band, low: RibSide | None, high: RibSide | None) -> Path:
    """What lies between two ribs, or a rib and an end, or both ends."""
    rim = merged(_between(band.to_rim, low.to_rim if low else None, high.to_rim if high else None))
    shaft = merged(
        _between(band.to_shaft, low.to_shaft if low else None, high.to_shaft if high else None)
    )
    inward = [reversed_edge(edge) for edge in reversed(shaft)]
    upper = band.upper_end if high is None else [reversed_edge(e) for e in reversed(high.edges)]
    chain = [*low.edges, *rim, *upper, *inward] if low else [*inward, *band.lower_end, *rim, *upper]
    return closed([edge for edge in chain if abs(edge.end - edge.start) > SLIVER])


def _between(
    chain: tuple[Edge, ...], low: tuple[Edge, ...] | None, high: tuple[Edge, ...] | None
) -> list[Edge]:
    """The part of a band's side from one rib, or its start, to the next, or its end.

    Args:
        chain: the whole side, counter-clockwise.
        low: what the rib before leaves of it, from there counter-clockwise on.
        high: what the rib after leaves, from there clockwise on.
    """
    if high is None:
        return list(chain if low is None else low)
    backward = [reversed_edge(edge) for edge in reversed(high)]
    if low is None:
        return backward
    # Both are cut from the same chain: so many edges are missing at either end.
    first, last = len(chain) - len(low), len(backward) - 1
    if first > last:
        raise ValueError("the radial ribs leave no cavity between them")
    start, end = low[0].start, backward[-1].end
    if first == last:
        edge = chain[first]
        if share_of(edge, start) >= share_of(edge, end):
            raise ValueError("the radial ribs leave no cavity between them")
        return [piece(edge, start, end)]
    return [low[0], *chain[first + 1 : last], backward[-1]]
