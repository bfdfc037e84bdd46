"""Error bars of the field: their arithmetic, and their truth against finer meshes."""

import functools
import math
from dataclasses import dataclass, replace

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import read_steel_card
from lamwright.geometry.section import CrossSection
from lamwright.geometry.winding import winding_table
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.estimate import (
    BEYOND,
    KNOWN_TO,
    NEWTON_FLOOR,
    LinkageErrors,
    angle_error,
    errors_of,
    field_errors,
    linkage_torque,
    sample_places,
)
from lamwright.solver.estimate_step import Change
from lamwright.solver.field import FieldSettings, MagneticModel, magnetic_model
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.steel import reluctivity_law
from lamwright.solver.tolerance import tolerance_settings
from lamwright.solver.types import FieldSolution
from tests.finer_field import Sixteenfold
from tests.random_designs import random_design
from tests.shipped import DESIGNS, NAMES, shipped

N_DESIGNS = 30
POSITIONS = 15  # over 60 electrical degrees
COMPARED = (0, 5, 10)  # solved on the finer mesh too
KEYS = ("torque", "torque_linkage", "psi_d", "psi_q")
VISIBLE = {"saliency": 1e-4, "ripple": 1e-3}  # relative; of the mean torque


@functools.cache
def invented() -> FieldSolution:
    """Any solution, to be changed."""
    none = np.zeros(0)
    numbers = {"psi_abc": none, "psi_d": 0.5, "psi_q": 0.1, "torque": 5.0}
    own = {"i_d": 6.0, "i_q": 8.0, "position": 0.0, "energy": 1.0, "coenergy": 1.0}
    return FieldSolution(a_rotor=none, a_stator=none, newton=None, **own, **numbers)  # type: ignore


def waveform_of(torques: list[float]) -> list[FieldSolution]:
    """Solutions with these torques and equal linkages."""
    return [replace(invented(), torque=torque) for torque in torques]


def test_mean_torque_is_off_by_the_two_formulas_difference():
    """Linkages without error are the truth in the mean: the claim is the difference, exactly."""
    by_linkage = float(linkage_torque(2, 6.0, 8.0, np.array([0.5]), np.array([0.1]))[0])
    solutions = waveform_of([by_linkage + 0.3, by_linkage + 0.1])
    still = dict.fromkeys(sample_places(solutions), Change(0.0, 0.0, 0.0, 1))
    errors = errors_of(solutions, still, 2)
    # More only by the floor of Newton's iteration, 2e-6 of the torque.
    assert errors.torque == pytest.approx(0.2, abs=1e-4)
    assert errors.psi_d < 1e-5 * 0.5


def test_doubt_grows_with_scatter():
    """Changes of equal mean claim more where they differ from position to position."""
    solutions = waveform_of([1.0, 2.0, 3.0, 2.0, 1.5, 1.2])
    places = sample_places(solutions)
    even = {k: Change(0.0, 1e-4, 0.0, 1) for k in places}
    wavering = {k: Change(0.0, 1e-4 * (1 + (-1) ** n), 0.0, 1) for n, k in enumerate(places)}
    calm, wild = errors_of(solutions, even, 2), errors_of(solutions, wavering, 2)
    assert calm.psi_d == pytest.approx(1.1 * BEYOND * 1e-4, rel=0.02)
    assert wild.psi_d > 1.3 * calm.psi_d


def test_samples_hold_the_crests():
    """Ripple is the difference of the highest and the lowest torque, so both are sampled."""
    torques = [1.0, 1.2, 1.1, 1.4, 1.0, 0.9, 0.8, 1.0, 1.1]
    assert sample_places(waveform_of(torques)) == (0, 3, 6)
    assert sample_places(waveform_of([1.0])) == (0,)


