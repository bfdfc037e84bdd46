"""Statistics of tolerances against closed forms, published intervals, and simple laws."""

import math

import numpy as np
import pytest
from scipy.special import ndtr

from lamwright.postprocess.spread import (
    SourceEffect,
    SpreadFigure,
    SpreadModel,
    SpreadSource,
    binomial_interval,
    drawn_deviations,
    holds,
    model_checks,
    moments,
    share_of,
    variance_shares,
    worsened,
    worst_case,
)


def figure(limit: float | None = None, is_least: bool = True) -> SpreadFigure:
    return SpreadFigure("torque_nm", "torque, mean", "N m", limit, is_least)


def model_of(
    lines: list[list[float]],
    bends: list[list[float]],
    figures: list[SpreadFigure],
    distribution: str = "normal",
) -> SpreadModel:
    """Nominal 10 for every figure; a row of lines and bends for each source."""
    effects = tuple(
        SourceEffect(
            SpreadSource(f"s{k}", f"source {k}", 1.0, "mm"),
            np.array(bend) - np.array(line),
            np.array(bend) + np.array(line),
        )
        for k, (line, bend) in enumerate(zip(lines, bends, strict=True))
    )
    return SpreadModel(tuple(figures), np.full(len(figures), 10.0), effects, distribution)


def test_share_of_a_linear_figure_is_the_normal_law():
    """F = 10 + 3 u_1 + 4 u_2, u normal of sigma 1/3: sigma_f = 5/3, so P(f >= 9) = Phi(0.6).

    Closed form. 200 000 samples: 4 sigma of the count are 0.4 %.
    """
    model = model_of([[3.0], [4.0]], [[0.0], [0.0]], [figure(9.0)])
    values = model.at(drawn_deviations("normal", 200_000, 2, (7, 0)))
    share = share_of(holds(model.figures, values).all(axis=1))
    exact = float(ndtr(0.6))
    assert share.value == pytest.approx(exact, abs=0.004)
    assert share.low < exact < share.high


def test_share_of_two_limits_of_one_source():
    """9 <= 10 + 2 u <= 11 with u uniform in +-1: half of all, closed form."""
    model = model_of([[2.0, 2.0]], [[0.0, 0.0]], [figure(9.0), figure(11.0, False)], "uniform")
    values = model.at(drawn_deviations("uniform", 100_000, 1, (3, 0)))
    assert share_of(holds(model.figures, values).all(axis=1)).value == pytest.approx(0.5, abs=0.007)


@pytest.mark.parametrize("distribution", ["normal", "uniform"])
def test_moments_are_those_of_a_quadratic(distribution):
    """Mean and deviation in closed form against 400 000 samples, 1 %; shares sum to 1."""
    model = model_of([[3.0], [-1.0]], [[2.0], [4.0]], [figure()], distribution)
    values = model.at(drawn_deviations(distribution, 400_000, 2, (5, 0)))
    mean, deviation = moments(model)
    assert values.mean() == pytest.approx(mean[0], rel=2e-3)
    assert values.std() == pytest.approx(deviation[0], rel=1e-2)
    assert variance_shares(model).sum() == pytest.approx(1.0)


def test_worst_case_of_lines_is_the_sum_of_slopes_times_limits():
    """Of lines both ends lie sum |a_k| off; of a parabola alone only one end does."""
    least, most = worst_case(model_of([[3.0], [-4.0]], [[0.0], [0.0]], [figure()]))
    assert (least[0], most[0]) == (3.0, 17.0)
    least, most = worst_case(model_of([[0.0]], [[-0.5]], [figure()]))
    assert (least[0], most[0]) == (9.5, 10.0)


@pytest.mark.parametrize(
    ("count", "samples", "low", "high"),
    [
        (0, 10, 0.0, 1.0 - 0.025**0.1),  # closed: (1 - p)^n = alpha / 2
        (10, 10, 0.025**0.1, 1.0),
        (5, 10, 0.1870860, 0.8129140),  # Clopper and Pearson's chart, usual tables
        (81, 263, 0.2527, 0.3676),  # Newcombe's example, Statistics in Medicine 17, 1998 (m)
    ],
)
def test_interval_meets_known_values(count, samples, low, high):
    """Ends and middle of Clopper and Pearson's interval; tables have four digits."""
    assert binomial_interval(count, samples, 0.95) == pytest.approx((low, high), abs=6e-5)


def test_interval_covers_at_least_as_often_as_it_says():
    """Exact coverage at p = 0.9, n = 60 by the binomial law itself: 95 % or more."""
    p, n = 0.9, 60
    covered = sum(
        math.comb(n, k) * p**k * (1 - p) ** (n - k)
        for k in range(n + 1)
        if binomial_interval(k, n, 0.95)[0] <= p <= binomial_interval(k, n, 0.95)[1]
    )
    assert 0.95 <= covered < 1.0


def test_same_seed_same_machines_and_another_stream_others():
    """Draws depend on the seed and the stream alone, and more of them begin with the same ones."""
    first, longer, other = (
        drawn_deviations("normal", n, 3, seed)
        for n, seed in ((5, (1, 0)), (9, (1, 0)), (5, (1, 1)))
    )
    assert np.array_equal(first, longer[:5])
    assert not np.array_equal(first, other)


def test_check_tells_a_bad_model():
    """A model that misses by half of the spread is bad, by a tenth it is good; worse is worse."""
    truth = np.linspace(-1.0, 1.0, 21)[:, None]
    spread = float(truth.std())
    sign = np.where(np.arange(21) % 2, 1.0, -1.0)[:, None]
    for share, is_good in ((0.5, False), (0.1, True)):
        (check,) = model_checks(truth + share * spread * sign, truth)
        assert check.rms == pytest.approx(share * spread)
        assert check.is_good is is_good
    assert worsened([figure(0.0)], truth, [check]) == pytest.approx(truth - check.rms)
    (still,) = model_checks(np.ones((3, 1)), np.ones((3, 1)))
    assert still.correlation is None
    assert still.is_good
