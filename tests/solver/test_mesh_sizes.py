"""Sizes from sources: what is left out for speed decides nowhere."""

import numpy as np
import pytest

from lamwright.solver.mesh_sizes import NO_SOURCES, SOURCE_BLOCK, SizeSources, size_at


@pytest.mark.parametrize("growth", [0.35, 1.0])
def test_the_size_is_the_least_over_all_sources(growth: float):
    """As the definition with every source at every point; rounding of a root and a sum apart."""
    rng = np.random.default_rng(5)
    count = 3 * SOURCE_BLOCK + 7
    points = rng.normal(size=count) + 1j * rng.normal(size=count)
    sources = SizeSources(points, 10.0 ** rng.uniform(-2.5, 0.5, count))
    asked = np.concatenate([points, rng.normal(size=200) + 1j * rng.normal(size=200)])
    plain = np.min(sources.sizes + growth * np.abs(asked[:, None] - points), axis=1)
    np.testing.assert_allclose(size_at(asked, sources, growth), plain, rtol=1e-14)


def test_without_sources_there_is_no_bound():
    """An empty least is infinite."""
    assert np.all(np.isinf(size_at(np.array([0.0 + 1.0j]), NO_SOURCES, 0.5)))
