"""Results kept by key, the most recently used ones."""

from collections import OrderedDict
from collections.abc import Callable
from typing import TypeVar

Kept = TypeVar("Kept")


class Cache:
    """The most recently used results by key; empty again after pickling."""

    def __init__(self, capacity: int) -> None:
        """Hold at most `capacity` results."""
        self._capacity = capacity
        self._kept: OrderedDict[object, object] = OrderedDict()

    def get(self, key: object, make: Callable[[], Kept]) -> Kept:
        """The result kept for `key`, made if there is none."""
        if key in self._kept:
            self._kept.move_to_end(key)
        else:
            if len(self._kept) >= self._capacity:  # before, as two large factors may be too many
                self._kept.popitem(last=False)
            self._kept[key] = make()
        return self._kept[key]  # type: ignore[return-value]  # one maker per cache

    def __reduce__(self) -> "tuple[type[Cache], tuple[int]]":
        """Pickle without the contents: factors cannot cross a process border."""
        return Cache, (self._capacity,)
