"""Newton from zero on random valid machines, far beyond rated current: not one failure."""

import math
from pathlib import Path

import numpy as np
import pytest
from random_designs import random_design
from steel_s19 import s19_tabulated

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_steel_card
from lamwright.geometry.winding import winding_table
from lamwright.solver.field import MagneticModel, magnetic_model, solve_point
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.steel import SteelLaw, reluctivity_law

CARD = Path(__file__).parents[2] / "designs" / "steel" / "demo_050.toml"
MOST_STEPS = 30
MOST_TIMES_RATED = 4.0
MESH = MeshSettings(scale=1.5)


def random_model(rng: np.random.Generator) -> tuple[MagneticModel, float]:
    """A valid design's model with one of two steels, and its rated current in A."""
    design = random_design(rng)
    section = cross_section(design)
    soft: SteelLaw = s19_tabulated()  # sharp knee at 1.9 T
    usual = reluctivity_law(read_steel_card(CARD), design.rotor.stacking_factor)
    rotor, stator = (usual, soft)[int(rng.integers(2))], (usual, soft)[int(rng.integers(2))]
    winding = winding_table(design)
    model = magnetic_model(mesh_section(section, MESH), section, winding, rotor, stator)
    return model, design.duty.rated_current_a


def solve_at_random(seed: int) -> None:
    """One random machine at rated current and at two random points up to 4 x rated."""
    rng = np.random.default_rng([20, seed])
    model, rated = random_model(rng)
    for times in (1.0, rng.uniform(0.0, MOST_TIMES_RATED), MOST_TIMES_RATED):
        gamma = rng.uniform(0.0, 2.0 * math.pi)
        position = rng.uniform(0.0, 2.0 * math.pi)
        current = times * rated
        solution = solve_point(
            model, current * math.cos(gamma), current * math.sin(gamma), position
        )
        assert solution.newton.history[-1] <= model.settings.newton.tolerance
        assert solution.newton.steps <= MOST_STEPS
        psi_i = 1.5 * (solution.psi_d * solution.i_d + solution.psi_q * solution.i_q)
        # The residual's tolerance of 1e-4 leaves less than 1e-4 of the energies.
        assert solution.energy + solution.coenergy == pytest.approx(psi_i, rel=1e-4)


@pytest.mark.parametrize("seed", range(12))
def test_newton_converges_from_zero(seed: int) -> None:
    """The energy is convex, so the search along Newton's direction cannot fail: 12 machines."""
    solve_at_random(seed)


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(12, 200))
def test_newton_converges_from_zero_on_two_hundred(seed: int) -> None:
    """With the 12 above 200 machines at 600 points from 0 to 4 x rated."""
    solve_at_random(seed)
