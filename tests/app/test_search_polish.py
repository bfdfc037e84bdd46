"""The polish of a front against a Pareto set known in closed form, and what its slopes are."""

from dataclasses import replace

import numpy as np
import pytest
from search_problems import Counted, lengths, measure

from lamwright.app.search import searched
from lamwright.app.search_front import Frame
from lamwright.app.search_polish import (
    Line,
    Polisher,
    begun_polish,
    best_step,
    next_point,
    polished,
    raise_if_idle,
)
from lamwright.app.search_polish_state import packed_polish, unpacked_polish
from lamwright.app.search_slopes import DesignSlopes
from lamwright.app.search_state import SearchSettings, begun_state
from lamwright.app.search_worth import Worth
from lamwright.app.study import StudyLimit
from lamwright.geometry.errors import LamwrightError

ONE, OTHER = np.array([0.2, 0.3, 0.5, 0.5]), np.array([0.8, 0.7, 0.5, 0.5])
SPACE = lengths(4)
EDGE = StudyLimit("f3", most=0.6)


def bowls(values):
    """Squared distances from two points; the Pareto set is the straight line between them.

    f3 = x3 has a limit in some tests, f4 no slopes.
    """
    x = np.array(list(values.values()))
    return {
        "f1": 1.0 + float(((x - ONE) ** 2).sum()),
        "f2": 1.0 + float(((x - OTHER) ** 2).sum()),
        "f3": 0.4 + float(x[2]),
        "f4": 1.0,
    }


def slopes_at(many):
    """Exact relative slopes of all but f4."""
    found = []
    for values in many:
        x, at = np.array(list(values.values())), bowls(values)
        by = {"f1": 2 * (x - ONE) / at["f1"], "f2": 2 * (x - OTHER) / at["f2"]}
        by["f3"] = np.array([0.0, 0.0, 1.0, 0.0]) / at["f3"]
        found.append(
            DesignSlopes(
                {
                    figure: {f"x{k}": float(one) for k, one in enumerate(row, start=1)}
                    for figure, row in by.items()
                }
            )
        )
    return found


def polisher(limits=(), formula=bowls, slopes=slopes_at):
    counted = Counted(formula)
    return Polisher(
        SPACE,
        measure(limits),
        counted,
        slopes,
        lambda values: [{key: 1.0} for key in values],
    ), counted


def off_line(points):
    """Distances of places (n, 4) from the straight line between the two best points."""
    x = np.array([list(SPACE.values(point).values()) for point in points])
    way = (OTHER - ONE) / np.linalg.norm(OTHER - ONE)
    return np.linalg.norm((x - ONE) - np.outer((x - ONE) @ way, way), axis=1)


def short_search(limits=()):
    """A search that stops far from the front, and its rows."""
    counted = Counted(bowls)
    settings = SearchSettings(population=16, budget=64, seed=2, stall=0)
    state = searched(SPACE, measure(limits), counted, begun_state(settings), lambda one: None)
    return state, counted.rows


def test_members_walk_to_the_pareto_set():
    """From 0.17 off the straight line, in the mean, to a tenth of that, by a dozen tries each."""
    state, rows = short_search()
    begun = begun_polish(state, rows, 5)
    worker, counted = polisher()
    done = polished(worker, begun, state.goals(), 14, lambda one: None)
    before = off_line([line.point for line in begun.lines])
    after = off_line([line.point for line in done.lines])
    assert before.mean() > 0.05
    assert after.mean() < 0.2 * before.mean()
    for old, new in zip(begun.lines, done.lines, strict=True):
        assert all(n <= o for n, o in zip(new.worth.goals, old.worth.goals, strict=True))
        assert new.steps <= new.tries <= 14
    assert len(counted.rows) == len(done.points) == sum(line.tries for line in done.lines)


def test_a_limit_with_slopes_is_not_stepped_over():
    """f3 = 0.4 + x3 <= 0.6 keeps x3 below 0.2, where both goals want 0.5: no tried step misses it.

    The limit is linear, so that its slope tells it exactly; a place is rounded to 5e-5.
    """
    state, rows = short_search((EDGE,))
    worker, counted = polisher((EDGE,))
    done = polished(worker, begun_polish(state, rows, 4), state.goals(), 10, lambda one: None)
    assert counted.rows
    assert max(row.figures["f3"] for row in counted.rows) <= 0.6 + 1e-4
    assert any(line.steps for line in done.lines)


