"""Sectors of one, several and all poles: one machine, whatever part of it is solved."""

import dataclasses
import functools
import math

import numpy as np
import pytest
from outlines import DESIGNS, plain_design
from steel_s19 import s19_exact

from lamwright.app.point import magnet_of
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import BarrierDesign, MachineDesign, OtherHalfDesign
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.rotor import rotor_regions
from lamwright.geometry.section import CrossSection
from lamwright.geometry.sectors import rotor_sector
from lamwright.geometry.winding import winding_table
from lamwright.solver.estimate_step import changes, fine_level
from lamwright.solver.field import FieldSettings, MagneticModel, magnetic_model, solve_point
from lamwright.solver.integrals import dq_values, phase_currents
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_checks import element_areas
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.newton import NewtonSettings
from lamwright.solver.steel import SteelLaw
from lamwright.solver.types import FieldSolution, FloatArray

COARSE = MeshSettings(scale=2.5)  # an identity holds on any mesh
TIGHT = NewtonSettings(tolerance=1e-10)
SAME = 1e-9  # relative: the solution's own tolerance; 4e-12 measured
CURRENTS = (7.0, 10.0)  # A; the teeth are saturated


def wound(slots: int, span: int, poles: int = 4) -> MachineDesign:
    """The plain machine with another number of slots, or of poles with one barrier."""
    plain = plain_design()
    stator = plain.stator.model_copy(
        update={"slots": slots, "tooth_width_mm": 5.4 * 24 / slots, "slot_corner_radius_mm": 1.0}
    )
    layers = 1 if (slots, poles) == (24, 4) else 2
    winding = plain.winding.model_copy(
        update={"layers": layers, "coil_span_slots": span, "turns_per_coil": 816 // slots // layers}
    )
    rotor = plain.rotor
    if poles != 4:
        angle, thickness, depth = (55.0, 4.0, 19.0) if poles == 2 else (12.0, 2.5, 4.0)
        one = BarrierDesign(
            shape="arc",
            end_angle_deg=angle,
            thickness_mm=thickness,
            depth_mm=depth,
            tangential_rib_mm=0.6,
        )
        rotor = rotor.model_copy(update={"poles": poles, "barrier": (one,)})
    return plain.model_copy(update={"stator": stator, "winding": winding, "rotor": rotor})


@functools.cache
def law() -> SteelLaw:
    """An explicit steel that saturates."""
    return s19_exact()


def model_of(section: CrossSection, design: MachineDesign) -> MagneticModel:
    sector = mesh_section(section, COARSE)
    settings = FieldSettings(newton=TIGHT)
    return magnetic_model(sector, section, winding_table(design), law(), law(), settings)


def figures(solution: FieldSolution) -> FloatArray:
    """Everything a solution says of the whole machine, of the order of 1."""
    values = [solution.psi_d, solution.psi_q, solution.torque, solution.energy, solution.coenergy]
    return np.array([*values, *solution.psi_abc])


MACHINES = {
    "24 slots, 4 poles": (wound(24, 6), (1, 2, 4)),
    "12 slots, 2 poles": (wound(12, 6, 2), (1, 2)),
    "18 slots, 4 poles": (wound(18, 4), (2, 4)),
    "9 slots, 6 poles": (wound(9, 1, 6), (2, 6)),
    "12 slots, 10 poles": (wound(12, 1, 10), (5, 10)),
}


@pytest.mark.parametrize("share", [0.0, 0.37])
@pytest.mark.parametrize("name", MACHINES)
def test_every_sector_is_the_whole_machine(name: str, share: float) -> None:
    """Antiperiodic, periodic and whole-circle models agree to the residual's tolerance.

    The meshes are copies of one another, so nothing but rounding differs. At a rotor position on
    an edge of the circle and between two.
    """
    design, sectors = MACHINES[name]
    sections = [cross_section(design, poles) for poles in sectors]
    assert cross_section(design).sector_poles == sectors[0]
    found = []
    for section in sections:
        model = model_of(section, design)
        edge = model.sector.sector_angle / model.sector.n_circle
        found.append(figures(solve_point(model, *CURRENTS, (5.0 + share) * edge - model.axis_a)))
    assert np.abs(found[0][2]) > 0.5  # N m: not a comparison of zeros
    for other in found[1:]:
        assert other == pytest.approx(found[0], rel=SAME, abs=SAME * np.abs(found[0]).max())


@pytest.mark.parametrize("name", MACHINES)
def test_sixty_electrical_degrees_on_is_the_same(name: str) -> None:
    """A balanced winding: dq linkages and torque repeat after 60 electrical degrees.

    Derived: 120 degrees on, the slots meet the rotor as before with the phases exchanged in turn;
    180 degrees on the rotor is the same and all currents are reversed.
    """
    design, _ = MACHINES[name]
    model = model_of(cross_section(design), design)
    edge = model.sector.sector_angle / model.sector.n_circle
    here = 5.0 * edge - model.axis_a
    one, next_one = (
        figures(solve_point(model, *CURRENTS, here + k * math.pi / 3.0 / design.pole_pairs))[:5]
        for k in (0, 1)
    )
    assert next_one == pytest.approx(one, rel=SAME)


@pytest.mark.parametrize("name", ["9 slots, 6 poles", "12 slots, 10 poles"])
def test_fractional_slots_keep_the_energy_balance(name: str) -> None:
    """W + W' = sum psi_k i_k, to the residual's tolerance, and torque is motoring."""
    design, _ = MACHINES[name]
    solution = solve_point(model_of(cross_section(design), design), *CURRENTS, 0.013)
    currents = phase_currents(*CURRENTS, design.pole_pairs * solution.position)
    both = solution.energy + solution.coenergy
    assert both == pytest.approx(float(solution.psi_abc @ currents), rel=1e-8)
    assert min(solution.psi_d, solution.psi_q, solution.torque) > 0.0


@pytest.mark.parametrize("name", ["9 slots, 6 poles", "12 slots, 10 poles"])
def test_torque_of_tooth_coils_is_the_slope_of_the_coenergy(name: str) -> None:
    """T = dW'/d theta at constant phase currents; central difference, 2 % for the gap's mesh."""
    design, _ = MACHINES[name]
    model, p = model_of(cross_section(design), design), design.pole_pairs
    loaded = solve_point(model, *CURRENTS, 0.013)
    currents = phase_currents(*CURRENTS, p * loaded.position)
    step = math.radians(0.05)
    coenergy = []
    for position in (loaded.position - step, loaded.position + step):
        i_d, i_q = dq_values(currents, p * position)
        coenergy.append(solve_point(model, i_d, i_q, position, loaded).coenergy)
    assert loaded.torque == pytest.approx((coenergy[1] - coenergy[0]) / (2.0 * step), rel=2e-2)


def unlike_poles(
    sector_poles: int, *, exchanged: bool = False
) -> tuple[CrossSection, MachineDesign]:
    """The plain machine with a thinner first barrier in every second pole."""
    design = plain_design()
    first, *others = design.rotor.barrier
    thin = first.model_copy(update={"thickness_mm": 1.8})
    other = design.rotor.model_copy(update={"barrier": (thin, *others)})
    poles = [rotor_regions(design), rotor_regions(design.model_copy(update={"rotor": other}))]
    if exchanged:
        poles.reverse()
    rotor, ribs = rotor_sector(poles, design.pole_pairs, sector_poles)
    section = dataclasses.replace(
        cross_section(design, sector_poles), rotor=rotor, ribs=ribs, rotor_period=2
    )
    return section, design


def test_like_poles_called_a_period_of_two_change_nothing() -> None:
    """Equal poles with rotor_period 2 are the same machine: the same to rounding."""
    design = plain_design()
    two = dataclasses.replace(cross_section(design, 2), rotor_period=2)
    one = solve_point(model_of(cross_section(design), design), *CURRENTS, 0.031)
    other = solve_point(model_of(two, design), *CURRENTS, 0.031)
    assert figures(other) == pytest.approx(figures(one), rel=SAME)


def test_unlike_poles_on_half_and_whole_machine() -> None:
    """Two of four poles, periodic, are the whole circle: the same to rounding."""
    half, whole = (
        figures(solve_point(model_of(*unlike_poles(poles)), *CURRENTS, 0.031)) for poles in (2, 4)
    )
    assert whole == pytest.approx(half, rel=SAME)


def test_unlike_poles_exchanged_are_a_rotor_turned_by_a_pole() -> None:
    """The poles exchanged, all currents reversed: the same dq figures.

    To 0.5 % on the mesh of the exchanged poles, which is another one.
    """
    section, design = unlike_poles(2)
    one = solve_point(model_of(section, design), *CURRENTS, 0.031)
    other = solve_point(model_of(*unlike_poles(2, exchanged=True)), *CURRENTS, 0.031)
    assert figures(other)[:5] == pytest.approx(figures(one)[:5], rel=5e-3)
    turned = solve_point(model_of(section, design), *CURRENTS, 0.031 + math.pi / 2.0)
    assert figures(turned)[:5] == pytest.approx(figures(one)[:5], rel=SAME)


def unlike_halves(sector_poles: int) -> CrossSection:
    """The plain machine whose barriers end at another angle on the clockwise half of each pole."""
    design = plain_design()
    first, second, third = design.rotor.barrier
    half = OtherHalfDesign(end_angle_deg=second.end_angle_deg + 1.0)
    changed = (first, second.model_copy(update={"other_half": half}), third)
    rotor = design.rotor.model_copy(update={"barrier": changed})
    return cross_section(design.model_copy(update={"rotor": rotor}), sector_poles)


def test_poles_without_mirror_symmetry_are_turned() -> None:
    """Half and whole machine from copies of one pole's mesh: the same to rounding.

    One pole is meshed from another outline of the same shape, not cut by rays: 0.2 %.
    """
    one, half, whole = (
        figures(solve_point(model_of(unlike_halves(poles), plain_design()), *CURRENTS, 0.031))
        for poles in (1, 2, 4)
    )
    assert whole == pytest.approx(half, rel=SAME)
    assert half == pytest.approx(one, rel=2e-3)


@pytest.mark.parametrize("poles", [1, 2, 4])
def test_meshes_of_any_sector_fill_it(poles: int) -> None:
    """Areas of all elements sum to the sector's: true arcs by parabolas, 1e-6 at most."""
    section = cross_section(plain_design(), poles)
    sector = mesh_section(section, COARSE)
    circle, outer = section.circle_radius, section.stator_outer_radius
    half = 0.5 * section.sector_angle
    rotor, stator = (element_areas(mesh).sum() for mesh in (sector.rotor, sector.stator))
    assert rotor == pytest.approx(half * circle**2, rel=1e-6)
    assert stator == pytest.approx(half * (outer**2 - circle**2), rel=1e-6)


@pytest.mark.parametrize("poles", [2, 4])
def test_magnets_alternate_from_pole_to_pole(poles: int) -> None:
    """The shipped machine with magnets, loaded and not: several poles are one pole again."""
    machine = read_machine(DESIGNS / "demo_36s4p_magnet.toml")
    magnet = magnet_of(machine)
    found = []
    for count in (1, poles):
        section = cross_section(machine.design, count)
        settings = FieldSettings(newton=TIGHT, magnet=magnet)
        winding, sector = winding_table(machine.design), mesh_section(section, COARSE)
        model = magnetic_model(sector, section, winding, law(), law(), settings)
        solutions = [solve_point(model, i_d, 0.4 * i_d, 0.031) for i_d in (0.0, 9.0)]
        found.append(np.concatenate([figures(solution) for solution in solutions]))
    assert np.abs(found[0][:2]).max() > 0.01  # V s: the magnets alone link the winding
    assert found[1] == pytest.approx(found[0], rel=SAME, abs=SAME * np.abs(found[0]).max())


def test_error_estimates_do_not_depend_on_the_sector() -> None:
    """What the finer mesh changes, from one pole and from two: rounding of its iterations.

    4e-9 measured; how many steps the conjugate gradients take must not depend on the sector.
    """
    design = plain_design()
    winding, found = winding_table(design), []
    for poles in (1, 2):
        section = cross_section(design, poles)
        model = model_of(section, design)
        solution = solve_point(model, *CURRENTS, 0.031)
        change = changes(fine_level(model, section, winding), solution)
        found.append([change.psi_d, change.psi_q, change.torque])
    assert found[1] == pytest.approx(found[0], rel=1e-6)
