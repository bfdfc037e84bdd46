"""Linear unknowns eliminated once for a model, so that Newton's iteration never meets them.

The elimination of the corners by minimum degree begins in many places of air, slots and shaft. An
unknown that comes before all that steel or the rotor's half of the gap touches, as far as its own
subtree of the elimination goes, meets the same numbers in every step and at every position. With
such unknowns l and the others k,

    S = K_kk - K_kl K_ll^-1 K_lk,  g = f_k - K_kl K_ll^-1 f_l,  a_l = K_ll^-1 (f_l - K_lk a_k)

(static condensation, Wilson 1974, from memory). As they are the first of an elimination that fills
little, S has fewer entries than K, and its factorisation costs as many flops as before in fewer,
larger blocks: a Newton step takes 0.90 of the time (15 k unknowns, 2 600 of them gone; measured,
interleaved). K_ll falls into some hundred parts of 80 unknowns at most, whose inverses are kept.
All of it is made at the first position, in 25 ms of a busy core.

Axes: n_gone unknowns l, n_kept unknowns k, both in the order of the whole; n_slot matrix entries
of the whole, n_kept_slot of S.
"""

from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np
from scipy.sparse import coo_matrix, csr_matrix
from scipy.sparse.csgraph import connected_components

from .linear import SparseSolver, corner_turns
from .model import Iron, MagneticModel
from .pattern import Numbering, Pattern, SparseRows, keys_of
from .types import FloatArray, IntArray

# Unknowns of a model beyond which nothing is condensed: single parts grow to 800 unknowns among
# 211 000, and to make it all took 5 s and 200 MiB there.
LARGEST_MODEL = 50_000


@dataclass(frozen=True, slots=True, eq=False)
class SteelPlaces:
    """Where the steel's elements stand among the unknowns and in the matrix."""

    dof: IntArray  # (n_elem, 6), n_dof where A = 0
    scatter: SparseRows  # (n_slot, 21 n_elem)
    residual_scatter: SparseRows  # (n_dof, 6 n_elem)


def whole_places(iron: Iron) -> SteelPlaces:
    """Places among all unknowns."""
    return SteelPlaces(iron.dof, iron.scatter, iron.residual_scatter)


@dataclass(frozen=True, slots=True, eq=False)
class Condensed:
    """The unknowns that are left of a model, and how those that are gone follow from them."""

    kept: IntArray  # (n_kept,), numbers in the whole
    gone: IntArray  # (n_gone,)
    numbering: Numbering  # of the kept ones at shift 0; a node that is gone reads as held
    pattern: Pattern  # of S at shift 0
    ends: IntArray  # (n_kept, 2), see `edge_ends`
    slot: IntArray  # (n_kept_slot,), slots of the whole, n_slot where S alone has an entry
    fill: FloatArray  # (n_kept_slot,), entries of -K_kl K_ll^-1 K_lk
    inverse: SparseRows  # (n_gone, n_gone), K_ll^-1
    coupling: SparseRows  # (n_gone, n_kept), K_lk
    coupled: SparseRows  # its transpose
    steel: SteelPlaces  # among the kept unknowns

    def values(self, values: FloatArray) -> FloatArray:
        """Entries (n_kept_slot,) of S for entries (n_slot,) of the whole, at any position."""
        return np.append(values, 0.0).take(self.slot) + self.fill

    def reduced(self, load: FloatArray) -> FloatArray:
        """Load g (n_kept,) of the kept unknowns for one of all (n_dof,)."""
        return np.asarray(load[self.kept] - self.coupled @ (self.inverse @ load[self.gone]))

    def recovered(self, a: FloatArray, load: FloatArray) -> FloatArray:
        """All unknowns (n_dof,) from the kept ones (n_kept,) under a load (n_dof,)."""
        whole = np.empty(load.size)
        whole[self.kept] = a
        whole[self.gone] = np.asarray(self.inverse @ (load[self.gone] - self.coupling @ a))
        return whole


class CondensedSolver:
    """The whole system by the factor of what is left of it, for those who need every unknown."""

    def __init__(self, condensed: Condensed, solver: SparseSolver) -> None:
        """Solve by `solver`, which has analysed the kept pattern at the position in question."""
        self._condensed, self._solver = condensed, solver

    def factorise(self, values: FloatArray) -> None:
        """Factorise the matrix with these values of its lower triangle by columns.

        The rows that are gone must be those of the model.
        """
        self._solver.factorise(self._condensed.values(values))

    def solve(self, rhs: FloatArray) -> FloatArray:
        """Solution for one right side (n_dof,) with the last factorised values."""
        kept = self._solver.solve(self._condensed.reduced(rhs))
        return self._condensed.recovered(kept, rhs)