def test_a_goal_without_slopes_vetoes():
    """A second goal that any move worsens: all steps are refused, the radius shrinks to its end."""

    def spoilt(values):
        x = np.array(list(values.values()))
        return {"f1": bowls(values)["f1"], "f2": 1.0 + 10.0 * float(np.abs(x - 0.6).max())}

    point = tuple(int(k) for k in SPACE.places(np.full((1, 4), 0.6))[0])
    figures = spoilt(SPACE.values(point))
    line = Line(point, Worth((figures["f1"], figures["f2"]), 0.0), figures)
    worker, _ = polisher(
        formula=spoilt,
        slopes=lambda many: [
            replace(one, by_figure={"f1": one.by_figure["f1"]}) for one in slopes_at(many)
        ],
    )
    goals = np.array([[1.0, 1.0], [2.0, 2.0]])
    begun = replace(begun_polish(*short_search(), 1), lines=(line,))
    done = polished(worker, begun, goals, 20, lambda one: None)
    assert done.lines[0].steps == 0
    assert done.lines[0].ended == "shorter steps better nothing"
    assert done.lines[0].point == point


def test_on_the_pareto_set_a_line_ends_untried():
    """Half-way between the two points their gradients are opposite: no step betters both."""
    point = SPACE.place_of({f"x{k}": 0.5 for k in (1, 2, 3, 4)})
    figures = bowls(SPACE.values(point))
    worker, _ = polisher()
    by = slopes_at([SPACE.values(point)])[0].by_figure
    line = Line(
        point,
        Worth((figures["f1"], figures["f2"]), 0.0),
        figures,
        slopes={figure: tuple(row.values()) for figure, row in by.items()},
    )
    assert next_point(worker, line, Frame(np.ones(2), np.full(2, 2.0))) is None


def test_the_step_is_that_of_the_greatest_least_gain():
    """Two gains (1, 0) and (0, 1) in a box of 0.1: its corner; a limit x + y <= 0.1 halves it."""
    gains, box = np.eye(2), (np.full(2, -0.1), np.full(2, 0.1))
    free = best_step(gains, np.zeros((0, 2)), np.zeros(0), box)
    assert free == pytest.approx([0.1, 0.1])
    held = best_step(gains, np.array([[1.0, 1.0]]), np.array([0.1]), box)
    assert held == pytest.approx([0.05, 0.05])
    assert (
        best_step(np.array([[1.0, 0.0], [-1.0, 0.0]]), np.zeros((0, 2)), np.zeros(0), box) is None
    )


def test_a_killed_polish_goes_on_bit_by_bit():
    """From the state kept after each round, through bytes; slopes are not asked for again."""
    state, rows = short_search()
    kept: list[bytes] = []
    worker, _ = polisher()
    begun = begun_polish(state, rows, 4)
    whole = polished(worker, begun, state.goals(), 6, lambda one: kept.append(packed_polish(one)))
    for data in kept[:-1]:
        again = unpacked_polish(data, begun.designs, 4)
        assert again is not None
        done = polished(worker, again, state.goals(), 6, lambda one: None)
        assert packed_polish(done) == packed_polish(whole)
    assert unpacked_polish(kept[0], begun.designs + 16, 4) is None
    assert unpacked_polish(kept[0], begun.designs, 5) is None
    assert unpacked_polish(b"damaged", begun.designs, 4) is None


def test_a_design_without_slopes_ends_its_line_with_the_reason():
    """As a machine with magnets: no step, the reason kept, the others unharmed."""
    state, rows = short_search()
    refusal = "slopes: a machine with magnets has none yet; remove [magnet]"
    worker, counted = polisher(slopes=lambda many: [DesignSlopes(refusal=refusal) for _ in many])
    done = polished(worker, begun_polish(state, rows, 3), state.goals(), 5, lambda one: None)
    assert {line.ended for line in done.lines} == {refusal}
    assert counted.rows == []


def test_a_polish_that_can_do_nothing_is_refused():
    """No goal with slopes: one line that says which figures have some."""
    goals = measure().goals
    raise_if_idle(SPACE, goals, ("f1", "torque_nm"))
    with pytest.raises(LamwrightError, match=r"^--polish: no slopes of f1, f2; accepted with a"):
        raise_if_idle(SPACE, goals, ("torque_nm",))
    stepped = replace(SPACE, axes=tuple(replace(axis, is_length=False) for axis in SPACE.axes))
    with pytest.raises(LamwrightError, match="every key has steps or names"):
        raise_if_idle(stepped, goals, ("f1",))
