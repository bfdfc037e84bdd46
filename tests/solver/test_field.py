"""Identities that every field must meet, on the shipped designs."""

import dataclasses
import math
import pickle

import numpy as np
import pytest
from shipped import NAMES, Shipped, shipped, shipped_model

from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.field import MagneticModel, at_position, magnetic_model, solve_point
from lamwright.solver.integrals import dq_values, gap_torque, phase_currents
from lamwright.solver.steel import linear_law
from lamwright.solver.types import FieldSolution, Quadrature

COARSE, TIGHT = 1.6, 1e-9  # an identity holds on any mesh, to the tolerance of the solution
DEMO = "demo_24s4p_arc"


@pytest.fixture(scope="module")
def model() -> MagneticModel:
    return shipped_model(DEMO, COARSE, TIGHT)


@pytest.fixture(scope="module")
def demo() -> Shipped:
    return shipped(DEMO, COARSE)


@pytest.fixture(scope="module")
def loaded(model: MagneticModel) -> FieldSolution:
    """Rated current at 55 degrees, rotor between two edges of the circle."""
    return solve_point(model, 7.0, 10.0, math.radians(3.1))


def test_dq_is_amplitude_invariant() -> None:
    """i_a = i_d on phase A's axis; phases B and C lag by 120 el. degrees; dq back again."""
    assert phase_currents(5.0, 0.0, 0.0) == pytest.approx([5.0, -2.5, -2.5])
    assert phase_currents(0.0, 5.0, 0.0)[0] == pytest.approx(0.0, abs=1e-15)
    assert phase_currents(0.0, 5.0, -math.pi / 2.0)[0] == pytest.approx(5.0)
    assert phase_currents(5.0, 0.0, 2.0 * math.pi / 3.0)[1] == pytest.approx(5.0)
    assert dq_values(phase_currents(3.0, -4.0, 0.7), 0.7) == pytest.approx((3.0, -4.0))


def test_linkages_carry_the_sign_of_their_current(loaded: FieldSolution) -> None:
    """Design conventions: positive current links positive flux; motoring torque is positive."""
    assert loaded.psi_d > loaded.psi_q > 0.0
    assert loaded.torque > 0.0


def test_energy_and_coenergy_sum_to_linkage_times_current(loaded: FieldSolution) -> None:
    """W + W' = sum psi_k i_k with the same linkages, to the tolerance of the residual."""
    currents = phase_currents(loaded.i_d, loaded.i_q, 2.0 * loaded.position)
    both = loaded.energy + loaded.coenergy
    assert both == pytest.approx(float(loaded.psi_abc @ currents), rel=1e-8)
    assert loaded.coenergy > loaded.energy  # saturated


def test_torque_is_the_slope_of_the_coenergy(model: MagneticModel, loaded: FieldSolution) -> None:
    """T = dW'/d theta at constant phase currents; central difference over 0.25 degrees: 1 %.

    The coenergy's own difference errs by the third derivative, the stress by the gap's mesh.
    """
    currents = phase_currents(loaded.i_d, loaded.i_q, 2.0 * loaded.position)
    step = math.radians(0.125)
    coenergy = []
    for position in (loaded.position - step, loaded.position + step):
        i_d, i_q = dq_values(currents, 2.0 * position)
        coenergy.append(solve_point(model, i_d, i_q, position, loaded).coenergy)
    slope = (coenergy[1] - coenergy[0]) / (2.0 * step)
    assert loaded.torque == pytest.approx(slope, rel=1e-2)


@pytest.mark.parametrize("position_deg", [0.0, 4.3])
def test_reciprocity(model: MagneticModel, position_deg: float) -> None:
    """D psi_d/d i_q = d psi_q/d i_d (second derivatives of one coenergy), within 0.1 % of L_q.

    Holds for the discrete field at every position, not only in the mean; central differences of
    2 % of the current.
    """
    i_d, i_q, step = 7.0, 10.0, 0.2
    position = math.radians(position_deg)
    at = {
        key: solve_point(model, i_d + step * key[0], i_q + step * key[1], position)
        for key in ((0, 1), (0, -1), (1, 0), (-1, 0))
    }
    across_d = (at[0, 1].psi_d - at[0, -1].psi_d) / (2.0 * step)
    across_q = (at[1, 0].psi_q - at[-1, 0].psi_q) / (2.0 * step)
    l_q = at[0, 1].psi_q / (i_q + step)
    assert abs(across_d) > 0.05 * l_q  # saturation couples the axes: not a comparison of zeros
    assert across_d == pytest.approx(across_q, abs=1e-3 * l_q)