def condensed(model: MagneticModel) -> Condensed | None:
    """Eliminate what may go; nothing of a large model or where the orderer is missing."""
    if model.numbering.n_dof > LARGEST_MODEL:
        return None
    numbering, pattern, ends = model.numbering, model.pattern, model.ends
    values, iron = model.fixed_values, model.iron
    # What moves or is not linear: values of all other rows are final.
    moving = numbering.dof[model.rotor_gap.node]
    try:
        turns = corner_turns(pattern.columns, pattern.indices, ends)
    except ImportError:
        return None
    n_dof = numbering.n_dof
    is_gone = _first_to_go(pattern, ends, turns, (iron.dof, moving))
    kept, gone = np.flatnonzero(~is_gone), np.flatnonzero(is_gone)
    if not gone.size:
        return None
    number = np.full(n_dof + 1, kept.size)  # among the kept or the gone ones
    number[kept], number[gone] = np.arange(kept.size), np.arange(gone.size)
    of_kept = np.where(np.append(is_gone, False), kept.size, number)

    columns, rows = pattern.columns, pattern.indices
    gone_column, gone_row = is_gone[columns], is_gone[rows]
    inside, across = gone_column & gone_row, gone_column != gone_row
    own = _symmetric(number[rows[inside]], number[columns[inside]], values[inside], gone.size)
    swap = gone_row[across]
    low, high = columns[across], rows[across]
    coupling = csr_matrix(
        (
            values[across],
            (number[np.where(swap, high, low)], number[np.where(swap, low, high)]),
        ),
        shape=(gone.size, kept.size),
    )
    inverse, fill_row, fill_column, fill_value = _eliminated(own, coupling)

    both = np.flatnonzero(~gone_column & ~gone_row)
    own_keys = keys_of(number[rows[both]], number[columns[both]], kept.size)
    keys, place = np.unique(
        np.concatenate([own_keys, keys_of(fill_row, fill_column, kept.size)]), return_inverse=True
    )
    slot = np.full(keys.size, pattern.indices.size)
    slot[place[: both.size]] = both
    left_columns, left_rows = np.divmod(keys, kept.size + 1)
    indptr = np.searchsorted(left_columns, np.arange(kept.size + 1)).astype(np.int64)
    return Condensed(
        kept=kept,
        gone=gone,
        numbering=replace(
            numbering,
            dof=of_kept[numbering.dof],
            n_rotor=int(np.searchsorted(kept, numbering.n_rotor)),
            n_stator=int(np.sum((kept >= numbering.n_rotor) & (kept < numbering.first_ring))),
        ),
        pattern=Pattern(indptr, left_rows),
        ends=of_kept[ends[kept]],
        slot=slot,
        fill=np.asarray(np.bincount(place[both.size :], fill_value, keys.size), dtype=np.float64),
        inverse=inverse,
        coupling=coupling,
        coupled=csr_matrix(coupling.T),
        steel=SteelPlaces(
            dof=np.asfortranarray(of_kept[iron.dof]),
            scatter=_rows(iron.scatter, slot),
            residual_scatter=_rows(iron.residual_scatter, kept),
        ),
    )


def _rows(matrix: SparseRows, chosen: IntArray) -> SparseRows:
    """The rows (n,) of a matrix that hold all its entries, which both share; empty ones beyond."""
    counts = np.append(np.diff(matrix.indptr), 0).take(chosen)
    indptr = np.concatenate([[0], np.cumsum(counts)]).astype(matrix.indptr.dtype)
    assert indptr[-1] == matrix.indptr[-1]
    return csr_matrix((matrix.data, matrix.indices, indptr), shape=(chosen.size, matrix.shape[1]))


def _first_to_go(
    pattern: Pattern, ends: IntArray, turns: IntArray, touched: tuple[IntArray, ...]
) -> "np.ndarray[tuple[int], np.dtype[np.bool_]]":
    """Unknowns (n_dof,) before which nothing touched is eliminated in their own subtree.

    A corner's subtree is all that paths through earlier corners lead to. So it may go if every
    path from a touched corner passes one that comes later; the least of the paths' latest turns is
    found by relaxation (derived). A middle goes with the first of its ends.
    """
    n_dof = ends.shape[0]
    is_free = np.ones(n_dof + 1, dtype=bool)
    is_free[n_dof] = False
    for unknowns in touched:
        is_free[unknowns] = False
    corner = ends[:, 0] == np.arange(n_dof)
    rows, columns = pattern.indices, pattern.columns
    edge = corner[rows] & corner[columns] & (rows != columns)
    source = np.concatenate([rows[edge], columns[edge]])
    target = np.concatenate([columns[edge], rows[edge]])
    order = np.argsort(target, kind="stable")
    source, target = source[order], target[order]
    of, starts = np.unique(target, return_index=True)
    never = n_dof + 1
    latest = np.where(is_free, never, turns)  # on the best path from what is touched
    best = np.full(n_dof + 1, never)  # the same without the corner itself
    while True:
        best[of] = np.minimum.reduceat(latest[source], starts)
        now = np.where(is_free, np.maximum(turns, best), turns)
        if np.array_equal(now, latest):
            break
        latest = now
    goes = is_free & (best > turns)
    first = np.where(turns[ends[:, 0]] <= turns[ends[:, 1]], ends[:, 0], ends[:, 1])
    gone = goes[first]
    return np.asarray(gone, dtype=np.bool_)


