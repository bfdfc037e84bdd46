"""This project's side of every pair: the README's design, meshed at a scale, and its Newton step.

The only module here that knows the inside of the solver room.
"""

import math
import pickle
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache, partial
from pathlib import Path
from typing import Generic

from lamwright.app.lamination import section_of
from lamwright.app.point import model_of, read_machine
from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection
from lamwright.solver.field import (
    MagneticModel,
    at_position,
    kept_energy,
    solve_point,
    unknowns,
)
from lamwright.solver.integrals import phase_currents
from lamwright.solver.linear import CholmodSolver
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.newton import Energy, State
from lamwright.solver.pattern import summed
from lamwright.solver.point_energy import PointEnergy
from lamwright.solver.steel_kernel import SteelState, steel_tangent
from lamwright.solver.types import FieldSolution, FloatArray

ROOT = Path(__file__).parents[2]
DESIGN = ROOT / "designs/demo_24s4p_arc.toml"
POSITION = 0.0  # rad; shift 0: the sides of rotor and stator meet, as the other library needs
BEFORE = 0.9  # share of the current at which a Newton step begins


@dataclass(frozen=True, slots=True, eq=False)
class Case:
    """The design with its pole meshed and its model built."""

    machine: Machine
    section: CrossSection
    model: MagneticModel

    @property
    def unknowns(self) -> int:
        """Number of unknowns."""
        return self.model.numbering.n_dof

    def currents(self, gamma: float, share: float = 1.0) -> tuple[float, float]:
        """(i_d, i_q) in A at `share` of rated current, `gamma` degrees from the d axis."""
        peak = share * self.machine.design.duty.rated_current_a
        angle = math.radians(gamma)
        return peak * math.cos(angle), peak * math.sin(angle)


@lru_cache(maxsize=1)
def case(scale: float) -> Case:
    """The README's design at a mesh scale; the last one is kept."""
    machine = read_machine(DESIGN)
    section = section_of(machine)
    sector = mesh_section(section, MeshSettings(scale=scale))
    return Case(machine, section, model_of(machine, section, sector))


def emptied(model: MagneticModel) -> MagneticModel:
    """The model without factors: as a worker process gets it."""
    copy: MagneticModel = pickle.loads(pickle.dumps(model))
    return copy


def phase_currents_of(case: Case, gamma: float) -> FloatArray:
    """Currents (3,) in A at rated current."""
    i_d, i_q = case.currents(gamma)
    return phase_currents(i_d, i_q, case.model.sector.pole_pairs * POSITION)


def point(case: Case, gamma: float) -> FieldSolution:
    """An operating point at rated current, from nothing."""
    return solve_point(case.model, *case.currents(gamma), POSITION)


@dataclass(frozen=True, slots=True, eq=False)
class NewtonStep(Generic[State]):
    """One full Newton step of any `Energy`: assemble, factorise, solve, residual at its end."""

    energy: Energy[State]
    a: FloatArray
    residual: FloatArray
    state: State

    def __call__(self) -> FloatArray:
        """The residual after the step."""
        direction = self.energy.solve_tangent(self.state, -self.residual)
        after, _ = self.energy.residual(self.a + direction)
        return after


def newton_step(energy: Energy[State], a: FloatArray) -> NewtonStep[State]:
    """The step that begins at `a`."""
    return NewtonStep(energy, a, *energy.residual(a))


def point_energy(case: Case, gamma: float) -> PointEnergy:
    """The energy that `solve_point` minimises, at rated current."""
    load = phase_currents_of(case, gamma) @ case.model.linkage
    return kept_energy(case.model, at_position(case.model, POSITION), load)


def unknowns_before(case: Case, gamma: float) -> FloatArray:
    """What the iteration keeps of the field at somewhat less current: where a step begins."""
    field = solve_point(case.model, *case.currents(gamma, BEFORE), POSITION)
    a = unknowns(case.model, field)
    condensed = at_position(case.model, POSITION).condensed
    return a if condensed is None else a[condensed.kept]


def factorisation(energy: PointEnergy, state: SteelState) -> Callable[[], None]:
    """CHOLMOD's numeric factorisation of a step's matrix in our order, and nothing else."""
    from cvxopt import cholmod

    linear, tangent = energy.linear, steel_tangent(energy.iron.metric, state)
    solver = linear.solver
    assert isinstance(solver, CholmodSolver)
    solver.factorise(linear.values + summed(energy.places.scatter, tangent))
    # Not `factorise`: that copies the values in too.
    return partial(cholmod.numeric, solver._matrix, solver._factor)
