"""Points nearer than a tolerance made one, by a grid of cells of that size."""

import math

from .curves import Point


class Welder:
    """Collects points; `welded` gives each cluster its mean."""

    def __init__(self, tolerance: float) -> None:
        """Points within `tolerance` m of each other, or linked by such, become one."""
        self.tolerance = tolerance
        self._points: list[Point] = []
        self._parent: list[int] = []
        self._cells: dict[tuple[int, int], list[int]] = {}

    def add(self, point: Point) -> None:
        """One more point; its number is the count of those before."""
        k = len(self._points)
        self._points.append(point)
        self._parent.append(k)
        x, y = (math.floor(v / self.tolerance) for v in (point.real, point.imag))
        for i in (x - 1, x, x + 1):
            for j in (y - 1, y, y + 1):
                for other in self._cells.get((i, j), ()):
                    if abs(self._points[other] - point) <= self.tolerance:
                        self._parent[self._root(other)] = self._root(k)
        self._cells.setdefault((x, y), []).append(k)

    def welded(self) -> tuple[list[Point], list[int], float]:
        """Welded points, the number of each added point, and the largest distance bridged."""
        members: dict[int, list[int]] = {}
        for k in range(len(self._points)):
            members.setdefault(self._root(k), []).append(k)
        points: list[Point] = []
        number = [0] * len(self._points)
        widest = 0.0
        for cluster in members.values():
            # Points drawn alike stay as they are, to the last bit.
            unlike = list(dict.fromkeys(self._points[k] for k in cluster))
            point = sum(unlike) / len(unlike)
            widest = max(widest, *(abs(u - unlike[0]) for u in unlike))
            for k in cluster:
                number[k] = len(points)
            points.append(point)
        return points, number, widest

    def _root(self, k: int) -> int:
        while self._parent[k] != k:
            self._parent[k] = self._parent[self._parent[k]]
            k = self._parent[k]
        return k