def test_a_figure_of_both_linkages_sees_what_cancels():
    """A ratio keeps its value when both parts rise by one share; a sum does not."""
    even = LinkageErrors(change_d=np.array([5e-3]), change_q=np.array([1e-3]))
    floor = 2.0 * NEWTON_FLOOR * 5.0  # of the ratio, by either linkage
    assert even.of(lambda d, q: d / q, 0.5, 0.1) == pytest.approx(floor, rel=1e-5)
    share = BEYOND * (1.0 + KNOWN_TO)
    floor = NEWTON_FLOOR * 0.6
    assert even.of(lambda d, q: d + q, 0.5, 0.1) == pytest.approx(share * 6e-3 + floor)


def test_scatter_that_cancels_is_no_doubt():
    """Samples whose linkages waver by one share leave the ratio certain, not the sum."""
    waver = np.array([-2e-2, 0.0, 2e-2])
    alike = LinkageErrors(change_d=0.5 * waver, change_q=0.1 * waver)
    assert alike.of(lambda d, q: d / q, 0.5, 0.1) < 1e-4 * 5.0
    scatter = 2.0 * 0.6 * 2e-2 / math.sqrt(3.0)
    assert alike.of(lambda d, q: d + q, 0.5, 0.1) > scatter


@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_ripple_is_certain_where_all_torques_are_off_by_one_share(sign: float):
    """(max - min) / mean does not change then: what is left is the doubt about the changes."""
    mean = float(linkage_torque(2, 6.0, 8.0, np.array([0.5]), np.array([0.1]))[0])
    linkages = {"psi_d": sign * 0.5, "psi_q": sign * 0.1}
    torques = (sign * mean * np.array([0.8, 1.0, 1.2, 1.0])).tolist()
    solutions = [replace(one, **linkages) for one in waveform_of(torques)]
    share = {key: 0.01 * value for key, value in linkages.items()}
    places = sample_places(solutions)
    changed = {k: Change(torque=0.01 * torques[k], steps=1, **share) for k in places}
    crests = BEYOND * KNOWN_TO * 0.01 * (1.2 + 0.8)
    doubt = 0.4 * BEYOND * KNOWN_TO * 0.01
    found = errors_of(solutions, changed, 2).ripple
    assert found == pytest.approx(crests + doubt, abs=0.4 * NEWTON_FLOOR * 1.01)


def test_best_angle_errs_by_half_the_relative_torque_error():
    """T (1 - 2 x^2) + e T 2 x is greatest at x = e / 2 (derived)."""
    x = np.linspace(-0.1, 0.1, 200001)
    moved = x[np.argmax(1.0 - 2.0 * x**2 + 0.01 * 2.0 * x)]
    assert angle_error(0.01, 0.002) == pytest.approx(0.002 + moved, abs=1e-6)


@dataclass(frozen=True, slots=True, eq=False)
class Case:
    """A machine at one current, to be solved on any mesh."""

    design: MachineDesign
    section: CrossSection
    gamma: float  # rad

    def model(self, scale: float, tolerance: float) -> MagneticModel:
        """The model at a mesh scale."""
        rotor = self.design.rotor
        card = read_steel_card(DESIGNS[0].parent / self.design.steel.rotor_card)
        law = reluctivity_law(card, rotor.stacking_factor)
        settings = FieldSettings(
            shaft_relative_permeability=rotor.shaft_relative_permeability,
            newton=NewtonSettings(tolerance=tolerance),
        )
        sector = mesh_section(self.section, MeshSettings(scale=scale))
        winding = winding_table(self.design)
        return magnetic_model(sector, self.section, winding, law, law, settings)

    def points(self, places: range | tuple[int, ...]) -> list[OperatingPoint]:
        """Operating points at places of a waveform of `POSITIONS`."""
        current, step = self.design.duty.rated_current_a, math.pi / 3.0 / POSITIONS
        i_d, i_q = current * math.cos(self.gamma), current * math.sin(self.gamma)
        return [OperatingPoint(i_d, i_q, k * step / self.design.pole_pairs) for k in places]


@dataclass(frozen=True, slots=True)
class Bar:
    """An error as it is stated and as it is."""

    stated: float
    true: float

    @property
    def ratio(self) -> float:
        """Stated over true."""
        return self.stated / abs(self.true)


