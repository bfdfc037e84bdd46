"""Where a search stands, in plain numbers: what the ledger keeps after each generation.

JSON, and no pickle: a ledger from somebody else must not run code. Python writes a float so that
reading gives the same bits.
Axes of arrays: n designs asked for, in order; n_axis keys; n_goal goals.
"""

import json
import zlib
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.types import FloatArray

from .search_breeding import Generation, Point
from .search_front import covered, frame_of
from .search_space import Places
from .search_worth import Worth

FORM = 1


@dataclass(frozen=True, slots=True)
class SearchSettings:
    """How a search goes; population and seed make which designs it asks for."""

    population: int = 24
    seed: int = 1
    budget: int = 480  # designs asked for in all
    stall: int = 8  # generations without gain after which it ends; 0 for never
    gain: float = 0.01  # of the hypervolume, relative, over that many generations
    polish: int = 0  # rounds of the gradient polish at the end


@dataclass(frozen=True, slots=True, eq=False)
class SearchState:
    """A search between two generations."""

    settings: SearchSettings
    asked: tuple[Point, ...]  # all designs so far, in the order asked for
    worths: tuple[Worth, ...]  # theirs
    hashes: tuple[str, ...]  # theirs, by which the ledger knows them
    counts: tuple[int, ...]  # designs of each generation
    generation: Generation | None  # None before the first
    ended: str = ""  # why; empty while it may go on

    def after(
        self,
        points: Sequence[Point],
        worths: Sequence[Worth],
        hashes: Sequence[str],
        generation: Generation,
    ) -> "SearchState":
        """The state after one more generation."""
        return replace(
            self,
            asked=(*self.asked, *points),
            worths=(*self.worths, *worths),
            hashes=(*self.hashes, *hashes),
            counts=(*self.counts, len(points)),
            generation=generation,
        )

    def goals(self, first: int | None = None) -> FloatArray:
        """Goals (n, n_goal) of those of the first designs that hold all limits."""
        held = [worth.goals for worth in self.worths[:first] if worth.holds]
        width = len(self.worths[0].goals) if self.worths else 0
        return np.array(held, dtype=float).reshape(len(held), width)

    def gained(self) -> float | None:
        """Relative gain of the hypervolume over the last `stall` generations.

        None where there is no front yet or the search is younger.
        """
        span = self.settings.stall
        now = self.goals()
        if not span or len(self.counts) <= span or len(now) == 0:
            return None
        frame = frame_of(now)
        before = covered(self.goals(sum(self.counts[:-span])), frame)
        return covered(now, frame) / before - 1.0 if before > 0.0 else None


def begun_state(settings: SearchSettings) -> SearchState:
    """Before the first generation."""
    return SearchState(settings, (), (), (), (), None)


def packed_state(state: SearchState) -> bytes:
    """The state as bytes for the ledger."""
    kept = state.settings
    generation = state.generation
    record = {
        "form": FORM,
        "population": kept.population,
        "seed": kept.seed,
        "asked": state.asked,
        "goals": [worth.goals for worth in state.worths],
        "violation": [worth.violation for worth in state.worths],
        "hashes": state.hashes,
        "counts": state.counts,
        "generation": None
        if generation is None
        else {
            "number": generation.number,
            "parents": generation.parents.tolist(),
            "goals": generation.goals.tolist(),
            "violation": generation.violation.tolist(),
            "rank": generation.rank.tolist(),
            "crowding": generation.crowding.tolist(),
            "random": json.loads(generation.random),
        },
    }
    return zlib.compress(json.dumps(record).encode(), 6)


def unpacked_state(data: bytes, settings: SearchSettings) -> SearchState:
    """The state from the ledger, to go on under `settings`.

    Raises:
        LamwrightError: it is of a search with another population or seed, or damaged.
    """
    try:
        record = json.loads(zlib.decompress(data))
        kept = {name: record[name] for name in ("population", "seed")}
        generation = _generation(record["generation"])
        worths = zip(record["goals"], record["violation"], strict=True)
        state = SearchState(
            settings,
            tuple(tuple(point) for point in record["asked"]),
            tuple(Worth(tuple(goals), violation) for goals, violation in worths),
            tuple(record["hashes"]),
            tuple(record["counts"]),
            generation,
        )
        form = record["form"]
    except (ValueError, KeyError, TypeError, zlib.error):
        form = None
    if form != FORM:
        raise LamwrightError("the search's state in the ledger cannot be read; give another --out")
    for name, value in kept.items():
        if getattr(settings, name) != value:
            raise LamwrightError(
                f"--{name} {getattr(settings, name)}: the search in this folder has {value}; "
                f"accepted {value}, or another --out"
            )
    return state


def _generation(record: dict[str, object] | None) -> Generation | None:
    if record is None:
        return None
    parents: Places = np.array(record["parents"], dtype=np.int64)
    return Generation(
        number=int(str(record["number"])),
        parents=parents,
        goals=np.array(record["goals"], dtype=float),
        violation=np.array(record["violation"], dtype=float),
        rank=np.array(record["rank"], dtype=float),
        crowding=np.array(record["crowding"], dtype=float),
        random=json.dumps(record["random"]),
    )
