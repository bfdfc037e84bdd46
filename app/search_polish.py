"""Polish of a front: members step along the adjoint's slopes, and the truth decides.

Each step is a linear programme: the step that betters all goals with slopes alike, counted in
spans of the front, while every limit with slopes holds to first order and no axis moves more than
a radius. At a design where no such step exists nothing betters all these goals at once
(Fliege, Svaiter 2000), and its line ends. A step is evaluated like any design. It is accepted
where all limits hold and it betters a goal and worsens none, also none without slopes; then
the radius grows, else it shrinks. Refused steps too are rows of the ledger, and may stand on the
front.
Axes of arrays: n_axis keys, n_free of them that the slopes know.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.types import FloatArray

from .search_breeding import Point
from .search_front import Frame, frame_of, on_front
from .search_worth import Measure, Worth

if TYPE_CHECKING:
    from .search import Evaluate, Known
    from .search_slopes import DesignSlopes, Motion
    from .search_space import SearchSpace
    from .search_state import SearchState
    from .study import StudyGoal, Values

RADIUS = 0.06  # of an axis, first step
MOST_RADIUS, LEAST_RADIUS = 0.15, 0.004
GROWS, SHRINKS = 1.5, 0.4
LEAST_GAIN = 1e-4  # of a goal's span, to first order; less is no way on


@dataclass(frozen=True, slots=True)
class Line:
    """One member of the front on its way."""

    point: Point
    worth: Worth
    figures: Mapping[str, float]
    radius: float = RADIUS
    steps: int = 0  # accepted
    tries: int = 0
    slopes: Mapping[str, tuple[float, ...]] | None = None  # of figures over whole axes, here
    ended: str = ""  # why; empty while it may go on


@dataclass(frozen=True, slots=True)
class PolishState:
    """A polish between two rounds."""

    designs: int  # that the search had asked for when it began
    members: int  # of the front that were to be polished
    lines: tuple[Line, ...]
    points: tuple[Point, ...] = ()  # all tried
    worths: tuple[Worth, ...] = ()  # theirs
    hashes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Polisher:
    """What a polish works with.

    `slopes_at` gives the slopes of designs, in order; `motions_at` what each axis moves there.
    """

    space: "SearchSpace"
    measure: Measure
    evaluate: "Evaluate"
    slopes_at: "Callable[[Sequence[Values]], Sequence[DesignSlopes]]"
    motions_at: "Callable[[Values], Sequence[Motion | None]]"


def raise_if_idle(
    space: "SearchSpace", goals: "Sequence[StudyGoal]", known_figures: Sequence[str]
) -> None:
    """Refuse a polish where no goal has slopes, or no axis is a length.

    Raises:
        LamwrightError: in one line.
    """
    figures = [goal.figure for goal in goals]
    if not set(figures) & set(known_figures):
        raise LamwrightError(
            f"--polish: no slopes of {', '.join(figures)}; accepted with a goal among "
            f"{', '.join(known_figures)}"
        )
    if not any(axis.is_length for axis in space.axes):
        raise LamwrightError(
            "--polish: every key has steps or names; accepted with a range without step"
        )


def begun_polish(state: "SearchState", rows: "Sequence[Known]", members: int) -> PolishState:
    """Members of the front, evenly along its first goal.

    Args:
        state: of the search.
        rows: of all designs it asked for, in order.
        members: of the front, at most.
    """
    held = [k for k, worth in enumerate(state.worths) if worth.holds]
    goals = np.array([state.worths[k].goals for k in held], dtype=float)
    front = [k for k, is_best in zip(held, on_front(goals), strict=True) if is_best]
    front.sort(key=lambda k: state.worths[k].goals)
    if len(front) > members:
        spread = np.linspace(0, len(front) - 1, members).round().astype(int)
        front = [front[k] for k in spread]
    lines = [Line(state.asked[k], state.worths[k], dict(rows[k].figures)) for k in front]
    return PolishState(len(state.asked), members, tuple(lines))


def polished(
    polisher: Polisher,
    state: PolishState,
    goals: FloatArray,
    rounds: int,
    keep: Callable[[PolishState], None],
) -> PolishState:
    """Go on with a polish until its rounds are spent or all lines have ended.

    Args:
        polisher: what it works with.
        state: where it stands.
        goals: of the search's designs that hold all limits (n, n_goal); they set the scale.
        rounds: tries of each line, at most.
        keep: is given the state after each round.
    """
    if not state.lines:
        return state
    frame = frame_of(goals)
    while True:
        active = [k for k, line in enumerate(state.lines) if _may_go_on(line, rounds)]
        if not active:
            return state
        state = _with_slopes(polisher, state, active)
        tried: list[tuple[int, Point]] = []
        for k in active:
            line = state.lines[k]
            point = None if line.ended else next_point(polisher, line, frame)
            if point is None:
                ended = line.ended or "no step betters all goals"
                state = _with_line(state, k, replace(line, ended=ended))
            else:
                tried.append((k, point))
        if tried:
            values = [polisher.space.values(point) for _, point in tried]
            rows = polisher.evaluate(values, "polish")
            for (k, point), row in zip(tried, rows, strict=True):
                state = _judged(state, k, point, row, polisher.measure.worth(row))
        keep(state)


def next_point(polisher: Polisher, line: Line, frame: Frame) -> Point | None:
    """The place that a line tries next; None where no step betters all goals with slopes."""
    assert line.slopes is not None
    free = _free(polisher, line.slopes)
    measure = polisher.measure
    span = np.where(frame.worst > frame.best, frame.worst - frame.best, np.abs(frame.best) + 1e-30)
    betters = []  # rows of -d goal / span, to be at least t
    for k, goal in enumerate(measure.goals):
        if goal.figure in line.slopes:
            sign = -1.0 if goal.sense == "most" else 1.0
            slope = np.array(line.slopes[goal.figure])[free] * line.figures[goal.figure]
            betters.append(-sign * slope / span[k])
    rows, bounds = [], []
    for limit in measure.limits:
        if limit.figure not in line.slopes or limit.figure not in line.figures:
            continue
        value = line.figures[limit.figure]
        slope = np.array(line.slopes[limit.figure])[free] * value
        if limit.least is not None:
            rows.append(-slope)
            bounds.append(value - limit.least)
        if limit.most is not None:
            rows.append(slope)
            bounds.append(limit.most - value)
    here = polisher.space.unit(np.array([line.point]))[0]
    room = (np.maximum(-line.radius, -here[free]), np.minimum(line.radius, 1.0 - here[free]))
    step = best_step(np.array(betters), np.array(rows), np.array(bounds), room)
    if step is None:
        return None
    here[free] += step
    point = tuple(int(k) for k in polisher.space.places(here[None])[0])
    return None if point == line.point else point


def best_step(
    betters: FloatArray, rows: FloatArray, bounds: FloatArray, room: tuple[FloatArray, FloatArray]
) -> FloatArray | None:
    """The step (n_free,) whose least gain is greatest; None where that is as good as nothing.

    Args:
        betters: gains by a step (n_known, n_free), one row a goal.
        rows: of limits (n_limit, n_free): rows @ step <= bounds.
        bounds: (n_limit,), not negative where limits hold.
        room: least and most of each component (n_free,).
    """
    from scipy.optimize import linprog

    n_free = betters.shape[1]
    if n_free == 0:
        return None
    upper = np.column_stack([-betters, np.ones(len(betters))])  # t - gain <= 0
    right = np.zeros(len(betters))
    if len(rows):
        upper = np.vstack([upper, np.column_stack([rows, np.zeros(len(rows))])])
        right = np.concatenate([right, np.maximum(bounds, 0.0)])
    cost = np.zeros(n_free + 1)
    cost[-1] = -1.0
    box = [*zip(*room, strict=True), (None, None)]
    found = linprog(cost, A_ub=upper, b_ub=right, bounds=box, method="highs")
    if found.x is None or found.fun is None or -found.fun < LEAST_GAIN:
        return None
    return np.asarray(found.x[:-1])


def _may_go_on(line: Line, rounds: int) -> bool:
    return not line.ended and line.tries < rounds


def _free(polisher: Polisher, slopes: Mapping[str, tuple[float, ...]]) -> np.ndarray:
    """Numbers of the axes that any slope is known of."""
    table = np.array(list(slopes.values()))
    return np.flatnonzero((table != 0.0).any(axis=0))


def _with_slopes(polisher: Polisher, state: PolishState, active: Sequence[int]) -> PolishState:
    """The slopes of all lines that have none where they stand."""
    lacking = [k for k in active if state.lines[k].slopes is None]
    values = [polisher.space.values(state.lines[k].point) for k in lacking]
    found = polisher.slopes_at(values) if lacking else []
    for k, one, told in zip(lacking, values, found, strict=True):
        line = state.lines[k]
        if told.refusal:
            state = _with_line(state, k, replace(line, ended=told.refusal))
            continue
        motions = polisher.motions_at(one)
        by_axis = {
            figure: tuple(
                sum((slope.get(key, 0.0) * way for key, way in (motion or {}).items()), 0.0)
                for motion in motions
            )
            for figure, slope in told.by_figure.items()
            if figure in line.figures
        }
        state = _with_line(state, k, replace(line, slopes=by_axis))
    return state


def _judged(state: PolishState, k: int, point: Point, row: "Known", worth: Worth) -> PolishState:
    line = state.lines[k]
    pairs = list(zip(worth.goals, line.worth.goals, strict=True))
    is_better = (
        worth.holds
        and all(new <= old for new, old in pairs)
        and any(new < old for new, old in pairs)
    )
    if is_better:
        radius = min(GROWS * line.radius, MOST_RADIUS)
        line = Line(point, worth, dict(row.figures), radius, line.steps + 1, line.tries + 1)
    else:
        radius = SHRINKS * line.radius
        ended = "" if radius > LEAST_RADIUS else "shorter steps better nothing"
        line = replace(line, radius=radius, tries=line.tries + 1, ended=ended)
    state = _with_line(state, k, line)
    return replace(
        state,
        points=(*state.points, point),
        worths=(*state.worths, worth),
        hashes=(*state.hashes, row.hash),
    )


def _with_line(state: PolishState, k: int, line: Line) -> PolishState:
    return replace(state, lines=(*state.lines[:k], line, *state.lines[k + 1 :]))
