"""Slopes of linkages by the adjoint against differences of fields solved anew.

The frozen mesh: nodes moved along a key's motion, everything else built and solved again. The
remeshed machine: another design file, another mesh; its noise is that of the discretisation.
"""

import dataclasses
import math

import numpy as np
import pytest
from shipped import Shipped, shipped, shipped_model

from lamwright.postprocess.skew import mean_solution, step_point
from lamwright.solver.adjoint_field import linkage_slopes, on_outline, turned_forth
from lamwright.solver.chains import OperatingPoint
from lamwright.solver.design_motion import (
    PartMotion,
    draw_rotor,
    draw_stator,
    magnet_turns,
    moved_mesh,
    part_motion,
    shape_keys,
    size_motion,
)
from lamwright.solver.field import magnetic_model, solve_point
from lamwright.solver.types import FieldSolution

COARSE, TIGHT = 1.6, 1e-10  # exact on any mesh; the solution's tolerance bounds the slopes'
TWO = ("demo_24s4p_arc", "demo_36s4p_straight")  # one and two layers, arcs and straight, all ribs


class Frozen:
    """A loaded machine whose mesh can be moved along a key."""

    def __init__(self, name: str, position: float, offset: float = 0.0) -> None:
        """Solve the shipped design `name` at rated current, 58 el. degrees, and differentiate.

        Of a skewed rotor it is the step that is `offset` rad ahead.
        """
        self.one: Shipped = shipped(name, COARSE)
        self.model = shipped_model(name, COARSE, TIGHT)
        self.design = self.one.machine.design
        gamma = math.radians(58.0)
        rotor = self.one.rated * math.cos(gamma), self.one.rated * math.sin(gamma), position
        self.point = OperatingPoint(*rotor)
        step = step_point(self.point, offset, self.design.pole_pairs)
        self.position, self.currents = step.position, (step.i_d, step.i_q)
        self.solution = solve_point(self.model, *self.currents, self.position)
        self.rotor = part_motion(self.one.sector.rotor, self.design, draw_rotor)
        self.stator = part_motion(self.one.sector.stator, self.design, draw_stator)
        slopes = linkage_slopes(self.model, self.one.section, self.one.winding, self.solution)
        self.slopes = [on_outline(s, self.rotor, self.stator) for s in slopes]

    def by_adjoint(self, key: str) -> np.ndarray:
        """Slopes of psi_d and psi_q per unit of the key."""
        rotor, stator = (p.velocity(self.design, key) for p in (self.rotor, self.stator))
        sizes = size_motion(self.design, key)
        turns = magnet_turns(self.design, key)
        return np.array([slope.by_key(rotor, stator, sizes, turns) for slope in self.slopes])

    def by_difference(self, key: str, step: float) -> np.ndarray:
        """The same from fields on the mesh moved both ways."""
        high, low = (self.moved(key, amount) for amount in (step, -step))
        return np.array([high.psi_d - low.psi_d, high.psi_q - low.psi_q]) / (2.0 * step)

    def extrapolated(self, key: str, step: float) -> np.ndarray:
        """The same without the error of second order in the step."""
        return (4.0 * self.by_difference(key, step) - self.by_difference(key, 2.0 * step)) / 3.0

    def moved(self, key: str, amount: float) -> FieldSolution:
        """The field on the mesh moved by an amount of the key."""

        def moved(part: PartMotion, mesh):
            motion = part.extension.extended(part.velocity(self.design, key))
            return moved_mesh(mesh, motion, amount)

        sizes, before = size_motion(self.design, key), self.one.section
        section = dataclasses.replace(
            before,
            rotor_radius=before.rotor_radius + amount * sizes.rim_radius,
            stator_bore_radius=before.stator_bore_radius + amount * sizes.bore_radius,
            stack_length=before.stack_length + amount * sizes.stack_length,
        )
        sector = dataclasses.replace(
            self.one.sector,
            rotor=moved(self.rotor, self.one.sector.rotor),
            stator=moved(self.stator, self.one.sector.stator),
            circle_radius=section.circle_radius,
        )
        laws = self.model.iron.rotor_law, self.model.iron.stator_law
        model = magnetic_model(sector, section, self.one.winding, *laws, self.model.settings)
        return solve_point(model, *self.currents, self.position, self.solution)

    def turned(self, turns: dict[str, complex]) -> FieldSolution:
        """The field with the magnets' directions changed by so much."""
        section = dataclasses.replace(
            self.one.section,
            rotor=tuple(
                dataclasses.replace(
                    region, magnetisation=region.magnetisation + turns.get(region.name, 0.0)
                )
                for region in self.one.section.rotor
            ),
        )
        laws = self.model.iron.rotor_law, self.model.iron.stator_law
        model = magnetic_model(
            self.one.sector, section, self.one.winding, *laws, self.model.settings
        )
        return solve_point(model, *self.currents, self.position, self.solution)