def error_bars(case: Case, scale: float) -> dict[str, Bar]:
    """Errors of all figures, the truth being a mesh of 16 times the elements.

    In the mean torque is that of the linkages, so its true error is its difference to the coarse
    linkages' mean at all positions, which is exact, and their own error at `COMPARED`. Ripple is
    compared at the coarse waveform's crests.
    """
    model, winding = case.model(scale, 1e-4), winding_table(case.design)
    coarse = solve_chain(model, case.points(range(POSITIONS)))
    errors = field_errors(model, case.section, winding, coarse)
    torque = np.array([s.torque for s in coarse])
    high, low = int(torque.argmax()), int(torque.argmin())
    finer = Sixteenfold(model, case.section, winding)
    fine = {k: finer.solved(coarse[k]) for k in sorted({*COMPARED, high, low})}

    def missed(key: str) -> float:
        return float(np.mean([getattr(fine[k], key) - getattr(coarse[k], key) for k in COMPARED]))

    def torque_of(psi_d: np.ndarray, psi_q: np.ndarray) -> float:
        i_d, i_q = coarse[0].i_d, coarse[0].i_q
        return float(linkage_torque(case.design.pole_pairs, i_d, i_q, psi_d, psi_q).mean())

    psi = [np.array([getattr(s, key) for s in coarse]) for key in ("psi_d", "psi_q")]
    off = [missed("psi_d"), missed("psi_q")]
    of_linkages = torque_of(*(np.array([change]) for change in off))
    true_torque = torque_of(*psi) + of_linkages
    ripple = float(np.ptp(torque) / torque.mean())
    middle = [float(values.mean()) for values in psi]
    ratio = middle[0] / middle[1]
    return {
        "torque": Bar(errors.torque, true_torque - float(torque.mean())),
        "torque_linkage": Bar(errors.torque_linkage, of_linkages),
        "psi_d": Bar(errors.psi_d, off[0]),
        "psi_q": Bar(errors.psi_q, off[1]),
        "ripple": Bar(errors.ripple, (fine[high].torque - fine[low].torque) / true_torque - ripple),
        # Relative, and without the currents, which are exact.
        "saliency": Bar(
            errors.linkages.of(lambda d, q: d / q, *middle) / ratio,
            (middle[0] + off[0]) / (middle[1] + off[1]) / ratio - 1.0,
        ),
    }


def random_case(number: int) -> Case:
    """Random machine at rated current and a random angle."""
    rng = np.random.default_rng(1000 + number)
    design = random_design(rng)
    return Case(design, cross_section(design), math.radians(rng.uniform(45.0, 65.0)))


@pytest.mark.parametrize("name", NAMES[:1])
def test_errors_of_a_coarse_mesh_are_true(name: str):
    """Between a third and five times the error against 16 times the elements, issue's own bound."""
    one = shipped(name)
    case = Case(one.machine.design, one.section, math.radians(55.0))
    found = error_bars(case, 2.0)
    assert all(1.0 / 3.0 < found[key].ratio < 5.0 for key in KEYS), found


@pytest.mark.slow
def test_errors_of_random_machines_are_true():
    """Thirty machines at `normal`: nine in ten within a third and five, none below a fifth.

    Saliency and ripple, ratios in which errors cancel, may be exact by chance: only where they
    are off by more than `VISIBLE`, an overstated error is one. About 8 minutes on one core.
    """
    scale = tolerance_settings("normal")[0].scale
    found = [error_bars(random_case(k), scale) for k in range(N_DESIGNS)]
    for key in found[0]:
        bars = [one[key] for one in found]
        assert min(bar.ratio for bar in bars) > 0.2, (key, bars)
        counted = [bar for bar in bars if abs(bar.true) > VISIBLE.get(key, 0.0)]
        within = [1.0 / 3.0 < bar.ratio < 5.0 for bar in counted]
        assert np.mean(within) >= 0.9, (key, bars)
