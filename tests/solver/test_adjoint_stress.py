"""Slopes of the ribs' smoothed peak by the adjoint against stresses solved anew."""

import dataclasses
import math

import numpy as np
import pytest
from shipped import shipped

from lamwright.geometry.remedies import value_of
from lamwright.solver.adjoint_stress import peak_slope, smoothed_peak, spinning_pole
from lamwright.solver.design_motion import draw_lamination, moved_mesh, part_motion, shape_keys
from lamwright.solver.elastic import centrifugal_force
from lamwright.solver.estimate_stress import finer_stress
from lamwright.solver.mesh import mesh_lamination
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.rotor_stress import elastic_material, rotor_stress

COARSE = 1.6
TWO = ("demo_24s4p_arc", "demo_36s4p_straight")  # tangential ribs alone, and all kinds of ribs
SPEED = 600.0  # rad/s


class Spinning:
    """A lamination at speed whose mesh can be moved along a key."""

    def __init__(self, name: str) -> None:
        """Solve the shipped design `name` on a coarse mesh and differentiate."""
        self.one = shipped(name, COARSE)
        self.design = self.one.machine.design
        self.material = elastic_material(self.one.machine.rotor_steel)
        self.mesh = mesh_lamination(self.one.section, MeshSettings(scale=2.0))
        self.pole = spinning_pole(self.one.section, self.mesh, self.material, SPEED)
        self.moved = self.pole.held.displacement(centrifugal_force(self.pole.body, SPEED))
        self.found = peak_slope(self.pole, self.moved)
        self.part = part_motion(self.mesh, self.design, draw_lamination)
        self.slope = self.part.extension.gathered(self.found.slope)

    def by_adjoint(self, key: str) -> float:
        """Slope in Pa per unit of the key."""
        return float(np.sum(self.slope * self.part.velocity(self.design, key)))

    def by_difference(self, key: str, step: float) -> float:
        """The same from stresses on the mesh moved both ways, fourth order in the step."""
        near, far = ((self._at(key, s) - self._at(key, -s)) / (2.0 * s) for s in (step, 2.0 * step))
        return (4.0 * near - far) / 3.0

    def _at(self, key: str, amount: float) -> float:
        motion = self.part.extension.extended(self.part.velocity(self.design, key))
        mesh = moved_mesh(self.mesh, motion, amount)
        pole = spinning_pole(self.one.section, mesh, self.material, SPEED)
        # The zones are those of the unmoved ribs, the lengths those of the unmoved mesh.
        pole = dataclasses.replace(pole, counts=self.pole.counts, share=self.pole.share)
        moved = pole.held.displacement(centrifugal_force(pole.body, SPEED))
        return smoothed_peak(pole, moved)[0]


@pytest.mark.parametrize("name", [TWO[0], pytest.param(TWO[1], marks=pytest.mark.slow)])
def test_slopes_are_those_of_the_frozen_mesh(name):
    """Every key of the rotor, steps of 0.5 and 1 um or 0.001 degree: 1e-5.

    Where the peak hardly depends on a key the error is measured by a thousandth of the largest
    slope. The linear system is solved to rounding, 1e-10 of the stress: 1e-7 of a slope.
    """
    spinning = Spinning(name)
    keys = [key for key in shape_keys(spinning.design) if not key.startswith("stator.s")]
    exact = np.array([spinning.by_adjoint(key) for key in keys])
    measured = np.array([spinning.by_difference(key, 5e-4) for key in keys])
    scale = np.maximum(np.abs(exact), 1e-3 * np.abs(exact).max())
    assert np.abs((exact - measured) / scale).max() < 1e-5


def test_slopes_of_a_whole_design_scale_with_its_size():
    """Euler: all lengths grow by one factor, stress grows by its square (sigma ~ rho v^2).

    A law that no difference enters: sum over lengths of key * d sigma / d key = 2 sigma, sides
    and angles staying as they are. Elements inside do not all grow alike, so the law holds
    to the error of this coarse mesh: measured 6e-4.
    """
    spinning = Spinning(TWO[0])
    lengths = [key for key in shape_keys(spinning.design) if key.endswith("_mm")]
    grown = sum(value_of(spinning.design, key) * spinning.by_adjoint(key) for key in lengths)
    assert grown == pytest.approx(2.0 * spinning.found.smoothed, rel=2e-3)


def test_the_bias_is_what_is_said():
    """A mean of order p lies below the largest, at most by what the largest alone would leave.

    (sum l vm^p)^(1/p) >= l_k^(1/p) vm_k for the node k of the peak, shares l adding up to 1.
    """
    one = shipped(TWO[1], COARSE)
    card = one.machine.rotor_steel
    solution = rotor_stress(one.section, card, SPEED)
    pole = spinning_pole(one.section, solution.mesh, elastic_material(card), SPEED)
    smoothed, peak = smoothed_peak(pole, solution.displacement)
    assert peak == pytest.approx(solution.peak, rel=1e-12)  # same recovery, peak in a rib
    assert pole.share.sum() == pytest.approx(1.0, rel=1e-12)
    assert math.log(pole.share.min()) / 200.0 < smoothed / peak - 1.0 < 0.0


def test_the_smoothed_peak_is_that_of_the_edge_not_of_its_nodes():
    """Every triangle cut into four: the peak's bias stays, where that of a sum over nodes grows.

    Twice the nodes would raise it by log(2) / 200 = 3.5e-3; measured 1e-4, of the field's error.
    """
    one = shipped(TWO[0], COARSE)
    card = one.machine.rotor_steel
    coarse = rotor_stress(one.section, card, SPEED)
    biases = []
    for solution in (coarse, finer_stress(one.section, card, coarse)):
        pole = spinning_pole(one.section, solution.mesh, elastic_material(card), SPEED)
        smoothed, peak = smoothed_peak(pole, solution.displacement)
        biases.append(smoothed / peak - 1.0)
    assert biases[0] == pytest.approx(biases[1], abs=5e-4)
