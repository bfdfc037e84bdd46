"""Cautions beside the figures of forces."""

from lamwright.postprocess.ripple_figures import force_cautions


def test_a_pull_that_matters_is_told() -> None:
    """Skew and a centred pull each add a line; rounding does not."""
    assert len(force_cautions(1, 1e-9)) == 1
    told = force_cautions(3, 1084.4)
    assert "as if it were not skewed" in told[1]
    assert "up to 1084 N" in told[2]
