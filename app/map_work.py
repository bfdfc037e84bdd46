"""A flux map computed by a crew of workers, point by point into its store.

The rows of the grid (i_d) are cut into bands of at most four. A band is a chain of its own that one
worker goes through row by row, so the map does not depend on the number of workers or on who was
faster; bands of four cost 1.8 factorisations a position where one band costs 1.5 (measured). This
process only hands out bands and commits what comes back. Points that the store has are not solved
again; a chain that goes on from them starts without the fields before, so that its points agree
with those of an unbroken run to Newton's tolerance (1e-6 of the linkages).
"""

import queue
from collections import deque
from collections.abc import Callable
from concurrent.futures import Future
from functools import partial

import numpy as np

from lamwright.postprocess.flux_map import FluxMap
from lamwright.solver.foreseen import Node
from lamwright.solver.types import FloatArray

from .desk import Desk
from .map_grid import MapGrid
from .map_point import MapTask
from .map_store import PointRecord, PointStore
from .pool import Crew, Worker

BAND = 4  # rows at most

Done = tuple[Worker[Desk], Node, "Future[PointRecord]"]


def compute_points(
    crew: Crew[Desk], task: MapTask, store: PointStore, on_done: Callable[[float], None]
) -> dict[Node, PointRecord]:
    """All points of a map, those that the store lacks solved and committed as they finish.

    Args:
        crew: its desks have the model.
        task: grid and steps.
        store: of this map.
        on_done: called with the share done.

    Raises:
        NotConverged: when Newton's iteration fails at a point; what is committed stays.
    """
    points, total = store.points(), task.grid.n_points
    bands = deque(missing_bands(task.grid, points))
    on_done(len(points) / total)
    if not bands:
        return points
    if not crew.workers:
        _alone(crew.own, task, bands, store, points, on_done)
        return points
    left = total - len(points)
    done: queue.SimpleQueue[Done] = queue.SimpleQueue()

    def hand_out(worker: Worker[Desk]) -> None:
        if not bands:
            return
        number, nodes = bands.popleft()
        for node in nodes:
            future = worker.submit(Desk.map_point, number, node)
            future.add_done_callback(partial(_report, done, worker, node))

    for worker in crew.workers:
        worker.submit(Desk.take_map, task)
        hand_out(worker)
    for _ in range(left):
        worker, node, future = done.get()
        points[node] = future.result()
        store.keep(node, points[node])
        on_done(len(points) / total)
        if not worker.waiting:
            hand_out(worker)
    for worker in crew.workers:
        worker.submit(Desk.end_map)
    return points


def missing_bands(
    grid: MapGrid, points: dict[Node, PointRecord]
) -> list[tuple[int, tuple[Node, ...]]]:
    """The bands that have points to solve: number and those nodes, row by row."""
    rows = np.array_split(np.arange(grid.i_d.size), -(-grid.i_d.size // BAND))
    found = []
    for number, band in enumerate(rows):
        nodes = [(int(d), q) for d in band for q in range(grid.i_q.size)]
        missing = tuple(node for node in nodes if node not in points)
        if missing:
            found.append((number, missing))
    return found


def flux_map_of(pole_pairs: int, grid: MapGrid, points: dict[Node, PointRecord]) -> FluxMap:
    """The map of all points."""
    waves = _gridded(grid, {node: record.waves for node, record in points.items()})
    psi_d, psi_q, torque, coenergy = np.moveaxis(waves, 2, 0)
    return FluxMap(pole_pairs, grid.i_d, grid.i_q, grid.position, psi_d, psi_q, torque, coenergy)


def harvests_of(grid: MapGrid, points: dict[Node, PointRecord]) -> FloatArray:
    """What was kept of each point's fields, (n_d, n_q, ...)."""
    return _gridded(grid, {node: record.harvest for node, record in points.items()})


def _gridded(grid: MapGrid, values: dict[Node, FloatArray]) -> FloatArray:
    nodes = [[values[d, q] for q in range(grid.i_q.size)] for d in range(grid.i_d.size)]
    return np.array(nodes)


def _report(
    done: "queue.SimpleQueue[Done]",
    worker: Worker[Desk],
    node: Node,
    future: "Future[PointRecord]",
) -> None:
    done.put((worker, node, future))


def _alone(
    desk: Desk,
    task: MapTask,
    bands: "deque[tuple[int, tuple[Node, ...]]]",
    store: PointStore,
    points: dict[Node, PointRecord],
    on_done: Callable[[float], None],
) -> None:
    """All bands in this process."""
    desk.take_map(task)
    for number, nodes in bands:
        for node in nodes:
            points[node] = desk.map_point(number, node)
            store.keep(node, points[node])
            on_done(len(points) / task.grid.n_points)
    desk.end_map()
