"""Elastic-plastic equilibrium along a path of loads, in steps that adapt.

Load and prescribed displacements grow with one factor (of a spinning body: the square of the
speed). A step is backward Euler, so its equilibrium is the minimum of a convex energy and damped
Newton with the consistent tangent cannot leave it (`newton`, `return_mapping`); a step that does
not settle is halved. The part of a path up to first yield is one exact step, as elasticity is
linear; so is an unloading that stays elastic.
Small displacements: the load acts on the undeformed body.
Cost measured, one core: 0.5 to 3 s up to 97 % of the limit load and back, twice, on 1 200 to 2 500
elements.
Axes: n_node, n_elem, n_qp, n_unknown.
"""

from collections.abc import Sequence
from contextlib import suppress
from dataclasses import dataclass, field

import numpy as np

from lamwright.geometry.errors import NotConverged

from .elastic import stress_of_strain
from .newton import NewtonSettings, minimise
from .plastic_kernel import (
    PlasticBody,
    PlasticState,
    Trial,
    element_force,
    element_motion,
    factorise,
    internal_force,
    on_load,
    state_of,
    strains,
    stressed,
    virgin,
)
from .return_mapping import equivalent, split
from .types import FloatArray

# Of the yield stress: a point unloaded and loaded again comes back to the surface, not through it.
ON_SURFACE = 1e-9


@dataclass(frozen=True, slots=True)
class PathSettings:
    """How a path of loads is stepped."""

    # Between two stops of the path, beyond first yield: 32 instead of 8 changed the growth left
    # after 92 % of the burst speed by 0.1 % (shipped 24-slot rotor).
    steps: int = 8
    max_halvings: int = 6  # of a step that does not settle
    newton: NewtonSettings = field(
        default_factory=lambda: NewtonSettings(tolerance=1e-7, max_steps=40)
    )


@dataclass(frozen=True, slots=True)
class LoadStep:
    """One step of a path."""

    factor: float  # of the load, at its end
    newton_steps: int
    residual: float  # relative, at its end
    yielding: float  # share of the body's area that flowed in this step


@dataclass(frozen=True, slots=True, eq=False)
class PlasticPath:
    """The states at the stops of a path and how it went."""

    stops: tuple[PlasticState, ...]
    history: tuple[LoadStep, ...]


@dataclass(frozen=True, slots=True, eq=False)
class ElasticAnswer:
    """The linear answer to the load at factor 1, on the same points."""

    moved: FloatArray  # (n_unknown,), m
    stress: FloatArray  # (n_elem, n_qp, 3), Pa
    first_yield: float  # factor at which the first point yields
    scale: float  # N/m, norm of the elements' nodal forces, which residuals are measured by


class _Step:
    """The energy of one step as `newton.minimise` wants it."""

    def __init__(
        self,
        plastic: PlasticBody,
        before: PlasticState,
        force: FloatArray,
        factor: float,
        scale: float,
    ) -> None:
        self._plastic, self._before = plastic, before
        self._load, self._factor, self._scale = factor * force, factor, scale

    def residual(self, a: FloatArray) -> tuple[FloatArray, Trial]:
        at = stressed(self._plastic, self._before, a, self._factor)
        return internal_force(self._plastic, at.stress) - self._load, at

    def solve_tangent(self, state: Trial, rhs: FloatArray) -> FloatArray:
        factorise(self._plastic, state, float(np.linalg.norm(rhs)) / self._scale)
        return self._plastic.solver.solve(rhs)


def elastic_answer(plastic: PlasticBody, force: FloatArray) -> ElasticAnswer:
    """Displacement and stress at factor 1 if nothing yielded.

    Args:
        plastic: the body.
        force: (n_unknown,), N/m, see `plastic_kernel.on_load`.
    """
    rest = np.zeros(plastic.n_unknown)
    held = _linear_stress(plastic, rest, 1.0)
    before = virgin(plastic)
    factorise(plastic, stressed(plastic, before, rest, 0.0))
    moved = plastic.solver.solve(force - internal_force(plastic, held))
    stress = _linear_stress(plastic, moved, 1.0)
    peak = float(equivalent(split(stress), plastic.criterion).max())
    scale = float(np.sqrt(np.sum(element_force(plastic, stress) ** 2)))
    return ElasticAnswer(moved, stress, plastic.curve.first / peak, scale)


def _linear_stress(plastic: PlasticBody, moved: FloatArray, factor: float) -> FloatArray:
    return stress_of_strain(plastic.body, strains(plastic, element_motion(plastic, moved, factor)))


