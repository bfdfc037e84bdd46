"""The space of a search: places and values, there and back."""

from pathlib import Path

import numpy as np
import pytest

from lamwright.app.search_space import Axis, SearchSpace, search_space
from lamwright.app.study import Sampling, Study, StudyGoal, StudyKey
from lamwright.geometry.errors import DesignError

GOALS = (StudyGoal("torque_nm", "most"), StudyGoal("torque_ripple_percent", "least"))
KEYS = (
    StudyKey("layout.barriers", low=2, high=5, whole=True),
    StudyKey("layout.spread", choices=("even", "slot")),
    StudyKey("rotor.gap_mm", low=0.3, high=0.8, step=0.1),
    StudyKey("rotor.barrier[1].depth_mm", low=4.0, high=9.0),
)


def study_of(keys: tuple[StudyKey, ...], goals: tuple[StudyGoal, ...] = GOALS) -> Study:
    return Study(
        name="invented",
        note="",
        path=Path("invented.toml"),
        base_name="base.toml",
        base_text="",
        cards={},
        drawings={},
        keys=keys,
        effort="quick",
        tolerance="coarse",
        limits=(),
        goals=goals,
        sampling=Sampling(),
        most_designs=10_000,
        seconds=60.0,
    )


def test_every_kind_of_key_becomes_an_axis():
    """Whole numbers, names, steps and lengths: as many values as were stated, names unordered."""
    space = search_space(study_of(KEYS))
    assert space.counts[:3].tolist() == [4, 2, 6]
    assert [axis.is_ordered for axis in space.axes] == [True, False, True, True]
    assert [axis.is_length for axis in space.axes] == [False, False, False, True]
    assert space.values([3, 1, 5, 0]) == {
        "layout.barriers": 5,
        "layout.spread": "slot",
        "rotor.gap_mm": 0.8,
        "rotor.barrier[1].depth_mm": 4.0,
    }


def test_a_range_without_steps_has_round_numbers():
    """At least 10 000 steps, each a power of ten, from end to end."""
    axis = search_space(study_of(KEYS)).axes[3]
    assert axis.step == pytest.approx(1e-4, rel=1e-12)
    assert axis.value(axis.count - 1) == 9.0
    assert axis.value(12_345) == 5.2345


def test_places_of_the_unit_cube_are_met_alike_and_come_back():
    """Middles of cells return to their places; even numbers fall on all places alike, exactly."""
    space = search_space(study_of(KEYS))
    rng = np.random.default_rng(3)
    places = rng.integers(0, space.counts, (200, 4))
    assert (space.places(space.unit(places)) == places).all()
    even = (np.arange(1200) + 0.5) / 1200
    cells = space.places(np.column_stack([even] * 4))
    assert np.bincount(cells[:, 0]).tolist() == [300] * 4
    assert np.bincount(cells[:, 2]).tolist() == [200] * 6
    assert space.places(np.array([[0.0] * 4, [1.0] * 4])).tolist() == [
        [0, 0, 0, 0],
        (space.counts - 1).tolist(),
    ]


def test_a_design_finds_its_place():
    """The nearest place of each value, none where a value lies outside or is missing."""
    space = search_space(study_of(KEYS))
    places = (2, 0, 3, 700)
    values = dict(space.values(places))
    assert space.place_of(values) == places
    assert space.place_of({**values, "rotor.gap_mm": 0.9}) is None
    assert space.place_of({**values, "layout.spread": "other"}) is None
    assert space.place_of({"rotor.gap_mm": 0.5}) is None
    assert Axis("k", 3, stated=(1.0, 2.0, 5.0)).place(4.0) == 2


def test_a_study_without_a_goal_or_choice_is_refused():
    """One line each, with the file and what is missing."""
    with pytest.raises(DesignError, match=r"^invented\.toml: goal: none is given; a search needs"):
        search_space(study_of(KEYS, ()))
    with pytest.raises(DesignError, match=r"^invented\.toml: key: one design only"):
        search_space(study_of((StudyKey("rotor.gap_mm", low=0.5, high=0.5),)))


def test_the_space_counts_its_points():
    """The product of all counts."""
    axes = (Axis("a", 10, low=0.0, step=1.0), Axis("b", 7, low=0.0, step=1.0))
    assert SearchSpace(axes).size == 70.0
