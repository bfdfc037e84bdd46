"""Newton steps and operating points against the other library; a step against its factorisation."""

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial

import numpy as np

from lamwright.solver.newton import minimise
from lamwright.solver.types import FloatArray

from .ours import (
    BEFORE,
    Case,
    NewtonStep,
    case,
    factorisation,
    newton_step,
    phase_currents_of,
    point,
    point_energy,
    unknowns_before,
)
from .peer import OwnNewton, Peer, PeerEnergy, peer_of, working_solvers
from .timing import Notes, interleaved, ratio
from .workload import Workload

SAME_FIELD = 1e-3  # of the largest linkage; measured 4e-6, what two stops at 1e-4 may leave


@dataclass(frozen=True, slots=True, eq=False)
class _PeerPoint:
    """An operating point of the peer at rated current by our damping, to our tolerance."""

    case: Case
    peer: Peer
    gamma: float
    solver: str
    tuned: bool

    def energy(self) -> PeerEnergy:
        return PeerEnergy(self.peer, self.load, self.solver, self.tuned)

    @property
    def load(self) -> FloatArray:
        loads: FloatArray = phase_currents_of(self.case, self.gamma) @ self.peer.linkage
        return loads

    def solve(self, energy: PeerEnergy) -> FloatArray:
        """Unknowns from nothing."""
        scale = float(np.linalg.norm(self.load))
        newton = self.case.model.settings.newton
        a, _, _ = minimise(energy, np.zeros(self.peer.space.ndof), scale, newton)
        return a


def newton_step_ratio(work: Workload, notes: Notes) -> dict[str, float]:
    """Our full Newton step against the peer's, with its linear elements assembled anew or kept."""
    ours, peer = case(work.scale), peer_of(case(work.scale))
    gamma = work.current_angles[len(work.current_angles) // 2]
    step = newton_step(point_energy(ours, gamma), unknowns_before(ours, gamma))
    found = {}
    for tuned in (False, True):
        steps = {
            solver: _peer_step(_PeerPoint(ours, peer, gamma, solver, tuned))
            for solver in working_solvers(peer)
        }
        best = _fastest(steps, notes)
        name = "newton_step_ratio" + ("_tuned" if tuned else "")
        found[name] = ratio(name, steps[best], step, work.rounds, notes)
    return found


def operating_point_ratio(work: Workload, notes: Notes) -> dict[str, float]:
    """An operating point from nothing: ours against the peer's, mean of several currents.

    The peer's steps are damped as ours are, or by its own driver.
    """
    ours, peer = case(work.scale), peer_of(case(work.scale))
    solvers = working_solvers(peer)
    gamma = work.current_angles[0]
    steps = {s: _peer_step(_PeerPoint(ours, peer, gamma, s, False)) for s in solvers}
    best = _fastest(steps, notes)
    ours_all: list[Callable[[], object]] = []
    same_damping: list[Callable[[], object]] = []
    own_driver: list[Callable[[], object]] = []
    for gamma in work.current_angles:
        theirs = _PeerPoint(ours, peer, gamma, best, tuned=False)
        energy = theirs.energy()
        own = OwnNewton(peer, phase_currents_of(ours, gamma), best)
        own.aim(ours.model.settings.newton.tolerance * float(np.linalg.norm(theirs.load)))
        _check_same(ours, peer, gamma, (theirs.solve(energy), own.solve()))
        notes.say(
            f"{gamma:g} degrees: {point(ours, gamma).newton.steps} steps, its own {own.steps}"
        )
        ours_all.append(partial(point, ours, gamma))
        same_damping.append(partial(theirs.solve, energy))
        own_driver.append(own.solve)
    rounds = max(1, work.rounds // 3)
    found = {}
    for name, peers in (
        ("operating_point_ratio", same_damping),
        ("operating_point_ratio_own_damping", own_driver),
    ):
        found[name] = ratio(name, _in_turn(peers), _in_turn(ours_all), rounds, notes)
    return found


def step_over_factorisation(work: Workload, notes: Notes) -> dict[str, float]:
    """Our full Newton step over CHOLMOD's numeric factorisation of that step's matrix alone."""
    ours = case(work.scale)
    gamma = work.current_angles[len(work.current_angles) // 2]
    energy = point_energy(ours, gamma)
    step = newton_step(energy, unknowns_before(ours, gamma))
    name = "step_over_factorisation"
    return {name: ratio(name, step, factorisation(energy, step.state), work.rounds, notes)}


def _peer_step(theirs: _PeerPoint) -> NewtonStep[FloatArray]:
    energy = theirs.energy()
    before = PeerEnergy(theirs.peer, BEFORE * theirs.load, theirs.solver, theirs.tuned)
    return newton_step(energy, theirs.solve(before))


def _fastest(steps: dict[str, NewtonStep[FloatArray]], notes: Notes) -> str:
    """The solver with the shortest step."""
    times = interleaved(list(steps.values()), rounds=7)
    for name, column in zip(steps, times.T, strict=True):
        notes.tell(f"peer's step with {name}", 1e3 * column, "ms")
    # By the best time: on a busy machine the median of a few chose the slower one.
    return list(steps)[int(np.min(times, axis=0).argmin())]


def _check_same(ours: Case, peer: Peer, gamma: float, fields: tuple[FloatArray, ...]) -> None:
    """Both libraries must have solved the same machine."""
    model = ours.model
    poles = 2 * model.sector.pole_pairs
    expected = point(ours, gamma).psi_abc / (poles * model.stack_length)
    for a in fields:
        off = np.abs(peer.linkage @ a - expected).max() / np.abs(expected).max()
        if off > SAME_FIELD:
            raise RuntimeError(f"the peer's linkages differ by {off:.1e}: not the same problem")


def _in_turn(works: list[Callable[[], object]]) -> Callable[[], None]:
    def all_of_them() -> None:
        for work in works:
            work()

    return all_of_them