def _symmetric(row: IntArray, column: IntArray, values: FloatArray, n: int) -> SparseRows:
    """The whole of a matrix from its lower triangle."""
    off = row != column
    return csr_matrix(
        (
            np.concatenate([values, values[off]]),
            (np.concatenate([row, column[off]]), np.concatenate([column, row[off]])),
        ),
        shape=(n, n),
    )


def _eliminated(
    own: SparseRows, coupling: SparseRows
) -> tuple[SparseRows, IntArray, IntArray, FloatArray]:
    """K_ll^-1, and rows, columns (row >= column) and values of -K_kl K_ll^-1 K_lk, part by part."""
    n_parts, part = connected_components(own, directed=False)
    order = np.argsort(part, kind="stable").astype(np.int64)  # gone ones part by part
    place = np.empty_like(order)
    place[order] = np.arange(order.size)
    sizes = np.bincount(part, minlength=n_parts)
    # The kept neighbours of every part, one part after the other.
    row, column, values = place[_rows_of(coupling)], coupling.indices, coupling.data
    of_row = np.repeat(np.arange(n_parts), sizes)
    n_kept = coupling.shape[1]
    pairs, near = np.unique(of_row[row] * n_kept + column, return_inverse=True)
    border = pairs % n_kept
    borders = np.bincount(pairs // n_kept, minlength=n_parts)

    first, first_near = _starts(sizes), _starts(borders)
    to_own = _cells(place[_rows_of(own)], place[own.indices], of_row, first, sizes)
    to_coupling = _cells(row, near, of_row, first, borders, first_near)
    blocks = np.zeros(int(np.sum(sizes * sizes)))
    across = np.zeros(int(np.sum(sizes * borders)))
    blocks[to_own], across[to_coupling] = own.data, values
    fills = np.empty(int(np.sum(borders * borders)))
    at = zip(
        *(pairwise(_starts(cells)) for cells in (sizes**2, sizes * borders, borders**2)),
        sizes,
        borders,
        strict=True,
    )
    for (a, b), (c, d), (e, f), size, near_size in at:
        inverse = np.linalg.inv(blocks[a:b].reshape(size, size))
        edge = across[c:d].reshape(size, near_size)
        blocks[a:b] = inverse.ravel()
        fills[e:f] = (edge.T @ (inverse @ edge)).ravel()
    i, j = _square_cells(sizes)
    whole = csr_matrix(coo_matrix((blocks, (order[i], order[j])), shape=own.shape))
    i, j = (border[index] for index in _square_cells(borders))
    lower = i >= j
    return whole, i[lower], j[lower], -fills[lower]


def _rows_of(matrix: SparseRows) -> IntArray:
    """Row of every entry."""
    return np.repeat(np.arange(matrix.shape[0]), np.diff(matrix.indptr))


def _starts(sizes: IntArray) -> IntArray:
    """Where each of the runs of these sizes (n,) begins, and the last one ends: (n + 1,)."""
    return np.concatenate([[0], np.cumsum(sizes)])


def _cells(
    row: IntArray,
    column: IntArray,
    of_row: IntArray,
    first_row: IntArray,
    widths: IntArray,
    first_column: IntArray | None = None,
) -> IntArray:
    """Places of entries in the dense blocks of their parts, which stand one after the other."""
    part = of_row[row]
    heights = np.diff(first_row)
    first_column = first_row if first_column is None else first_column
    inside = (row - first_row[part]) * widths[part] + column - first_column[part]
    cells: IntArray = _starts(heights * widths)[part] + inside
    return cells


def _square_cells(sizes: IntArray) -> tuple[IntArray, IntArray]:
    """Row and column of every cell of the square blocks along a diagonal."""
    of_cell = np.repeat(np.arange(sizes.size), sizes**2)
    inside = np.arange(of_cell.size) - _starts(sizes**2)[of_cell]
    first = _starts(sizes)[of_cell]
    row, column = np.divmod(inside, sizes[of_cell])
    return first + row, first + column