def load_path(
    plastic: PlasticBody,
    force: FloatArray,
    factors: Sequence[float],
    settings: PathSettings | None = None,
    start: PlasticState | None = None,
) -> PlasticPath:
    """The states at load `factors`, met one after another.

    Args:
        plastic: the body.
        force: (n_node, 2), nodal forces in N/m at factor 1.
        factors: of the load, e.g. (1.44, 0.0) for an overspeed of 1.2 and back.
        settings: how to step.
        start: where to begin; the virgin body by default.

    Raises:
        NotConverged: a step does not settle however small; its history holds the load factors
            that were reached, the last one tried behind them.
    """
    walk = _Walk(plastic, on_load(plastic, force), settings or PathSettings())
    state = start or virgin(plastic)
    stops: list[PlasticState] = []
    for target in factors:
        state = walk.to(state, target)
        stops.append(state)
    return PlasticPath(tuple(stops), tuple(walk.history))


class _Walk:
    """Steps along one path; `history` grows with each."""

    def __init__(self, plastic: PlasticBody, load: FloatArray, settings: PathSettings) -> None:
        self._plastic, self._load, self._settings = plastic, load, settings
        self._linear = elastic_answer(plastic, load)
        self.history: list[LoadStep] = []

    def to(self, state: PlasticState, target: float) -> PlasticState:
        """The state at the factor `target`, its elastic part in one step."""
        away = target - state.factor
        if away == 0.0:
            return state
        rate = self._linear.moved  # m per unit of factor, of the step before
        free = elastic_share(self._plastic, self._linear, state, away)
        if free > 0.0:
            factor = target if free == 1.0 else state.factor + free * away
            with suppress(NotConverged):  # points on the surface flow by rounding: step instead
                state = self._stepped(state, factor, rate)
        size = (target - state.factor) / self._settings.steps
        least = abs(size) * 0.5**self._settings.max_halvings
        while state.factor != target:
            left = target - state.factor
            is_last = abs(left) <= 1.001 * abs(size)
            factor = target if is_last else state.factor + size
            try:
                after = self._stepped(state, factor, rate)
            except NotConverged as stuck:
                size = 0.5 * (factor - state.factor)
                if abs(size) < least:
                    raise self._stuck(factor, stuck) from stuck
                continue
            rate = (after.moved - state.moved) / (after.factor - state.factor)
            state = after
        return state

    def _stepped(self, state: PlasticState, factor: float, rate: FloatArray) -> PlasticState:
        """The state one step on, first guessed by `rate` (n_unknown,) in m per unit of factor."""
        plastic = self._plastic
        guess = state.moved + (factor - state.factor) * rate
        # Of the larger of the two ends, else an unloading to 0 would be measured by nothing.
        scale = self._linear.scale * max(abs(factor), abs(state.factor))
        step = _Step(plastic, state, self._load, factor, scale)
        moved, at, report = minimise(step, guess, scale, self._settings.newton)
        weight = plastic.body.quad.weight.ravel()
        share = float(weight[at.flows].sum() / weight.sum())
        self.history.append(LoadStep(factor, report.steps, report.history[-1], share))
        return state_of(plastic, state, at, moved, factor)

    def _stuck(self, factor: float, why: NotConverged) -> NotConverged:
        reached = self.history[-1].factor if self.history else 0.0
        return NotConverged(
            f"plastic path: no equilibrium between {reached:.6g} and {factor:.6g} times the load: "
            f"residual {why.history[-1]:.1e}; is the load beyond the limit load?",
            (*(step.factor for step in self.history), factor),
        )


def elastic_share(
    plastic: PlasticBody, linear: ElasticAnswer, state: PlasticState, away: float
) -> float:
    """How much of a change of the factor by `away` is elastic; at most 1.

    By bisection at each point of equivalent stress against the yield stress: the surface is convex
    and the state inside.
    """
    now = split(state.stress).reshape(-1, 3)
    change = away * split(linear.stress).reshape(-1, 3)
    limit = (1.0 + ON_SURFACE) * plastic.curve.at(state.hardened.ravel())[0]
    out = np.flatnonzero(equivalent(now + change, plastic.criterion) > limit)
    if not out.size:
        return 1.0
    now, change, limit = now[out], change[out], limit[out]
    low, high = np.zeros(len(out)), np.ones(len(out))
    for _ in range(50):
        middle = 0.5 * (low + high)
        outside = equivalent(now + middle[:, None] * change, plastic.criterion) > limit
        high, low = np.where(outside, middle, high), np.where(outside, low, middle)
    return float(low.min())