@pytest.fixture(scope="module")
def linear(demo: Shipped) -> MagneticModel:
    law = linear_law(1500.0)
    return magnetic_model(demo.sector, demo.section, demo.winding, law, law)


def test_linear_machine_scales_with_current(linear: MagneticModel) -> None:
    """Linear steel: psi with I, T with I^2, W = W'; one Newton step, exact to rounding."""
    one = solve_point(linear, 3.0, 2.0, 0.1)
    three = solve_point(linear, 9.0, 6.0, 0.1)
    assert three.newton.steps == 1
    assert three.psi_abc == pytest.approx(3.0 * one.psi_abc, rel=1e-9)
    assert three.torque == pytest.approx(9.0 * one.torque, rel=1e-8)
    assert one.energy == pytest.approx(one.coenergy, rel=1e-9)


def test_pole_pitch_changes_signs_only(model: MagneticModel, loaded: FieldSolution) -> None:
    """Rotor turned by one pole pitch: phase linkages change sign, dq and torque stay."""
    turned = solve_point(model, loaded.i_d, loaded.i_q, loaded.position + math.pi / 2.0)
    assert turned.psi_abc == pytest.approx(-loaded.psi_abc, rel=1e-7, abs=1e-9)
    assert turned.psi_d == pytest.approx(loaded.psi_d, rel=1e-8)
    assert turned.psi_q == pytest.approx(loaded.psi_q, rel=1e-8)
    assert turned.torque == pytest.approx(loaded.torque, rel=1e-7)


def test_mirror_image_turns_the_torque(model: MagneticModel, loaded: FieldSolution) -> None:
    """The section is its own mirror image: i_q -> -i_q, position -> -position, T -> -T.

    The mesh is not mirrored in every element: 0.05 % of the torque measured.
    """
    image = solve_point(model, loaded.i_d, -loaded.i_q, -loaded.position)
    assert image.torque == pytest.approx(-loaded.torque, rel=2e-3)
    assert image.psi_d == pytest.approx(loaded.psi_d, rel=1e-3)
    assert image.psi_q == pytest.approx(-loaded.psi_q, rel=1e-3)


def test_machine_of_twice_the_size(demo: Shipped, model: MagneticModel) -> None:
    """All lengths x2, currents x2: the same B, psi a length x2, torque a length x4 (scaling)."""

    def twice(mesh):
        return dataclasses.replace(mesh, nodes=2.0 * mesh.nodes)

    sector = dataclasses.replace(
        demo.sector,
        rotor=twice(demo.sector.rotor),
        stator=twice(demo.sector.stator),
        circle_radius=2.0 * demo.sector.circle_radius,
    )
    radii = ("rotor_radius", "shaft_radius", "stator_bore_radius", "stator_outer_radius")
    section = dataclasses.replace(
        demo.section, **{name: 2.0 * getattr(demo.section, name) for name in radii}
    )
    law = model.iron.rotor_law
    large = magnetic_model(sector, section, demo.winding, law, law, model.settings)
    small = solve_point(model, 7.0, 10.0, 0.02)
    solution = solve_point(large, 14.0, 20.0, 0.02)
    assert solution.psi_abc == pytest.approx(2.0 * small.psi_abc, rel=1e-8, abs=1e-10)
    assert solution.torque == pytest.approx(4.0 * small.torque, rel=1e-8)


def test_more_turns_at_less_current(demo: Shipped, model: MagneticModel) -> None:
    """Turns x3 with a third of the current: the same field, linkages x3."""
    winding = dataclasses.replace(demo.winding, conductors=3.0 * demo.winding.conductors)
    law = model.iron.rotor_law
    wound = magnetic_model(demo.sector, demo.section, winding, law, law, model.settings)
    base, fine = solve_point(model, 6.0, 9.0, 0.02), solve_point(wound, 2.0, 3.0, 0.02)
    assert fine.psi_abc == pytest.approx(3.0 * base.psi_abc, rel=1e-8, abs=1e-10)
    assert fine.torque == pytest.approx(base.torque, rel=1e-8)
    assert fine.a_stator == pytest.approx(base.a_stator, abs=1e-8 * np.abs(base.a_stator).max())


