"""Errors claimed for the ribs' peaks against meshes with 16 times the elements."""

from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import SteelCard
from lamwright.geometry.design_file import read_steel_card
from lamwright.geometry.section import CrossSection
from lamwright.solver.estimate_stress import finer_stress, peak_errors, zone_peaks
from lamwright.solver.refine import refined
from lamwright.solver.rotor_stress import (
    StressSettings,
    lamination_circles,
    rotor_stress,
    stress_on,
)
from lamwright.solver.types import FloatArray
from tests.random_designs import random_design
from tests.shipped import NAMES, shipped

SPEED = 200.0  # rad/s; errors are relative and stress is linear in speed squared
CARD = read_steel_card(Path(__file__).parents[2] / "designs" / "steel" / "demo_050.toml")
N_DESIGNS = 30


@dataclass(frozen=True, slots=True, eq=False)
class Ribs:
    """What is claimed and what is true of each rib's peak."""

    peak: FloatArray  # (n_rib,), Pa
    claimed: FloatArray  # (n_rib,), relative error
    true: FloatArray  # (n_rib,), relative error

    @property
    def greatest(self) -> float:
        """Claimed over true error of the greatest rib stress."""
        most = int(np.argmax(self.peak))
        return float(self.claimed[most] / self.true[most])


def studied(section: CrossSection, card: SteelCard) -> Ribs:
    """The ribs of one rotor; the truth is every triangle quartered twice, on the true arcs."""
    settings = StressSettings()
    solution = rotor_stress(section, card, SPEED, settings)
    claimed = peak_errors(section, solution, finer_stress(section, card, solution, settings))
    mesh, circles = solution.mesh, lamination_circles(section)
    for _ in range(2):
        mesh = refined(mesh, np.arange(len(mesh.elements)), circles)
    true = zone_peaks(section, stress_on(section, mesh, card, SPEED, settings))
    peak, n_rib = zone_peaks(section, solution), len(section.ribs)
    return Ribs(peak[:n_rib], claimed[:n_rib], np.abs(peak / true - 1.0)[:n_rib])


@pytest.mark.parametrize("name", NAMES[:1])
def test_claims_on_a_shipped_rotor_are_true(name: str):
    """Greatest rib stress within a third and five; no rib's error above five times its claim."""
    one = shipped(name)
    ribs = studied(one.section, one.machine.rotor_steel)
    assert 1.0 / 3.0 < ribs.greatest < 5.0
    assert np.all(ribs.claimed > 0.2 * ribs.true)


@pytest.mark.slow
def test_claims_on_random_rotors_are_true():
    """Thirty rotors: greatest rib stress within a third and five on nine in ten, none below 1/5.

    Measured: 27 of 30, least 0.82, median 1.26; the three others claim 6 to 120 times errors that
    are below 0.01 % of the stress. A few minutes on one core.
    """
    found = []
    for k in range(N_DESIGNS):
        design = random_design(np.random.default_rng(1000 + k))
        found.append(studied(cross_section(design), CARD))
    ratios = np.array([ribs.greatest for ribs in found])
    assert ratios.min() > 0.2, ratios
    assert np.mean((ratios > 1.0 / 3.0) & (ratios < 5.0)) >= 0.9, ratios
