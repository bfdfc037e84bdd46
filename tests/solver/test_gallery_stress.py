"""Peak rib stress of every gallery rotor against 16 times the elements (issue on ribs, point 2)."""

from pathlib import Path

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.section import rotor_cell
from lamwright.solver.estimate_stress import finer_stress, peak_errors, zone_peaks
from lamwright.solver.refine import refined
from lamwright.solver.rotor_stress import (
    StressSettings,
    lamination_circles,
    rotor_stress,
    stress_on,
)

DESIGNS = Path(__file__).parents[2] / "designs"
ROTORS = [*sorted(DESIGNS.glob("*.toml")), *sorted((DESIGNS / "gallery").glob("*.toml"))]
QUICK = "fan_12s4p"  # the rotor that stands for all in the quick suite
SPEED = 300.0  # rad/s; errors are relative and stress is linear in speed squared
PROMISED = 0.02


@pytest.mark.parametrize(
    "path",
    [
        pytest.param(path, id=path.stem, marks=() if path.stem == QUICK else pytest.mark.slow)
        for path in ROTORS
    ],
)
def test_greatest_rib_stress_within_two_percent(path: Path):
    """Usual settings; the truth is every triangle quartered twice on the true arcs.

    Of each rib the error is within what is promised too, in units of the greatest of them: one
    that carries little errs by a large share of little. Error bars of the greatest hold within a
    factor of five.
    """
    machine = read_machine(path)
    section, card = cross_section(machine.design), machine.rotor_steel
    settings = StressSettings()
    solution = rotor_stress(section, card, SPEED, settings)
    claimed = peak_errors(section, solution, finer_stress(section, card, solution, settings))
    mesh, circles = solution.mesh, lamination_circles(section)
    for _ in range(2):
        mesh = refined(mesh, np.arange(len(mesh.elements)), circles)
    assert len(mesh.elements) == 16 * len(solution.mesh.elements)
    truth = zone_peaks(section, stress_on(section, mesh, card, SPEED, settings))
    found, n_rib = zone_peaks(section, solution), len(rotor_cell(section).ribs)
    error = (found / truth - 1.0)[:n_rib]
    most = int(np.argmax(truth[:n_rib]))
    told = f"greatest {100 * error[most]:.3f} %, claimed {100 * claimed[most]:.3f} %"
    assert abs(error[most]) < PROMISED, told
    assert abs(found[:n_rib].max() / truth[:n_rib].max() - 1.0) < PROMISED, told
    assert np.all(np.abs(found - truth)[:n_rib] < PROMISED * truth[most]), told
    assert abs(error[most]) < 5.0 * claimed[most], told
    print(path.stem, len(mesh.elements), told, f"any rib {100 * np.abs(error).max():.3f} %")