def test_torque_is_the_same_on_any_circle() -> None:
    """Maxwell's stress over the rotor's half of the gap and over the stator's: 0.2 %."""
    model = shipped_model(DEMO)
    loaded = solve_point(model, 7.0, 10.0, math.radians(3.1))
    place = at_position(model, loaded.position)
    a = np.concatenate([loaded.a_rotor, loaded.a_stator])[place.gap_elements]
    n = model.rotor_gap.elements.shape[0]
    halves = []
    for part in (slice(None, n), slice(n, None)):
        quad = Quadrature(place.gap_quad.grad[part], place.gap_quad.weight[part])
        half = 0.5 * (model.bore_radius - model.rim_radius)
        halves.append(gap_torque(quad, place.gap_places[part], a[part], half))
    assert halves[0] == pytest.approx(halves[1], rel=2e-3)
    assert 4.0 * model.stack_length * np.mean(halves) == pytest.approx(loaded.torque, rel=1e-9)


@pytest.mark.parametrize("axis", [(1.0, 0.0), (0.0, 1.0)])
@pytest.mark.parametrize("name", NAMES)
def test_no_torque_on_the_axes(name: str, axis: tuple[float, float]) -> None:
    """Current on d or on q alone: torque over 60 el. degrees below 0.2 % of that between them.

    A chorded two-layer winding is not quite its own mirror image (see below): 0.17 % measured on
    36 slots 6 poles with d current alone, on any mesh; single layer 0.005 %.
    """
    one, own = shipped(name), shipped_model(name)
    p = one.section.pole_pairs
    i_d, i_q = (one.rated * share for share in axis)
    points = [OperatingPoint(i_d, i_q, k * math.pi / 3.0 / p / 8) for k in range(8)]
    torque = np.mean([s.torque for s in solve_chain(own, points)])
    between = solve_point(own, one.rated / math.sqrt(2.0), one.rated / math.sqrt(2.0), 0.0).torque
    assert abs(torque) < 2e-3 * abs(between)


@pytest.mark.parametrize("name", NAMES)
def test_mirrored_machine_at_a_symmetric_position(name: str) -> None:
    """Rotor symmetric to the slots: the mirror image has the opposite torque, to 1e-4 of rated.

    The image of a two-layer winding has its layers exchanged, so the torque on an axis vanishes
    together with that of the exchanged winding; for a single layer it vanishes by itself.
    """
    one, own = shipped(name, COARSE), shipped_model(name, COARSE)
    exchanged = dataclasses.replace(one.winding, conductors=one.winding.conductors[:, ::-1])
    law = own.iron.rotor_law
    other = magnetic_model(one.sector, one.section, exchanged, law, law, own.settings)
    rated = solve_point(own, 0.7 * one.rated, 0.7 * one.rated, 0.0).torque
    for i_d, i_q in ((one.rated, 0.0), (0.0, one.rated)):
        both = [solve_point(model, i_d, i_q, 0.0).torque for model in (own, other)]
        assert abs(sum(both)) < 2e-4 * abs(rated)


@pytest.mark.parametrize("name", NAMES)
def test_mean_torque_is_that_of_the_linkages(name: str) -> None:
    """Mean of Maxwell's torque over 60 el. degrees = 3/2 p mean(psi_d i_q - psi_q i_d): 0.5 %.

    Exact for the continuous field, as the coenergy is periodic. 15 positions leave the 90th
    harmonic of the waveform as the first that falls into the mean.
    """
    one, own = shipped(name), shipped_model(name)
    p = one.section.pole_pairs
    i_d, i_q = one.rated * math.cos(math.radians(55.0)), one.rated * math.sin(math.radians(55.0))
    step = math.pi / 3.0 / p / 15
    points = [OperatingPoint(i_d, i_q, k * step) for k in range(15)]
    solutions = solve_chain(own, points)
    torque = np.mean([s.torque for s in solutions])
    linked = 1.5 * p * np.mean([s.psi_d * i_q - s.psi_q * i_d for s in solutions])
    assert torque == pytest.approx(linked, rel=5e-3)
    assert torque > 0.0


def test_least_and_most_flux_lie_90_el_degrees_apart(linear: MagneticModel) -> None:
    """Four poles: linkage of phase A at constant current is extreme at 0 and at 45 degrees."""
    psi = []
    for degrees in range(0, 91, 5):
        i_d, i_q = dq_values(np.array([1.0, -0.5, -0.5]), 2.0 * math.radians(degrees))
        psi.append(solve_point(linear, i_d, i_q, math.radians(degrees)).psi_abc[0])
    assert int(np.argmax(psi)) in (0, 18)
    assert int(np.argmin(psi)) == 9


