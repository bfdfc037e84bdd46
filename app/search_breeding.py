"""One generation of NSGA-II (Deb, Pratap, Agarwal, Meyarivan 2002), by pymoo's ask and tell.

Nothing of pymoo outlives a generation: `asked` makes the algorithm anew from a `Generation`, the
whole state in plain numbers, and `told` turns the algorithm back into one. So a search that was
killed goes on as if it had not been, and its state is no pickle, which would run code when read.

Lengths are crossed and mutated by pymoo's operators; short rows of numbers are crossed by them
and then go to the nearest, with steps as mutations; names are exchanged or drawn anew.
Designs that fail come after all others, those that failed late first: see `search_worth`.
Axes of arrays: n designs, n_axis keys, n_goal goals.
"""

import json
from collections.abc import Collection
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from lamwright.solver.types import FloatArray

from .search_space import FINE, Places, SearchSpace

if TYPE_CHECKING:
    from pymoo.algorithms.moo.nsga2 import NSGA2

Point = tuple[int, ...]  # places of one design


@dataclass(frozen=True, slots=True, eq=False)
class Generation:
    """The parents of the next generation, and the random numbers' state."""

    number: int  # generations that were told so far
    parents: Places  # (n, n_axis)
    goals: FloatArray  # (n, n_goal), less is better; 0 of designs without figures
    violation: FloatArray  # (n,), 0 where all limits hold
    rank: FloatArray  # (n,), of those that hold them; see pymoo
    crowding: FloatArray  # (n,)
    random: str  # state of numpy's generator, JSON


def first_places(
    space: SearchSpace, population: int, seed: int, known: Collection[Point] = ()
) -> Places:
    """Places (n, n_axis) of the first generation: known points, then a Sobol set.

    Fewer than asked where the space has no more.
    """
    from scipy.stats import qmc

    points = list(dict.fromkeys(known))[:population]
    seen = set(points)
    sampler = qmc.Sobol(len(space.axes), scramble=True, rng=np.random.default_rng(seed))
    most = 64 * population  # draws; a space that small is as good as seen
    power = max(1, population - 1).bit_length()
    while len(points) < min(population, space.size) and most > 0:
        most -= 2**power
        for place in space.places(sampler.random(2**power)):
            point = tuple(int(k) for k in place)
            if point not in seen and len(points) < population:
                seen.add(point)
                points.append(point)
    return np.array(points, dtype=np.int64)


def begun(
    space: SearchSpace, places: Places, goals: FloatArray, violation: FloatArray, seed: int
) -> Generation:
    """The first generation after its designs (n, n_axis) were evaluated."""
    random = np.random.default_rng(seed)
    blank = np.zeros(len(places))
    state = json.dumps(random.bit_generator.state)
    fresh = Generation(0, places, goals, violation, blank, blank, state)
    algorithm = _restored(space, fresh, len(places), frozenset())
    algorithm.n_iter += 1
    algorithm.pop = algorithm.survival.do(
        algorithm.problem,
        algorithm.pop,
        n_survive=len(places),
        random_state=algorithm.random_state,
    )
    return _generation(space, algorithm)


def asked(
    space: SearchSpace, generation: Generation, population: int, seen: Collection[Point]
) -> "Asked":
    """The algorithm with the designs that it asks for, none of them seen before.

    Fewer than the population, or none, where breeding finds nothing new.
    """
    algorithm = _restored(space, generation, population, frozenset(seen))
    children = algorithm.ask()
    if children is None or len(children) == 0:
        return Asked(algorithm, children, np.zeros((0, len(space.axes)), dtype=np.int64))
    return Asked(algorithm, children, space.places(children.get("X")))


@dataclass(frozen=True, slots=True, eq=False)
class Asked:
    """An algorithm that waits to be told what its children are worth."""

    algorithm: "NSGA2"
    children: Any  # pymoo's population
    places: Places  # (n, n_axis)

    def told(self, space: SearchSpace, goals: FloatArray, violation: FloatArray) -> Generation:
        """The next generation, from goals (n, n_goal) and violations (n,) of the children."""
        self.children.set("F", goals, "G", violation[:, None])
        self.algorithm.tell(infills=self.children)
        return _generation(space, self.algorithm)


