"""Lines of equal torque on the i_d-i_q plane, and the point of a line where something is least.

On a line of i_q the torque first rises with the amount of i_d; where saturation makes it fall
again, the same torque costs more current and more voltage than before, so only the rising part
counts, and on it each torque has one i_d. A line is thus i_d(i_q; T), found in a bracket. Along it
d i_d / d i_q = -T_q / T_d, so that a value v(i_d, i_q) is least where

    v_q T_d - v_d T_q = 0

(derived): a root near the least of the nodes, which a table of the map gives to some 1e-4 without
asking the surface. Nodes of i_q lie closer towards zero, where the lines of small torques bend.

Axes: n_line any shape of torques, n_node nodes of i_q, n_across amounts of i_d.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .brackets import BoolArray, roots
from .terminals import Terminals, has_both_signs, reach_d, shaft_torque, terminal_linkages
from .terminals import torque_slopes as slopes_of_torque

NODES = 96  # of i_q on each side of zero
LEAST_NODE = 2e-3  # of the reach: the nearest node to zero
ACROSS = 161  # amounts of i_d on each node
AROUND = 3  # nodes on both sides of the least one, more than the table's error can move it

Value = Callable[[FloatArray, FloatArray, FloatArray, FloatArray], FloatArray]
Slopes = Callable[[FloatArray, FloatArray], tuple[FloatArray, FloatArray]]


@dataclass(frozen=True, slots=True, eq=False)
class TorqueLines:
    """The plane made ready: on nodes of i_q, how torque and linkages change with i_d."""

    drive: Terminals
    i_q: FloatArray  # (n_node,), A, rising
    ends: FloatArray  # (n_node,), A, amount of i_d where the torque stops rising
    torque: FloatArray  # (n_node, n_across), N m, rising from 0 to the end
    psi_d: FloatArray  # (n_node, n_across), V s, end winding included
    psi_q: FloatArray  # (n_node, n_across), V s


@dataclass(frozen=True, slots=True, eq=False)
class LinePoints:
    """One point on each line; nan where the line is not on the map."""

    i_d: FloatArray  # (n_line), A
    i_q: FloatArray  # (n_line), A
    is_edge: BoolArray  # (n_line), whether the map ends there, so that less may lie beyond


def torque_lines(drive: Terminals) -> TorqueLines:
    """The nodes of a drive's map."""
    low, high = drive.surface.i_q_range
    rising = np.geomspace(LEAST_NODE, 1.0, NODES)
    parts = [np.zeros(1), high * rising]
    if has_both_signs(drive):
        parts.insert(0, low * rising[::-1])
    i_q = np.concatenate(parts)
    # As far as the greatest sample: what is sought lies well below the top of the rise.
    amounts = np.linspace(0.0, reach_d(drive), ACROSS)
    found = shaft_torque(drive, drive.side * amounts, i_q[:, None])
    ends = amounts[np.argmax(found, axis=1)]
    if not has_both_signs(drive):
        ends[0] = ends[1]  # no torque without i_q: the row says nothing
    across = drive.side * ends[:, None] * np.linspace(0.0, 1.0, ACROSS)
    psi_d, psi_q = terminal_linkages(drive, across, i_q[:, None])
    torque = 1.5 * drive.surface.pole_pairs * (psi_d * i_q[:, None] - psi_q * across)
    return TorqueLines(drive, i_q, ends, np.maximum.accumulate(torque, axis=1), psi_d, psi_q)


def greatest_torque(lines: TorqueLines) -> float:
    """The greatest torque in N m of the nodes: beyond it no line lies on the map."""
    return float(lines.torque.max())


def on_line(lines: TorqueLines, torque: FloatArray, i_q: FloatArray) -> FloatArray:
    """i_d in A with the torque in N m at i_q in A, nan where none on the map has it."""
    drive = lines.drive
    torque, i_q = np.broadcast_arrays(torque, i_q)
    is_there = np.isfinite(i_q)
    place = number(i_q)
    end = np.interp(place, lines.i_q, lines.ends)

    def excess(amount: FloatArray) -> FloatArray:
        return shaft_torque(drive, drive.side * amount, place) - torque

    amount = roots(excess, np.zeros(end.shape), end)
    return drive.side * np.where(is_there, amount, np.nan)


def least_on_lines(
    lines: TorqueLines, torque: FloatArray, value: Value, slopes: Slopes
) -> LinePoints:
    """The point of least value on each line.

    Args:
        lines: of the drive.
        torque: (n_line), N m.
        value: i_d, i_q in A, psi_d, psi_q in V s (n_line, n_node) -> what shall be least.
        slopes: i_d, i_q (n_line) -> its slopes to i_d and to i_q, exact.
    """
    at_nodes = value_at_nodes(lines, torque, value)
    is_there = np.isfinite(at_nodes)
    least = np.argmin(at_nodes, axis=-1)
    near = is_there & (np.abs(np.arange(lines.i_q.size) - least[..., None]) <= AROUND)
    low = lines.i_q[np.argmax(near, axis=-1)]
    high = lines.i_q[lines.i_q.size - 1 - np.argmax(near[..., ::-1], axis=-1)]

    def slope(i_q: FloatArray) -> FloatArray:
        amount = on_line(lines, torque, i_q)
        place = number(amount)
        t_d, t_q = slopes_of_torque(lines.drive, place, i_q)
        v_d, v_q = slopes(place, i_q)
        along = lines.drive.side * (v_q * t_d - v_d * t_q)
        return np.where(np.isfinite(amount), along, np.nan)

    is_line = is_there.any(axis=-1)
    i_q = np.where(is_line, roots(slope, low, high), np.nan)
    has_none = is_line & ~np.isfinite(i_q)
    i_q = np.where(has_none, lines.i_q[least], i_q)
    # Where both signs of i_q are alike, zero is no end of the map.
    return LinePoints(on_line(lines, torque, i_q), i_q, has_none & (i_q != 0.0))


def value_at_nodes(lines: TorqueLines, torque: FloatArray, value: Value) -> FloatArray:
    """The value (n_line, n_node) to some 1e-4, from the table; inf where the line is not there."""
    flat = np.ravel(torque)
    share = np.linspace(0.0, 1.0, ACROSS)
    table = np.empty((3, flat.size, lines.i_q.size))
    for node in range(lines.i_q.size):
        at = np.interp(flat, lines.torque[node], share, left=np.nan, right=np.nan)
        table[0, :, node] = lines.drive.side * at * lines.ends[node]
        table[1, :, node] = np.interp(at, share, lines.psi_d[node])
        table[2, :, node] = np.interp(at, share, lines.psi_q[node])
    i_d, psi_d, psi_q = table.reshape(3, *np.shape(torque), lines.i_q.size)
    return np.where(np.isfinite(i_d), value(i_d, lines.i_q, psi_d, psi_q), np.inf)


def number(values: FloatArray) -> FloatArray:
    """Zero for what is not there, so that the surface can be asked for the rest."""
    return np.where(np.isfinite(values), values, 0.0)
