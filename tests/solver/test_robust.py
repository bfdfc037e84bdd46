"""Newton from zero on random machines of random steels, far beyond rated current: no failure.

The worst cases are shown at the end of the run (`pytest -m slow tests/solver/test_robust.py`).
"""

import json
import math
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest
from newton_cases import PROPERTY, Case
from random_designs import random_design
from random_steels import random_steel
from steel_s19 import s19_tabulated

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import read_steel_card
from lamwright.geometry.winding import winding_table
from lamwright.solver.field import MagneticModel, magnetic_model, solve_point
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.steel import SteelLaw, reluctivity_law

CARD = read_steel_card(Path(__file__).parents[2] / "designs" / "steel" / "demo_050.toml")
MOST_STEPS = 30
MOST_TIMES_RATED = 5.0
MACHINES, POINTS = 200, 10
MESH = MeshSettings(scale=1.5)


@dataclass(frozen=True, slots=True, eq=False)
class Machine:
    """A random machine, ready to be solved."""

    model: MagneticModel
    rated: float  # A
    steels: tuple[str, str]  # of rotor and stator


def steel(rng: np.random.Generator, stacking_factor: float) -> tuple[SteelLaw, str]:
    """One of ten the shipped steel, one of ten S19, else a random card."""
    kind = int(rng.integers(10))
    if kind == 0:
        return reluctivity_law(CARD, stacking_factor), CARD.name
    if kind == 1:
        return s19_tabulated(), "S19, knee at 1.9 T"
    card, curve = random_steel(rng, CARD)
    return reluctivity_law(card, stacking_factor), str(curve)


def random_machine(seed: int) -> tuple[Machine, np.random.Generator]:
    """The machine of a seed, and the generator that goes on to its points."""
    rng = np.random.default_rng([20, seed])
    design: MachineDesign = random_design(rng)
    section = cross_section(design)
    (rotor, first), (stator, second) = (steel(rng, design.rotor.stacking_factor) for _ in range(2))
    sector = mesh_section(section, MESH)
    model = magnetic_model(sector, section, winding_table(design), rotor, stator)
    return Machine(model, design.duty.rated_current_a, (first, second)), rng


def solve_at_random(seed: int, points: int) -> list[Case]:
    """One random machine at `points` points: the first at most current, the others below."""
    machine, rng = random_machine(seed)
    cases = []
    for k in range(points):
        times = MOST_TIMES_RATED * (1.0 if k == 0 else rng.uniform())
        gamma, position = rng.uniform(0.0, 2.0 * math.pi, 2).tolist()
        current = times * machine.rated
        solution = solve_point(
            machine.model, current * math.cos(gamma), current * math.sin(gamma), position
        )
        report = solution.newton
        cases.append(
            Case(
                seed, k, times, gamma, position, *machine.steels, report.steps, report.coarse_steps
            )
        )
        assert report.history[-1] <= machine.model.settings.newton.tolerance, cases[-1]
        psi_i = 1.5 * (solution.psi_d * solution.i_d + solution.psi_q * solution.i_q)
        # The residual's tolerance of 1e-4 leaves less than 1e-4 of the energies.
        assert solution.energy + solution.coenergy == pytest.approx(psi_i, rel=1e-4), cases[-1]
    return cases


@pytest.mark.parametrize("seed", range(6))
def test_newton_converges_from_zero(seed: int) -> None:
    """The energy is convex, so the search along Newton's direction cannot fail: 6 machines."""
    cases = solve_at_random(seed, 2)
    assert max(case.most for case in cases) <= MOST_STEPS


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(MACHINES))
def test_newton_converges_from_zero_at_two_thousand_points(
    seed: int, request: pytest.FixtureRequest
) -> None:
    """200 machines at 10 points: all converge, none in more than 30 steps of either mesh order."""
    cases = solve_at_random(seed, POINTS)
    for case in cases:
        request.node.user_properties.append((PROPERTY, json.dumps(case.record())))
    assert max(case.most for case in cases) <= MOST_STEPS
