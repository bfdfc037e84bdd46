"""Points of a study: grids, low-discrepancy sets and distributions."""

from dataclasses import replace
from pathlib import Path
from statistics import NormalDist

import numpy as np
import pytest

from lamwright.app.study import Sampling, Study, StudyKey
from lamwright.app.study_points import counted, points_of, value_at

GAP = StudyKey("rotor.gap_mm", low=0.3, high=0.5)
COUNT = StudyKey("layout.barriers", choices=(2, 3, 5), low=2, high=5, whole=True)
SHAPE = StudyKey("rotor.barrier[*].shape", choices=("arc", "vee"))


def study(keys: tuple[StudyKey, ...], sampling: Sampling) -> Study:
    """A study of which only keys and sampling count."""
    return Study(
        name="try",
        note="",
        path=Path("try.toml"),
        base_name="base.toml",
        base_text="",
        cards={},
        drawings={},
        keys=keys,
        effort="quick",
        tolerance="coarse",
        limits=(),
        goals=(),
        sampling=sampling,
        most_designs=100,
        seconds=60.0,
    )


def test_a_grid_has_all_combinations_once_the_last_key_fastest() -> None:
    """Steps are round numbers: 0.3 and not 0.1 + 0.1 + 0.1."""
    gap = replace(GAP, low=0.1, high=0.3, step=0.1)
    points = points_of(study((COUNT, gap), Sampling("grid")))
    assert [tuple(point.values()) for point in points[:4]] == [
        (2, 0.1),
        (2, 0.2),
        (2, 0.3),
        (3, 0.1),
    ]
    assert len(points) == counted(study((COUNT, gap), Sampling("grid"))) == 9
    assert all(isinstance(point["layout.barriers"], int) for point in points)


@pytest.mark.parametrize("kind", ["sobol", "halton"])
def test_a_set_begins_every_longer_one_and_fills_the_range(kind: str) -> None:
    """The same seed gives the same points; 64 of them come within 0.05 of any even share."""
    keys = (COUNT, GAP, SHAPE)
    long = points_of(study(keys, Sampling(kind, 64, seed=3)))  # type: ignore[arg-type]
    short = points_of(study(keys, Sampling(kind, 20, seed=3)))  # type: ignore[arg-type]
    other = points_of(study(keys, Sampling(kind, 20, seed=4)))  # type: ignore[arg-type]
    assert list(long[:20]) == list(short) != list(other)
    gaps = np.sort([float(point["rotor.gap_mm"]) for point in long])
    even = 0.3 + 0.2 * (np.arange(64) + 0.5) / 64
    assert np.abs(gaps - even).max() < 0.05 * 0.2
    for key, choices in (("layout.barriers", (2, 3, 5)), (SHAPE.key, ("arc", "vee"))):
        shares = [sum(point[key] == choice for point in long) / 64 for choice in choices]
        assert np.allclose(shares, 1 / len(choices), atol=0.05)


def test_a_normal_distribution_is_cut_off_at_its_limits() -> None:
    """Quantiles of the law between its limits, in closed form at the middle and the ends."""
    key = replace(GAP, distribution="normal", mean=0.35, deviation=0.05)
    assert value_at(key, 0.0) == pytest.approx(0.3)
    assert value_at(key, 1.0) == pytest.approx(0.5)
    law = NormalDist(0.35, 0.05)
    middle = law.inv_cdf(0.5 * (law.cdf(0.3) + law.cdf(0.5)))
    assert value_at(key, 0.5) == pytest.approx(middle, rel=1e-8)
    stepped = replace(key, step=0.1)
    assert [value_at(stepped, share) for share in (0.01, 0.5, 0.9, 0.99)] == [0.3, 0.4, 0.4, 0.5]
