"""What each tolerance promises, against much finer solutions of the shipped machines."""

import math
from dataclasses import dataclass

import numpy as np
import pytest

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.estimate import linkage_torque
from lamwright.solver.estimate_stress import zone_peaks
from lamwright.solver.field import magnetic_model
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.refine import refined
from lamwright.solver.rotor_stress import lamination_circles, rotor_stress, stress_on
from lamwright.solver.tolerance import NAMES as TOLERANCES
from lamwright.solver.tolerance import tolerance_settings
from tests.shipped import NAMES, shipped, shipped_model

POSITIONS = 30  # over 60 electrical degrees
COMPARED = (0, 10, 20)
SPEED = 200.0  # rad/s; relative errors do not depend on it


@dataclass(frozen=True, slots=True, eq=False)
class Means:
    """Means over a waveform's positions."""

    torque: float  # N m, Maxwell's stress
    by_linkage: float  # N m
    psi: np.ndarray  # (2,), V s


def means(name: str, settings: MeshSettings, places: range | tuple[int, ...]) -> Means:
    """The shipped machine at rated current and 57 electrical degrees on one mesh."""
    one, usual = shipped(name), shipped_model(name)
    laws = usual.iron.rotor_law, usual.iron.stator_law
    sector = mesh_section(one.section, settings)
    model = magnetic_model(sector, one.section, one.winding, *laws, usual.settings)
    i_d, i_q = (one.rated * f(math.radians(57.0)) for f in (math.cos, math.sin))
    step = math.pi / 3.0 / POSITIONS / one.section.pole_pairs
    fields = solve_chain(model, [OperatingPoint(i_d, i_q, k * step) for k in places])
    psi = np.array([[s.psi_d, s.psi_q] for s in fields])
    by_linkage = linkage_torque(one.section.pole_pairs, i_d, i_q, psi[:, 0], psi[:, 1])
    torque = float(np.mean([s.torque for s in fields]))
    return Means(torque, float(by_linkage.mean()), psi.mean(axis=0))


def field_misses(name: str, tolerance: str, finest: float) -> tuple[float, float]:
    """Errors in percent of mean torque and of the worse linkage against a mesh scale.

    In the mean torque is that of the linkages: its error is the difference of the two at all
    positions, exact, and that of the linkages at `COMPARED`.
    """
    settings, _, _ = tolerance_settings(tolerance)
    whole = means(name, settings, range(POSITIONS))
    some, true = (means(name, s, COMPARED) for s in (settings, MeshSettings(scale=finest)))
    torque = whole.torque - whole.by_linkage + some.by_linkage - true.by_linkage
    linkage = np.abs(some.psi / true.psi - 1.0).max()
    return 100.0 * abs(torque / whole.torque), 100.0 * float(linkage)


def stress_miss(name: str, tolerance: str) -> float:
    """Error in percent of the greatest rib stress against 16 times the elements."""
    one, (_, settings, _) = shipped(name), tolerance_settings(tolerance)
    card, circles = one.machine.rotor_steel, lamination_circles(one.section)
    solution = rotor_stress(one.section, card, SPEED, settings)
    mesh = solution.mesh
    for _ in range(2):
        mesh = refined(mesh, np.arange(len(mesh.elements)), circles)
    true = zone_peaks(one.section, stress_on(one.section, mesh, card, SPEED, settings))
    return 100.0 * abs(zone_peaks(one.section, solution)[:-1].max() / true[:-1].max() - 1.0)


def test_finer_names_promise_less_error():
    """Promises fall from `coarse` to `fine`, and so do all sizes."""
    found = [tolerance_settings(name) for name in TOLERANCES]
    scales = [mesh.scale for mesh, _, _ in found]
    assert scales == sorted(scales, reverse=True)
    for key in ("torque", "linkage", "rib_stress"):
        values = [getattr(promises, key) for _, _, promises in found]
        assert values == sorted(values, reverse=True)
        assert len(set(values)) == len(values)
    # A promise that is kept by the loop's own estimate, which errs on the safe side.
    assert all(100.0 * stress.tolerance <= p.rib_stress for _, stress, p in found)


def test_an_unknown_name_is_refused():
    """One line that lists what is accepted."""
    with pytest.raises(LamwrightError, match="tolerance = rough: unknown; accepted coarse, normal"):
        tolerance_settings("rough")


def test_coarse_keeps_its_promises():
    """The quickest preset on one machine against `fine`, which errs by a tenth of the bound."""
    _, _, promises = tolerance_settings("coarse")
    torque, linkage = field_misses(NAMES[0], "coarse", 0.5)
    assert torque < promises.torque
    assert linkage < promises.linkage
    assert stress_miss(NAMES[0], "coarse") < promises.rib_stress


@pytest.mark.slow
@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("tolerance", TOLERANCES)
def test_promises_are_kept_on_shipped_machines(name: str, tolerance: str):
    """Against scale 0.25 (9 times the unknowns of `normal`) and 16 times the stress elements."""
    _, _, promises = tolerance_settings(tolerance)
    torque, linkage = field_misses(name, tolerance, 0.25)
    assert torque < promises.torque
    assert linkage < promises.linkage
    assert stress_miss(name, tolerance) < promises.rib_stress
