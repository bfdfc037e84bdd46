"""A machine with magnets: identities that hold for the discrete field."""

import dataclasses
import math

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.torque import torque_waveform, waveform_positions
from lamwright.solver.chains import OperatingPoint, linkage_slope, solve_chain
from lamwright.solver.estimate_step import changes, fine_level
from lamwright.solver.field import MagneticModel, magnetic_model, solve_point
from lamwright.solver.magnet import magnet_source
from lamwright.solver.mesh import mesh_section
from lamwright.solver.model import remagnetised
from lamwright.solver.types import FieldSolution
from tests.shipped import shipped, shipped_model

NAME = "demo_36s4p_magnet"
COUNT = 10  # positions over 60 degrees: their mean lets orders 60, 120 ... through alone
I_D, I_Q = 13.0, 27.0  # A, near the angle of most torque


@pytest.fixture(scope="module")
def model() -> MagneticModel:
    return shipped_model(NAME, tolerance=1e-7)


def waveform(model: MagneticModel, i_d: float, i_q: float) -> tuple[FieldSolution, ...]:
    pairs = model.sector.pole_pairs
    points = [OperatingPoint(i_d, i_q, float(p)) for p in waveform_positions(pairs, COUNT)]
    return solve_chain(model, points)


@pytest.fixture(scope="module")
def bare(model: MagneticModel) -> tuple[FieldSolution, ...]:
    return waveform(model, 0.0, 0.0)


def test_cogging_has_no_mean(bare: tuple[FieldSolution, ...]) -> None:
    """No work over a period without current: within 2 % of the cogging torque, by Maxwell stress.

    The mean of 10 positions is free of orders below 60; Maxwell's stress is off by the mesh.
    """
    torque = np.array([s.torque for s in bare])
    assert np.ptp(torque) > 5e-3  # N m
    assert abs(torque.mean()) < 0.02 * np.ptp(torque)


def test_magnets_link_minus_q(bare: tuple[FieldSolution, ...]) -> None:
    """Inward magnets: psi_q < 0, psi_d = 0 in the mean by symmetry (1e-4 of psi_q)."""
    psi_d, psi_q = (np.mean([getattr(s, name) for s in bare]) for name in ("psi_d", "psi_q"))
    assert psi_q < -0.03
    assert abs(psi_d) < 1e-4 * abs(psi_q)


def test_mean_torques_agree(model: MagneticModel) -> None:
    """Maxwell's stress against 3/2 p (psi_d i_q - psi_q i_d): 0.2 % in the mean (power balance)."""
    record = torque_waveform(waveform(model, I_D, I_Q), model.sector.pole_pairs)
    assert record.mean == pytest.approx(record.mean_linkage, rel=2e-3)


@pytest.mark.parametrize(("i_d", "i_q"), [(I_D, I_Q), (0.0, 0.0)])
def test_torque_is_the_slope_of_the_coenergy(model: MagneticModel, i_d: float, i_q: float) -> None:
    """T = 3/2 p (psi_d i_q - psi_q i_d) + dW'/dtheta at constant i_d, i_q, also for cogging alone.

    Central differences over 0.1 mechanical degree; Maxwell's stress is off by the mesh: 0.5 % of
    the torque, 3 % of the cogging.
    """
    step, at = math.radians(0.05), math.radians(1.3)
    low, mid, high = (solve_point(model, i_d, i_q, at + d) for d in (-step, 0.0, step))
    linkage = 1.5 * model.sector.pole_pairs * (mid.psi_d * i_q - mid.psi_q * i_d)
    slope = (high.coenergy - low.coenergy) / (2.0 * step)
    assert mid.torque == pytest.approx(linkage + slope, rel=5e-3 if i_d else 3e-2)


def test_energies_sum_to_the_currents(model: MagneticModel) -> None:
    """W + W' = sum psi i, exact but for Newton's tolerance."""
    s = solve_point(model, I_D, I_Q, 0.02)
    currents = 1.5 * (s.psi_d * I_D + s.psi_q * I_Q)
    assert s.energy + s.coenergy == pytest.approx(currents, rel=1e-6)


def test_slope_of_the_linkages(model: MagneticModel) -> None:
    """The tangent at a solution with magnets against central differences: 1e-4 at steps of 1 %."""
    step = 0.01 * I_Q
    low, mid, high = (solve_point(model, I_D, I_Q + d, 0.02) for d in (-step, 0.0, step))
    d, q = linkage_slope(model, mid, 0.0, 1.0)
    assert q == pytest.approx((high.psi_q - low.psi_q) / (2.0 * step), rel=1e-3)
    assert d == pytest.approx((high.psi_d - low.psi_d) / (2.0 * step), abs=1e-3 * q)


