"""The share of machines that hold, by the model, against plain sampling of full solutions."""

from pathlib import Path

import numpy as np
import pytest

from lamwright.app.spread import SpreadWishes, spread
from lamwright.postprocess.spread import binomial_interval, holds, whole

DESIGNS = Path(__file__).parents[2] / "designs"
SOLVED = 300


@pytest.mark.slow
def test_share_is_that_of_300_machines_solved_in_full(tmp_path):
    """Issue 7, point 6: the model's share lies inside the 95 % interval of 300 full solutions.

    Limits lie within the spread, so that about half of the machines hold all of them. Both draw
    from streams of their own, so neither knows the other's machines. Coarse meshes and four
    positions are the same for both; the ripple of four positions is judged by both alike.
    Measured: 42.4 % by the model, 127 of 300 in full (36.7 to 48.1 %), 299 of 300 judged alike.
    """
    text = (DESIGNS / "demo_24s4p_arc.toml").read_text()
    text = text.replace('"steel/', f'"{DESIGNS.as_posix()}/steel/')
    for stated, asked in (
        ("least_torque_nm = 9.0", "least_torque_nm = 11.5"),
        ("least_saliency_ratio = 3.0", "least_saliency_ratio = 5.88"),
        ("least_yield_margin = 1.2", "least_yield_margin = 2.17"),
    ):
        assert stated in text
        text = text.replace(stated, asked)
    path = tmp_path / "demo.toml"
    path.write_text(f"{text}\n[tolerance]\nbore_eccentricity_mm = 0.0\ngap_mm = 0.04\n")
    wishes = SpreadWishes(samples=20_000, solve=SOLVED, seed=11, tolerance="coarse", positions=4)
    report = spread(path, tmp_path / "out", wishes)
    figures = report.model.figures
    count = int(np.sum(whole(figures, report.solved)))
    low, high = binomial_interval(count, SOLVED, 0.95)
    assert low <= report.share.value <= high
    assert 0.2 < report.share.value < 0.8
    # Each limit alone too; and machine by machine the model judges nearly all alike.
    for k, own in enumerate(report.shares):
        alone = int(np.sum(holds(figures, report.solved)[:, k]))
        least, most = binomial_interval(alone, SOLVED, 0.99)
        assert least <= own.value <= most
    alike = whole(figures, report.solved) == whole(figures, report.modelled)
    assert np.mean(alike) > 0.97
