"""Magnets in the section's picture: arrows along their remanence, in every pole."""

import cmath
import math
from pathlib import Path

import pytest
from matplotlib.figure import Figure

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_design
from lamwright.postprocess.figures_magnets import draw_arrows, magnet_callouts
from lamwright.postprocess.figures_style import Style, upright

DEMO = Path(__file__).parents[2] / "designs" / "demo_36s4p_magnet.toml"


def test_arrows_point_along_the_remanence_of_each_pole() -> None:
    """Inward in the first pole, round from pole to pole, 0.7 of the thickness long; exact."""
    section = cross_section(read_design(DEMO))
    ax = Figure().add_subplot()
    turns = [upright(section) * cmath.exp(0.5j * math.pi * k) for k in range(section.poles)]
    draw_arrows(ax, section, turns, Style())
    magnets = [r for r in section.rotor if r.material == "magnet"]
    assert len(ax.texts) == len(turns) * len(magnets) == 20
    for k, arrow in enumerate(ax.texts):
        pole, number = divmod(k, len(magnets))
        drawn = complex(*arrow.xy) - complex(*arrow.xyann)
        toward_shaft = -1j * cmath.exp(0.5j * math.pi * pole)  # the first pole stands upright
        thickness = {1: 3.4, 2: 4.4, 3: 4.8}[int(magnets[number].name.split("_")[1])]
        assert drawn == pytest.approx((-1.0) ** pole * 0.7 * thickness * toward_shaft, abs=1e-9)


def test_each_barrier_names_its_magnets_once() -> None:
    """The right one of a pair, at a point of the block beside its arrow."""
    section = cross_section(read_design(DEMO))
    found = magnet_callouts(section, upright(section))
    assert [c.text for c in found] == ["magnet 1", "magnet 2", "magnet 3"]
    assert all(c.anchor.real > 1e-3 for c in found)  # right of the q axis, which points upward
