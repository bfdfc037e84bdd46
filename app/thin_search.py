"""The search of `ribs --thin`: widths of all ribs together, by Newton steps on their logarithms.

Each step solves the lamination on a mesh refined for it, takes the slopes of all margins from the
same mesh moved along with its outline (so that no remeshing shakes them), and asks the rule of
`postprocess.thin_ribs` for the next widths. A step is shortened until the outline passes every
check of shape. Cost: some six steps, each a refined solution and one plain one for each group.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.checks import shape_faults
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import Machine, placed
from lamwright.geometry.errors import DesignError, Finding
from lamwright.geometry.remedies import Fault, value_of
from lamwright.geometry.rib_groups import RibGroup, members, rib_groups, with_least
from lamwright.geometry.section import CrossSection, rotor_cell
from lamwright.postprocess.quantities import RPM
from lamwright.postprocess.thin_ribs import LONGEST_STEP, limited, misfits, next_step
from lamwright.solver.design_motion import draw_lamination, moved_mesh, part_motion
from lamwright.solver.rib_zones import distance_to, zone_of_node
from lamwright.solver.rotor_stress import StressSettings, rotor_stress, stress_on
from lamwright.solver.types import FloatArray, StressSolution

MM = 1e-3  # m
# Above the asked margin, so that what the next mesh changes leaves it held: a refined peak moves
# by some 0.3 % from mesh to mesh.
AIM = 1.004
CLOSE = 0.003  # in log margin, about the aim
CLOSE_ENOUGH = 0.0085  # the best of all steps is taken where it is as close: 1 % of the asked
MOST_STEPS = 16
SLOPE_STEP = 0.01  # of a logarithm of a width, for slopes; curvature then errs by some percent
SHARES = (1.0, 0.5, 0.25, 0.125)  # of a group's way that are tried where the whole is unsound
MOST_HELD_UP = 3  # such steps one after the other; then there is no room for what is lacking
LEAST_STEP = 0.02  # of a logarithm; a shorter one is no way on
SHORTEST = 0.02  # longest component of a step after fruitless ones


@dataclass(frozen=True, slots=True, eq=False)
class Stressed:
    """A design with its stress at overspeed; axis n groups."""

    design: MachineDesign
    section: CrossSection
    solution: StressSolution
    margin: FloatArray  # (n,), least of each group's ribs
    width: FloatArray  # (n,), m, least that each group's keys state
    rest_margin: float  # of the iron outside all ribs
    rest_at: complex  # m, place of its greatest stress


@dataclass(frozen=True, slots=True, eq=False)
class Thinned:
    """The design before and after; axis n groups."""

    groups: tuple[RibGroup, ...]
    before: Stressed
    after: Stressed
    floor: float  # m
    steps: int


def thinnest(
    machine: Machine,
    rib_factor: float,
    settings: StressSettings,
    on_step: Callable[[int, float], None] = lambda count, misfit: None,
) -> Thinned:
    """The thinnest ribs that hold the margin asked for at overspeed.

    Args:
        machine: whose rotor is stated by tables, without magnets.
        rib_factor: least rib width over the sheet's thickness.
        settings: of each stress solution.
        on_step: called after each solution with its number and the greatest misfit.

    Raises:
        DesignError: no widths hold; one line that names the rib and why.
    """
    return _Search(machine, rib_factor, settings, on_step).run()


class _Search:
    """One search; holds what does not change on the way."""

    def __init__(
        self,
        machine: Machine,
        rib_factor: float,
        settings: StressSettings,
        on_step: Callable[[int, float], None],
    ) -> None:
        design = machine.design
        self.machine, self.settings, self.on_step = machine, settings, on_step
        self.groups = rib_groups(design)
        self.floor = rib_factor * MM * design.rotor.sheet_thickness_mm
        self.asked = design.limits.least_yield_margin
        duty = design.duty
        self.speed = duty.overspeed_factor * duty.maximum_speed_rpm / RPM
        self.low = math.log(self.floor)
        self.held_up = 0  # steps one after the other that led to no sound outline as a whole

    def run(self) -> Thinned:
        before = self.stressed(self.machine.design)
        now = before
        if (before.width < self.floor).any():
            now = self.stressed(self.valid(before, np.maximum(before.width, self.floor)))
        least, best = math.inf, now
        longest = LONGEST_STEP
        for count in range(1, MOST_STEPS + 1):
            above, residual = np.log(now.width) - self.low, self.residual(now)
            misfit = float(misfits(above, residual).max())
            self.on_step(count, misfit)
            if misfit < least:
                least, best = misfit, now
            else:
                longest = max(0.5 * longest, SHORTEST)
            if misfit < CLOSE or count == MOST_STEPS:
                break
            step = limited(next_step(above, residual, self.slopes(now)), longest)
            now = self.stressed(self.valid(now, now.width * np.exp(step)))
        if least > CLOSE_ENOUGH:
            raise self.refused(best)
        if best.rest_margin < self.asked:
            raise self.refused_elsewhere(best)
        return Thinned(self.groups, before, best, self.floor, count)

    def residual(self, state: Stressed) -> FloatArray:
        """log(margin / aim) (n,)."""
        return np.asarray(np.log(state.margin / (AIM * self.asked)))

    def stressed(self, design: MachineDesign) -> Stressed:
        section = rotor_cell(cross_section(design))
        card = self.machine.rotor_steel
        solution = rotor_stress(section, card, self.speed, self.settings)
        strength = 1e6 * card.yield_strength_mpa.value
        zone = zone_of_node(section, solution.mesh)
        peaks = _zone_peaks(zone, solution, len(section.ribs) + 1)
        rest = np.where(zone == len(section.ribs), solution.von_mises, 0.0)
        return Stressed(
            design=design,
            section=section,
            solution=solution,
            margin=strength / self.group_peaks(section, peaks),
            width=np.array([MM * group.least_mm(design) for group in self.groups]),
            rest_margin=strength / float(rest.max()),
            rest_at=complex(*solution.mesh.nodes[int(rest.argmax())]),
        )

    def group_peaks(self, section: CrossSection, peaks: FloatArray) -> FloatArray:
        """Greatest stress (n,) in Pa of each group's ribs from that of each zone."""
        design = self.machine.design
        own = [members(design, group, section.ribs) for group in self.groups]
        return np.array([peaks[list(ribs)].max() for ribs in own])

    def slopes(self, state: Stressed) -> FloatArray:
        """Slopes d log margin / d log width (n, n), row by margin, column by width."""
        mesh, card = state.solution.mesh, self.machine.rotor_steel
        motion = part_motion(mesh, state.design, draw_lamination)

        def peaks_at(nodes_by: FloatArray, amount: float) -> FloatArray:
            moved = moved_mesh(mesh, nodes_by, amount)
            solution = stress_on(state.section, moved, card, self.speed, self.settings)
            zone = zone_of_node(state.section, mesh)  # a node stays with its rib
            peaks = _zone_peaks(zone, solution, len(state.section.ribs) + 1)
            return self.group_peaks(state.section, peaks)

        slope = np.empty((len(self.groups), len(self.groups)))
        for k, group in enumerate(self.groups):
            try:
                on = sum(
                    motion.velocity(state.design, key) * value_of(state.design, key)
                    for key in group.keys
                )
            except ValueError:  # the outline changes in kind just here
                slope[:, k] = np.eye(len(self.groups))[k]
                continue
            by = motion.extension.extended(np.asarray(on))
            up, down = peaks_at(by, SLOPE_STEP), peaks_at(by, -SLOPE_STEP)
            slope[:, k] = -np.log(up / down) / (2.0 * SLOPE_STEP)
        return slope

    def valid(self, now: Stressed, width: FloatArray) -> MachineDesign:
        """The design of these widths (n,), or of those on the way to them that can be punched.

        Where the way as a whole leads to no sound outline, each group goes as far as it can by
        itself, those that widen first.

        Raises:
            DesignError: where there is no way on.
        """
        way = np.log(np.maximum(width, self.floor) / now.width)
        whole = self.design_of(now.width * np.exp(way))
        faults = shape_faults(whole)
        if not faults:
            self.held_up = 0
            return whole
        self.held_up += 1
        gone = np.zeros(len(way))
        for k in np.argsort(-way):
            for share in SHARES:
                then = gone.copy()
                then[k] = share * way[k]
                if not shape_faults(self.design_of(now.width * np.exp(then))):
                    gone = then
                    break
        if self.held_up > MOST_HELD_UP or float(np.abs(gone).max()) < LEAST_STEP:
            raise self.refused(now, faults[0])
        return self.design_of(now.width * np.exp(gone))

    def design_of(self, width: FloatArray) -> MachineDesign:
        """The design with these widths (n,) in m."""
        design = self.machine.design
        for group, value in zip(self.groups, width, strict=True):
            design = with_least(design, group, value / MM)
        return design

    def refused(self, state: Stressed, fault: Fault | None = None) -> DesignError:
        """Why no widths hold: the rib that lacks most, and what stands against a wider one."""
        k = int(np.argmin(self.residual(state)))
        group, margin = self.groups[k], float(state.margin[k])
        why = "a wider one bears no more"
        if fault is not None:
            why = f"a wider one leaves no room ({fault.keys[0]}: {fault.text})"
        if margin > self.asked:
            why = "the widths of all ribs together do not settle"
        return self._placed(
            group.keys[0],
            state.width[k] / MM,
            f"no widths hold the yield margin {self.asked:g} at {RPM * self.speed:.0f} rpm: "
            f"here the {group.label} rib has {margin:.3f}, and {why}",
            margin,
        )

    def refused_elsewhere(self, state: Stressed) -> DesignError:
        """The iron just beyond the ribs' zones has less margin than the ribs."""
        x, y = state.rest_at.real / MM, state.rest_at.imag / MM
        design, ribs = self.machine.design, state.section.ribs
        away = np.array([distance_to(rib, np.array([state.rest_at]))[0] for rib in ribs])
        near = [away[list(members(design, group, ribs))].min() for group in self.groups]
        k = int(np.argmin(near))
        return self._placed(
            self.groups[k].keys[0],
            state.width[k] / MM,
            f"ribs that just hold the yield margin {self.asked:g} at {RPM * self.speed:.0f} rpm "
            f"leave {state.rest_margin:.3f} outside them, at ({x:.2f}, {y:.2f}) mm, nearest to "
            f"the {self.groups[k].label} rib",
            state.rest_margin,
        )

    def _placed(self, key: str, value: float, fault: str, margin: float) -> DesignError:
        # All stress of a free bore grows with the square of the speed.
        most = self.machine.design.duty.maximum_speed_rpm * math.sqrt(margin / self.asked)
        remedy = f"these ribs hold it up to duty.maximum_speed_rpm = {math.floor(most)}"
        return placed((Finding("no_rib_holds", key, value, fault, remedy),), self.machine.path)


def _zone_peaks(zone: np.ndarray, solution: StressSolution, count: int) -> FloatArray:
    """Greatest von Mises stress (count,) in Pa of each zone."""
    peaks = np.zeros(count)
    np.maximum.at(peaks, zone, solution.von_mises)
    return peaks