def _restored(
    space: SearchSpace, generation: Generation, population: int, seen: frozenset[Point]
) -> "NSGA2":
    from pymoo.algorithms.moo.nsga2 import NSGA2
    from pymoo.core.population import Population
    from pymoo.core.problem import Problem
    from pymoo.core.termination import NoTermination

    n_axis, n_goal = len(space.axes), generation.goals.shape[1]
    algorithm = NSGA2(
        pop_size=population,
        crossover=_Crossing(space),
        mutation=_Mutation(space),
        repair=_Snapping(space),
        eliminate_duplicates=_Unseen(space, seen),
        output=None,
    )
    problem = Problem(n_var=n_axis, n_obj=n_goal, n_ieq_constr=1, xl=0.0, xu=1.0)
    algorithm.setup(problem, seed=0, termination=NoTermination())
    algorithm.random_state.bit_generator.state = json.loads(generation.random)
    algorithm.pop = Population.new(
        X=space.unit(generation.parents),
        F=generation.goals,
        G=generation.violation[:, None],
        rank=generation.rank,
        crowding=generation.crowding,
    )
    algorithm.is_initialized, algorithm.n_iter = True, generation.number + 1
    return algorithm


def _generation(space: SearchSpace, algorithm: "NSGA2") -> Generation:
    unit, goals, violation = algorithm.pop.get("X", "F", "G")
    # Only designs that hold all limits are ranked; the others stand by their violation alone.
    rank, crowding = (
        np.array([0.0 if value is None else float(value) for value in algorithm.pop.get(name)])
        for name in ("rank", "crowding")
    )
    return Generation(
        number=algorithm.n_iter - 1,
        parents=space.places(unit),
        goals=goals,
        violation=violation[:, 0],
        rank=rank,
        crowding=crowding,
        random=json.dumps(algorithm.random_state.bit_generator.state),
    )


class _Crossing:
    """Simulated binary crossover of what has an order, exchange of names."""

    n_parents = n_offsprings = 2  # pymoo reads them

    def __init__(self, space: SearchSpace) -> None:
        self.names = ~np.array([axis.is_ordered for axis in space.axes])

    def __call__(self, problem: Any, parents: Any, random_state: Any, **_: Any) -> Any:
        from pymoo.operators.crossover.sbx import SBX

        children = SBX(eta=15, prob=0.9)(problem, parents, random_state=random_state)
        if self.names.any():
            one, other = np.swapaxes([[parent.X for parent in pair] for pair in parents], 0, 1)
            taken = random_state.random(one.shape) < 0.5
            exchanged = np.concatenate([np.where(taken, other, one), np.where(taken, one, other)])
            children.set("X", np.where(self.names, exchanged, children.get("X")))
        return children


class _Mutation:
    """Polynomial mutation of lengths, steps of rows of numbers, other names."""

    def __init__(self, space: SearchSpace) -> None:
        self.counts = space.counts
        self.names = ~np.array([axis.is_ordered for axis in space.axes])
        self.steps = ~self.names & (self.counts < FINE)

    def __call__(self, problem: Any, children: Any, random_state: Any, **_: Any) -> Any:
        from pymoo.operators.mutation.pm import PM

        before = children.get("X")
        unit = PM(eta=20)(problem, children, random_state=random_state).get("X")
        # One axis in the mean, as the polynomial mutation; 0.9 is its share of designs.
        hit = random_state.random(before.shape) < 0.9 * min(0.5, 1.0 / len(self.counts))
        side = random_state.choice([-1.0, 1.0], before.shape)
        far = random_state.geometric(0.5, before.shape)  # one step mostly, more seldom
        drawn = random_state.random(before.shape)
        stepped = _mirrored(before + np.where(hit, side * far / self.counts, 0.0))
        unit = np.where(self.steps, stepped, unit)
        children.set("X", np.where(self.names, np.where(hit, drawn, before), unit))
        return children


def _mirrored(unit: FloatArray) -> FloatArray:
    """Steps over the edge of the unit cube come back in."""
    folded = np.abs(unit)
    return np.clip(np.where(folded > 1.0, 2.0 - folded, folded), 0.0, 1.0)


class _Snapping:
    """Every child to the middle of its cell."""

    def __init__(self, space: SearchSpace) -> None:
        self.space = space

    def __call__(self, problem: Any, children: Any, **_: Any) -> Any:
        children.set("X", self.space.unit(self.space.places(children.get("X"))))
        return children


class _Unseen:
    """Lets designs pass that were never asked for."""

    def __init__(self, space: SearchSpace, seen: frozenset[Point]) -> None:
        self.space, self.seen = space, seen

    def do(self, children: Any, *others: Any) -> Any:
        """The children that are new, also among themselves and those found just before."""
        held = set(self.seen)
        for other in others[1:]:  # the first are the parents, seen all
            held.update(self._points(other))
        fresh = []
        for k, point in enumerate(self._points(children)):
            if point not in held:
                held.add(point)
                fresh.append(k)
        return children[fresh]

    def _points(self, designs: Any) -> list[Point]:
        if len(designs) == 0:
            return []
        return [tuple(map(int, place)) for place in self.space.places(designs.get("X"))]
