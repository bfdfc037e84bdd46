"""Errors of ribs and growth as they are stated, against what finer meshes say.

Those of the field have a test of their own (`tests/solver/test_estimate.py`), so have peaks.
"""

from pathlib import Path

import numpy as np
import pytest

from lamwright.app.desk import Desk
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import Machine, read_steel_card
from lamwright.postprocess.rib_figures import rotor_errors
from lamwright.postprocess.rib_tables import elastic_errors
from lamwright.postprocess.ribs import rib_report
from lamwright.solver.refine import refined
from lamwright.solver.rotor_stress import (
    lamination_circles,
    stress_on,
)
from lamwright.solver.tolerance import tolerance_settings
from lamwright.solver.types import PlanarMesh
from tests.random_designs import random_design

DESIGNS = Path(__file__).parents[2] / "designs"
N_DESIGNS = 10
SPEED = 200.0  # rad/s; stress goes with its square, relative errors do not
STRENGTH = 380e6  # Pa
# Of a figure: what is off by less is exact by chance, or by the roundness of nodes.
VISIBLE = 2e-5


def machine(number: int) -> Machine:
    """A random machine of the demo's sheet."""
    design = random_design(np.random.default_rng(7000 + number))
    card = read_steel_card(DESIGNS / design.steel.rotor_card)
    return Machine(design, card, card, DESIGNS / "random.toml")


def share_within(ratios: list[float]) -> float:
    """Of stated over true errors, those between a third and five."""
    return float(np.mean([1.0 / 3.0 < ratio < 5.0 for ratio in ratios]))


@pytest.mark.slow
def test_errors_of_ribs_and_growth_are_true():
    """Ten rotors at `coarse` against 16 times the elements: nine in ten within a third and five.

    Mean tension, bending and shear of the rib with the greatest stress, growth; about 40 s.
    """
    settings = tolerance_settings("coarse")[1]
    ratios: list[float] = []
    for number in range(N_DESIGNS):
        own = machine(number)
        section = cross_section(own.design)
        work = Desk().stress(section, own.rotor_steel, SPEED, settings)
        mesh = _sixteenfold(section, work.solution.mesh)
        true = rib_report(
            stress_on(section, mesh, own.rotor_steel, SPEED, settings), section, STRENGTH
        )
        k = int(np.argmax([rib.peak for rib in work.report.ribs]))
        stated = elastic_errors(section, work.report, work.finer, work.zone_errors)[k]
        rib, fine = work.report.ribs[k], true.ribs[k]
        for key, name in (
            ("tension_mean_mpa", "mean_tension"),
            ("bending_mpa", "bending"),
            ("shear_mean_mpa", "mean_shear"),
        ):
            off = abs(getattr(fine, name) - getattr(rib, name))
            if off > VISIBLE * rib.peak:
                ratios.append(1e6 * stated[key] / off)
        for name, error in rotor_errors(work.report, work.finer).items():
            off = abs(getattr(true, name) - getattr(work.report, name))
            if off > VISIBLE * work.report.growth_max:
                ratios.append(error / off)
    assert len(ratios) > 2 * N_DESIGNS
    assert share_within(ratios) >= 0.9, sorted(ratios)


def _sixteenfold(section, mesh: PlanarMesh) -> PlanarMesh:
    for _ in range(2):
        mesh = refined(mesh, np.arange(len(mesh.elements)), lamination_circles(section))
    return mesh