def test_more_permeable_shaft_raises_the_coenergy(demo: Shipped, model: MagneticModel) -> None:
    """More permeance anywhere never lowers the coenergy at given currents (variational)."""
    settings = dataclasses.replace(model.settings, shaft_relative_permeability=500.0)
    law = model.iron.rotor_law
    other = magnetic_model(demo.sector, demo.section, demo.winding, law, law, settings)
    assert solve_point(other, 12.0, 6.0, 0.0).coenergy > solve_point(model, 12.0, 6.0, 0.0).coenergy


def test_start_on_another_mesh_is_refused(model: MagneticModel) -> None:
    """Its numbers would be taken for this mesh's nodes."""
    other = solve_point(shipped_model(DEMO), 1.0, 1.0, 0.0)
    with pytest.raises(ValueError, match="start: a solution on another mesh"):
        solve_point(model, 1.0, 1.0, 0.0, other)


def test_zero_current_is_zero_field(model: MagneticModel, loaded: FieldSolution) -> None:
    """No source, no field: also from a warm start, without a Newton step."""
    solution = solve_point(model, 0.0, 0.0, 0.2, loaded)
    assert solution.newton.steps == 0
    assert np.all(solution.a_rotor == 0.0)
    assert (solution.torque, solution.energy, solution.psi_d) == (0.0, 0.0, 0.0)


def test_start_does_not_change_the_answer(model: MagneticModel, loaded: FieldSolution) -> None:
    """Warm or cold: the energy has one minimum. A turned rotor carries its own part along."""
    position = loaded.position + math.radians(0.5)
    warm = solve_point(model, 7.0, 10.0, position, loaded)
    cold = solve_point(model, 7.0, 10.0, position)
    assert warm.newton.steps < cold.newton.steps
    assert warm.torque == pytest.approx(cold.torque, rel=1e-7)
    assert warm.psi_abc == pytest.approx(cold.psi_abc, rel=1e-8)


def test_model_crosses_a_process_border(model: MagneticModel, loaded: FieldSolution) -> None:
    """Pickled and read back, without its factors: the same field but for rounding.

    BLAS rounds by where in memory an array begins, which a copy changes: 1e-12 was seen. A lost
    part of the model would show in the first digits.
    """
    at_position(model, loaded.position)
    copy = pickle.loads(pickle.dumps(model))
    solution = solve_point(copy, loaded.i_d, loaded.i_q, loaded.position)
    assert solution.torque == pytest.approx(loaded.torque, rel=1e-10)


@pytest.mark.parametrize("method", ["qdldl", "superlu"])
def test_other_solvers_give_the_same_field(
    model: MagneticModel, loaded: FieldSolution, method: str
) -> None:
    """Fall-backs take the same Newton path to rounding."""
    settings = dataclasses.replace(model.settings, solver=method)
    own = magnetic_model(
        shipped(DEMO, COARSE).sector,
        shipped(DEMO, COARSE).section,
        shipped(DEMO, COARSE).winding,
        model.iron.rotor_law,
        model.iron.rotor_law,
        settings,
    )
    solution = solve_point(own, loaded.i_d, loaded.i_q, loaded.position, loaded)
    assert solution.torque == pytest.approx(loaded.torque, rel=1e-8)


def test_three_points_in_the_steel_are_enough(model: MagneticModel) -> None:
    """Three against six quadrature points in the steel: below 0.02 % in linkage and torque."""
    demo = shipped(DEMO)
    law = model.iron.rotor_law
    fine = magnetic_model(
        demo.sector,
        demo.section,
        demo.winding,
        law,
        law,
        dataclasses.replace(model.settings, iron_points=6),
    )
    few = shipped_model(DEMO)
    i_d, i_q = 7.0, 10.0
    more, less = solve_point(fine, i_d, i_q, 0.03), solve_point(few, i_d, i_q, 0.03)
    assert less.psi_d == pytest.approx(more.psi_d, rel=2e-4)
    assert less.psi_q == pytest.approx(more.psi_q, rel=2e-4)
    assert less.torque == pytest.approx(more.torque, rel=2e-4)
