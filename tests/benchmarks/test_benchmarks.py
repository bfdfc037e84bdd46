"""Every benchmark runs: on a coarse mesh, once, without a word on how fast."""

import math
from importlib.util import find_spec

import pytest

from .registry import BENCHMARKS
from .timing import SILENT, growth_exponent
from .workload import TINY

NEED_PEER = ("newton_step_ratio", "operating_point_ratio")
SLOW = (
    *NEED_PEER,
    "cluster_rate",
    "core_efficiency",
    "design_seconds",
    "map_seconds",
    "sweep_efficiency",
)
CASES = [pytest.param(n, marks=pytest.mark.slow) if n in SLOW else n for n in BENCHMARKS]


@pytest.mark.parametrize("name", CASES)
def test_a_benchmark_gives_finite_positive_figures_of_its_name(name: str) -> None:
    """Law: a ratio of times, a time and a size are numbers above zero, a growth is a number.

    No size is asked of them: times on a shared machine prove nothing, and the exponent of a growth
    between two small sizes has no sign there. The two against the other library also hold its
    linkages to ours within 1e-3 and fail else.
    """
    if name in NEED_PEER and find_spec("ngsolve") is None:
        pytest.skip("the second finite element library is an optional extra")
    figures = BENCHMARKS[name](TINY, SILENT)
    assert name in figures
    for key, value in figures.items():
        assert key.startswith(name)
        assert math.isfinite(value)
        assert value > 0.0 or name.startswith("growth_exponent")


def test_growth_exponent_of_a_power_law() -> None:
    """Law: t = c n^1.25 has exponent 1.25; rounding only."""
    sizes = [10.0, 70.0, 200.0]
    assert growth_exponent(sizes, [3e-5 * n**1.25 for n in sizes]) == pytest.approx(1.25, rel=1e-12)