def test_pole_pitch_turns_the_sign(model: MagneticModel) -> None:
    """A turn by one pole pitch without current changes the sign of all phases, 1e-9 of them."""
    here, next_pole = (
        solve_point(model, 0.0, 0.0, angle)
        for angle in (0.03, 0.03 + math.pi / model.sector.pole_pairs)
    )
    scale = np.abs(here.psi_abc).max()
    assert next_pole.psi_abc == pytest.approx(-here.psi_abc, abs=1e-6 * scale)
    assert next_pole.torque == pytest.approx(here.torque, abs=1e-5 * scale)


def test_fine_level_carries_the_magnets(model: MagneticModel) -> None:
    """The quartered mesh's change is small and of the size of the error bars: below 0.3 %."""
    one = shipped(NAME)
    solution = solve_point(model, I_D, I_Q, 0.02)
    change = changes(fine_level(model, one.section, one.winding), solution)
    assert 0.0 < abs(change.psi_q / solution.psi_q) < 3e-3
    assert abs(change.torque / solution.torque) < 3e-3


def outward(section: CrossSection) -> CrossSection:
    turned = tuple(dataclasses.replace(r, magnetisation=-r.magnetisation) for r in section.rotor)
    return dataclasses.replace(section, rotor=turned)


def test_outward_magnets_mirror_the_currents(model: MagneticModel) -> None:
    """All magnets and currents reversed: linkages reversed, torque the same, 1e-6."""
    one = shipped(NAME)
    other = magnetic_model(
        one.sector,
        outward(one.section),
        one.winding,
        model.iron.rotor_law,
        model.iron.stator_law,
        model.settings,
    )
    first, second = solve_point(model, I_D, I_Q, 0.02), solve_point(other, -I_D, -I_Q, 0.02)
    assert second.psi_abc == pytest.approx(-first.psi_abc, abs=1e-6)
    assert second.torque == pytest.approx(first.torque, rel=1e-6)


def test_remagnetised_is_the_model_made_anew(model: MagneticModel) -> None:
    """Half the remanence by scaling the load, against a model of that law: 1e-6 of all figures."""
    one, own = shipped(NAME), model.settings.magnet
    assert own is not None
    law = dataclasses.replace(own, remanence=0.5 * own.remanence)
    settings = dataclasses.replace(model.settings, magnet=law)
    laws = model.iron.rotor_law, model.iron.stator_law
    anew = magnetic_model(one.sector, one.section, one.winding, *laws, settings)
    first, second = (solve_point(m, I_D, I_Q, 0.02) for m in (remagnetised(model, law), anew))
    assert first.psi_q == pytest.approx(second.psi_q, rel=1e-6)
    assert first.torque == pytest.approx(second.torque, rel=1e-6)
    assert first.energy == pytest.approx(second.energy, rel=1e-6)
    harder = dataclasses.replace(law, recoil_permeability=2.0)
    with pytest.raises(ValueError, match="only the remanence of a model's magnets can be changed"):
        remagnetised(model, harder)


def test_a_magnet_needs_its_law(model: MagneticModel) -> None:
    one = shipped(NAME)
    with pytest.raises(ValueError, match="magnet_1: a magnet needs a magnet law"):
        magnet_source(one.sector.rotor, one.section.rotor, model.numbering, None)


def test_two_poles_are_one_and_its_opposite(model: MagneticModel) -> None:
    """A sector of two poles, the second magnetised round: all figures of one pole's, 1e-5."""
    one = shipped(NAME)
    section = cross_section(one.machine.design, sector_poles=2)
    names = [r.name for r in section.rotor if r.material == "magnet"]
    assert len(names) == 10
    laws = model.iron.rotor_law, model.iron.stator_law
    double = magnetic_model(mesh_section(section), section, one.winding, *laws, model.settings)
    for i_d, i_q in ((0.0, 0.0), (I_D, I_Q)):
        first, second = (solve_point(m, i_d, i_q, 0.02) for m in (model, double))
        scale = np.abs(first.psi_abc).max()
        assert second.psi_abc == pytest.approx(first.psi_abc, abs=1e-5 * scale)
        assert second.torque == pytest.approx(first.torque, abs=1e-5 * 56.0)
        assert second.energy == pytest.approx(first.energy, rel=1e-5)


def test_mirrored_currents_turn_the_torque_round(model: MagneticModel) -> None:
    """T(-i_d, i_q) = -T(i_d, i_q) with magnets along q, as the search for the angle takes it.

    The mirror image exchanges the layers of the chorded winding, so not exactly: measured 7e-4 of
    the torque and of psi_d, 2e-3 allowed.
    """
    first, second = (solve_point(model, i_d, I_Q, 0.0) for i_d in (I_D, -I_D))
    assert second.torque == pytest.approx(-first.torque, rel=2e-3)
    assert second.psi_q == pytest.approx(first.psi_q, abs=2e-3 * abs(first.psi_d))
