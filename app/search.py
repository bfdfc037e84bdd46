"""Search of a study: designs for many goals at once, generation by generation.

NSGA-II asks for a generation, the pool carries it out through the ledger, and the state is kept
in the ledger with it. What was asked for before a kill is asked for again after it, in the same
order, and found in the ledger: the search goes on as if nothing had happened.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Protocol

import numpy as np

from .search_breeding import Generation, asked, begun, first_places
from .search_front import on_front
from .search_state import SearchState
from .search_worth import Looked, Measure, Worth

if TYPE_CHECKING:
    from lamwright.solver.types import FloatArray

    from .search_space import Places, SearchSpace
    from .study import Values


class Known(Looked, Protocol):
    """A looked-at design that the ledger knows."""

    @property
    def hash(self) -> str:
        """By which it is known."""


# Designs by their values, in order; the origin is what the ledger shall say they came from.
Evaluate = Callable[["Sequence[Values]", str], Sequence[Known]]


@dataclass(frozen=True, slots=True)
class Course:
    """How far a search has come, for whoever shows it."""

    generation: int
    designs: int  # asked for
    held: int  # that hold all limits
    front: int
    gained: float | None  # of the hypervolume, over the last generations


def searched(
    space: "SearchSpace",
    measure: Measure,
    evaluate: Evaluate,
    state: SearchState,
    keep: Callable[[SearchState], None],
    on_generation: Callable[[Course], None] = lambda course: None,
    first: "Sequence[Values]" = (),
) -> SearchState:
    """Go on with a search until it ends: by its budget, a stall, or nothing new.

    Args:
        space: to look through.
        measure: goals and limits.
        evaluate: carries out the designs of a generation.
        state: where the search stands.
        keep: is given the state after each generation, before anything else is asked for.
        on_generation: tells how far it has come.
        first: designs of the first generation, where they lie in the space.
    """
    settings = state.settings
    state = replace(state, ended="")
    while True:
        reason = _reason_to_end(state)
        if reason:
            return replace(state, ended=reason)
        if state.generation is None:
            known = [place for place in map(space.place_of, first) if place is not None]
            places = first_places(space, settings.population, settings.seed, known)
            rows = _looked(space, evaluate, places)
            goals, violation, worths = _measured(measure, rows)
            generation = begun(space, places, goals, violation, settings.seed)
        else:
            child = asked(space, state.generation, settings.population, state.asked)
            if len(child.places) == 0:
                return replace(state, ended="nothing new is left to try")
            rows = _looked(space, evaluate, child.places)
            goals, violation, worths = _measured(measure, rows)
            places, generation = child.places, child.told(space, goals, violation)
        state = _after(state, places, worths, rows, generation)
        keep(state)
        on_generation(course_of(state))


def course_of(state: SearchState) -> Course:
    """How far the search has come."""
    goals = state.goals()
    front = int(on_front(goals).sum())
    return Course(len(state.counts), len(state.asked), len(goals), front, state.gained())


def front_of(state: SearchState) -> list[int]:
    """Numbers of the designs on the front, in the order asked for."""
    held = [k for k, worth in enumerate(state.worths) if worth.holds]
    goals = np.array([state.worths[k].goals for k in held], dtype=float)
    return [k for k, is_best in zip(held, on_front(goals), strict=True) if is_best]


def _reason_to_end(state: SearchState) -> str:
    settings = state.settings
    # A whole generation or none: what is asked for must not depend on the budget, so that a
    # search goes on under a larger one as if it had had that from the beginning.
    room = settings.budget - len(state.asked)
    if room < settings.population:
        return f"the budget of {settings.budget} designs is spent"
    gained = state.gained()
    if gained is not None and gained < settings.gain:
        return (
            f"the hypervolume grew by {100.0 * gained:.2g} % in {settings.stall} generations, "
            f"less than {100.0 * settings.gain:g} %"
        )
    return ""


def _looked(space: "SearchSpace", evaluate: Evaluate, places: "Places") -> Sequence[Known]:
    return evaluate([space.values(place) for place in places], "search")


def _measured(
    measure: Measure, rows: Sequence[Known]
) -> "tuple[FloatArray, FloatArray, list[Worth]]":
    worths = measure.all(rows)
    goals = np.array([worth.goals for worth in worths], dtype=float)
    return goals, np.array([worth.violation for worth in worths]), worths


def _after(
    state: SearchState,
    places: "Places",
    worths: list[Worth],
    rows: Sequence[Known],
    generation: Generation,
) -> SearchState:
    points = [tuple(int(k) for k in place) for place in places]
    return state.after(points, worths, [row.hash for row in rows], generation)