@pytest.mark.slow
@pytest.mark.parametrize("name", TWO)
@pytest.mark.parametrize("position_deg", [0.0, 3.1])
def test_slopes_are_those_of_the_frozen_mesh(name, position_deg):
    """Every key, rotor on the circle's vertices and between them (sheared gap): 1e-5.

    Central differences over two steps, extrapolated to the fourth order. Small ones err by
    rounding and by the kinks of the steel's table, large ones by the curvature (psi_q's slope by
    the gap is a ten-thousandth of psi_d's, and bent: 4e-5 off at 0.5 and 1 um), so a key that
    fails with 0.2 and 0.4 um (or 0.0004 degree) may pass with four times as much. Where a figure
    hardly depends on a key the error is measured by a thousandth of the largest slope.
    """
    frozen = Frozen(name, math.radians(position_deg))
    keys = shape_keys(frozen.design)
    exact = np.array([frozen.by_adjoint(key) for key in keys])
    scale = np.maximum(np.abs(exact), 1e-3 * np.abs(exact).max(axis=0))
    for key, slopes, unit in zip(keys, exact, scale, strict=True):
        error = np.abs(frozen.extrapolated(key, 2e-4) - slopes) / unit
        if error.max() > 1e-5:
            error = np.minimum(error, np.abs(frozen.extrapolated(key, 8e-4) - slopes) / unit)
        assert error.max() < 1e-5, key


def test_slopes_of_three_keys_are_those_of_the_frozen_mesh():
    """The same for the gap, a rib and a tooth, quick enough for every run."""
    frozen = Frozen("demo_24s4p_arc", math.radians(3.1))
    for key in (
        "stator.bore_diameter_mm",
        "rotor.barrier[2].tangential_rib_mm",
        "stator.tooth_width_mm",
    ):
        assert frozen.by_adjoint(key) == pytest.approx(frozen.by_difference(key, 5e-4), rel=1e-5)


@pytest.mark.slow
def test_slopes_of_magnets_are_those_of_the_frozen_mesh():
    """Remanence's load moves with its magnet, and turns with its direction: 1e-5, as without.

    No key of this design turns a magnet, so all of them are turned by hand.
    """
    frozen = Frozen("demo_36s4p_magnet", math.radians(3.1))
    for key in ("stator.bore_diameter_mm", "rotor.barrier[2].depth_mm"):
        assert frozen.by_adjoint(key) == pytest.approx(frozen.extrapolated(key, 5e-4), rel=1e-5)
    names = list(frozen.slopes[0].directions)
    turns = {
        region.name: 1j * region.magnetisation
        for region in frozen.one.section.rotor
        if region.name in names
    }
    exact = [
        sum((slope.directions[name] * turns[name].conjugate()).real for name in names)
        for slope in frozen.slopes
    ]
    high, low = (frozen.turned({name: s * t for name, t in turns.items()}) for s in (1e-3, -1e-3))
    measured = np.array([high.psi_d - low.psi_d, high.psi_q - low.psi_q]) / 2e-3
    assert exact == pytest.approx(measured, rel=1e-5)


def test_slopes_of_a_skewed_rotor_are_those_of_its_steps_mean():
    """Two steps 8 degrees apart on the frozen mesh; the differences average fields, not slopes."""
    offsets, name = (math.radians(-4.0), math.radians(4.0)), "demo_24s4p_arc"
    steps = [Frozen(name, math.radians(1.3), offset) for offset in offsets]
    pole_pairs, key, change = steps[0].design.pole_pairs, "rotor.barrier[2].tangential_rib_mm", 5e-4
    pairs = []
    for frozen, offset in zip(steps, offsets, strict=True):
        slopes = linkage_slopes(
            frozen.model, frozen.one.section, frozen.one.winding, frozen.solution
        )
        turned = turned_forth(slopes, pole_pairs * offset)
        pairs.append([on_outline(slope, frozen.rotor, frozen.stator) for slope in turned])
    motion = [part.velocity(steps[0].design, key) for part in (steps[0].rotor, steps[0].stator)]
    sizes = size_motion(steps[0].design, key)
    exact = np.mean([[slope.by_key(*motion, sizes) for slope in pair] for pair in pairs], axis=0)

    def whole(amount: float) -> np.ndarray:
        fields = [frozen.moved(key, amount) for frozen in steps]
        mean = mean_solution(fields, offsets, steps[0].point, pole_pairs)
        return np.array([mean.psi_d, mean.psi_q])

    assert exact == pytest.approx((whole(change) - whole(-change)) / (2.0 * change), rel=1e-5)


def test_a_longer_stack_links_more_in_proportion():
    """Closed form d psi / d length = psi / length; thicker sheets change nothing."""
    frozen = Frozen("demo_24s4p_arc", 0.0)
    length = frozen.design.stator.stack_length_mm
    psi = np.array([frozen.solution.psi_d, frozen.solution.psi_q])
    assert frozen.by_adjoint("stator.stack_length_mm") == pytest.approx(psi / length, rel=1e-9)
    assert not np.any(frozen.by_adjoint("rotor.sheet_thickness_mm"))
