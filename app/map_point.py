"""One pair of currents of a flux map at all positions, as a process solves it by itself."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from lamwright.postprocess.skew import mean_solution, step_point
from lamwright.solver.cache import Cache
from lamwright.solver.chains import OperatingPoint
from lamwright.solver.field import MagneticModel, solve_foreseen, solve_point, unknowns
from lamwright.solver.foreseen import NEEDED, Node, foreseen
from lamwright.solver.types import FieldSolution, FloatArray

from .map_grid import MapGrid
from .map_store import PointRecord

# From a model and its fields at all positions to what is kept of them, any shape.
Harvest = Callable[[MagneticModel, Sequence[FieldSolution]], FloatArray]


@dataclass(frozen=True, slots=True, eq=False)
class MapTask:
    """What is the same for all points."""

    grid: MapGrid
    offsets: tuple[float, ...]  # rad, of the rotor's steps
    harvest: Harvest | None = None


@dataclass(slots=True, eq=False)
class MapDesk:
    """A model with room for the factors of all positions, and the fields of the nodes before."""

    task: MapTask
    model: MagneticModel
    band: int = -1
    # Unknowns by node, for each step of the rotor at each position.
    known: list[dict[Node, FloatArray]] = field(default_factory=list)


def map_desk(model: MagneticModel, task: MapTask) -> MapDesk:
    """An empty desk; the factors of all positions and steps are kept."""
    count = task.grid.position.size * len(task.offsets)
    return MapDesk(task, replace(model, factors=Cache(count), positions=Cache(count)))


def solved_point(desk: MapDesk, band: int, node: Node) -> PointRecord:
    """The fields of a pair of currents, foreseen from the nodes before in the same band.

    Raises:
        NotConverged: when Newton's iteration fails at a position.
    """
    task, grid, model = desk.task, desk.task.grid, desk.model
    count = grid.position.size
    if band != desk.band:
        desk.band, desk.known = band, [{} for _ in range(len(task.offsets) * count)]
    i_d, i_q = float(grid.i_d[node[0]]), float(grid.i_q[node[1]])
    points = [OperatingPoint(i_d, i_q, float(position)) for position in grid.position]
    pole_pairs = model.sector.pole_pairs
    by_step: list[list[FieldSolution]] = []
    for s, offset in enumerate(task.offsets):
        near: FieldSolution | None = None
        fields = []
        for k, point in enumerate(points):
            known = desk.known[s * count + k]
            near = _field(desk, step_point(point, offset, pole_pairs), known, node, near)
            fields.append(near)
            _remember(known, node, unknowns(model, near))
        by_step.append(fields)
    means = [
        mean_solution(steps, task.offsets, point, pole_pairs)
        for steps, point in zip(zip(*by_step, strict=True), points, strict=True)
    ]
    waves = np.array([[f.psi_d, f.psi_q, f.torque, f.coenergy] for f in means]).T
    harvest = task.harvest
    if harvest is None:
        return PointRecord(waves, np.zeros(0))
    # Of equal parts of the stack, each as if it were the whole.
    return PointRecord(waves, np.mean([harvest(model, fields) for fields in by_step], axis=0))


def _field(
    desk: MapDesk,
    point: OperatingPoint,
    known: dict[Node, FloatArray],
    node: Node,
    near: FieldSolution | None,
) -> FieldSolution:
    grid = desk.task.grid
    guesses = foreseen(known, node, grid.i_d, grid.i_q)
    if guesses:
        return solve_foreseen(desk.model, point.i_d, point.i_q, point.position, guesses)
    return solve_point(desk.model, point.i_d, point.i_q, point.position, near)


def _remember(known: dict[Node, FloatArray], node: Node, a: FloatArray) -> None:
    """Keep the unknowns of a node, and forget those that no node to come needs."""
    known[node] = a
    for row, column in list(known):
        if row < node[0] - NEEDED or (row == node[0] - NEEDED and column < node[1] - NEEDED):
            del known[row, column]
