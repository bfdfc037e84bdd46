"""What designs are worth to a search: those that hold limits, then computed, then rejected late."""

from itertools import pairwise

import pytest
from search_problems import STAGES, Looked, measure

from lamwright.app.search_worth import Measure, lacking
from lamwright.app.study import StudyGoal, StudyLimit

LIMIT = StudyLimit("mass_kg", least=1.0, most=4.0)


def worth(measure: Measure, **looked):
    return measure.worth(Looked("h", {}, **looked))


def test_violations_stand_in_the_order_of_how_far_a_design_came():
    """Holding; missing a little; much; two limits; without a figure; rejected late to early; lost.

    The order is what guides the search out of where nothing can be built.
    """
    both = measure((LIMIT, StudyLimit("f3", most=10.0)))
    done = [
        {"f1": 1.0, "f2": 1.0, "mass_kg": 4.0, "f3": 10.0},
        {"f1": 1.0, "f2": 1.0, "mass_kg": 4.1, "f3": 10.0},
        {"f1": 1.0, "f2": 1.0, "mass_kg": 8.0, "f3": 10.0},
        {"f1": 1.0, "f2": 1.0, "mass_kg": 4e9, "f3": 1e9},
        {"f1": 1.0},
    ]
    order = [worth(both, figures=figures).violation for figures in done]
    order += [
        worth(both, outcome="rejected", stage=stage, passes=None).violation
        for stage in reversed(STAGES)
    ]
    order.append(worth(both, outcome="rejected", stage="unheard of", passes=None).violation)
    order.append(worth(both, outcome="failed", stage="", passes=None).violation)
    assert order[0] == 0.0
    assert all(one < other for one, other in pairwise(order))


def test_a_limit_of_the_design_file_counts_too():
    """Done, all limits of the study held, yet the design's own missed: it is not on the front."""
    figures = {"f1": 1.0, "f2": 1.0}
    assert not worth(measure(), figures=figures, passes=False).holds
    assert worth(measure(), figures=figures, passes=None).holds


@pytest.mark.parametrize(("value", "lack"), [(1.0, 0.0), (4.0, 0.0), (8.0, 0.5), (0.5, 1.0 / 3.0)])
def test_what_a_limit_lacks(value, lack):
    """Relative gap g squeezed to g / (1 + g), by hand; being equal holds."""
    assert lacking(LIMIT, {"mass_kg": value}) == pytest.approx(lack)


def test_a_limit_at_zero_or_missed_by_rounding_is_missed():
    """No relative gap exists at zero: the gap itself; and the smallest miss is one."""
    assert lacking(StudyLimit("x", most=0.0), {"x": 1.0}) == pytest.approx(0.5)
    assert lacking(StudyLimit("x", most=1.0), {"x": 1.0 + 1e-15}) > 0.0
    assert lacking(StudyLimit("x", most=1.0), {}) == 1.0


def test_goals_are_kept_where_limits_are_missed():
    """NSGA-II sorts such designs by violation; their goals are told all the same."""
    one = Measure((StudyGoal("torque_nm", "most"),), (LIMIT,), STAGES)
    found = worth(one, figures={"torque_nm": 20.0, "mass_kg": 5.0})
    assert found.goals == (-20.0,)
    assert not found.holds
