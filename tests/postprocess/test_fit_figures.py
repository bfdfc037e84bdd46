"""The rotor on its shaft, hot and with magnets: states, the hot gap, what is not given."""

from functools import cache

import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import Sourced
from lamwright.geometry.design_file import Machine, read_machine
from lamwright.geometry.design_fit import FitDesign, HotDesign
from lamwright.geometry.section import CrossSection, rotor_cell
from lamwright.postprocess.fit_figures import (
    HotGap,
    LostFirst,
    PressedFigures,
    fit_cautions,
    fit_figures,
    hot_gap,
    pressed_errors,
    pressed_rib_errors,
    pressed_ribs,
)
from lamwright.postprocess.fit_study import FitStudy, fit_study
from lamwright.postprocess.quantities import figures_of
from lamwright.solver.mesh import mesh_lamination
from lamwright.solver.mesh_plan import MeshSettings
from tests.broken_designs import DESIGNS

MAXIMUM, OVERSPEED = 600.0, 720.0
EXPANSION = Sourced(value=12.0, source="invented")
FIT = FitDesign(radial_interference_um=10.0)
EVEN = HotDesign(rotor_temperature_c=120.0, stator_temperature_c=120.0, run_out_um=15.0)


def machine_with(fit: FitDesign | None, hot: HotDesign | None, name: str = "24s4p_arc") -> Machine:
    machine = read_machine(DESIGNS / f"demo_{name}.toml")
    rotor = machine.design.rotor.model_copy(update={"fit": fit})
    steel = machine.rotor_steel.model_copy(update={"expansion_um_per_m_k": EXPANSION, "hot": None})
    design = machine.design.model_copy(update={"rotor": rotor, "hot": hot})
    return Machine(design, steel, steel, machine.path, machine.magnet)


def studied(machine: Machine) -> tuple[FitStudy, CrossSection]:
    section = rotor_cell(cross_section(machine.design))
    mesh = mesh_lamination(section, MeshSettings(scale=2.5))
    return fit_study(machine, section, mesh, MAXIMUM, OVERSPEED), section


@cache
def even_heat() -> tuple[FitStudy, CrossSection, Machine]:
    machine = machine_with(FIT, EVEN)
    return (*studied(machine), machine)


def test_even_heat_of_all_parts_grows_the_gap_as_the_parts():
    """All at +100 K, alpha 12e-6: a rotor without fit leaves gap (1 + alpha dT) - run-out; 1e-9.

    C7: gap - growths' difference - run-out. At rest the ring is free of stress then.
    """
    machine = machine_with(None, EVEN)
    study, section = studied(machine)
    gap = hot_gap(study, machine)
    assert isinstance(gap, HotGap)
    assert gap.rest == pytest.approx(section.gap * (1.0 + 12e-6 * 100.0) - 15e-6, abs=1e-9)
    spin = study.state("cold at overspeed").report.growth_max
    assert gap.rest - gap.fast == pytest.approx(spin, rel=2e-3)


def test_fit_in_even_heat_keeps_its_pressure():
    """Shaft and lamination of one expansion: hot as cold, but for the growth of radii; 1e-6."""
    study, _, machine = even_heat()
    for place in ("rest", "maximum speed", "overspeed"):
        cold, hot = (
            study.state(f"{heat} at {place}").stress.mean_pressure for heat in ("cold", "hot")
        )
        assert hot == pytest.approx(cold, rel=1e-6)
    assert study.loose_hot.first == pytest.approx(study.loose_cold.first, rel=1e-6)
    assert study.loose_cold.first < study.loose_cold.everywhere
    figures = fit_figures(study, machine)
    keys = [figure.key for group in figures for figure in figures_of(group)]
    assert len(keys) == len(set(keys))
    assert any(isinstance(group, LostFirst) for group in figures)


def test_the_worst_state_is_told_with_its_error():
    """Least margin of six states; the ribs' own least are not below it; errors are small."""
    study, _, machine = even_heat()
    assert len(study.states) == 6
    worst = study.worst.report.yield_margin
    assert worst == min(state.report.yield_margin for state in study.states)
    assert min(rib.margin for rib in pressed_ribs(study)) >= worst
    errors = pressed_errors(study, machine)
    assert 0.0 < errors["yield_margin_pressed"] < 0.1 * worst
    # Every other figure differs on the coarser mesh by less than a tenth, and by something.
    for figure in (f for group in fit_figures(study, machine) for f in figures_of(group)):
        if not figure.exact:
            assert 0.0 < errors[figure.key] < 0.1 * abs(figure.value), figure.key
    for rib, own in zip(pressed_rib_errors(study), pressed_ribs(study), strict=True):
        assert 0.0 < rib["pressed_peak_mpa"] < 0.1e-6 * own.peak


def test_magnets_lower_the_margin():
    """No fit, no heat: the state at overspeed alone, with more stress than without magnets."""
    machine = machine_with(None, None, "36s4p_magnet")
    study, _ = studied(machine)
    without, _ = studied(
        Machine(machine.design, machine.rotor_steel, machine.stator_steel, machine.path)
    )
    assert [state.name for state in study.states] == ["cold at overspeed"]
    with_them, bare = (
        next(group for group in fit_figures(item, machine) if isinstance(group, PressedFigures))
        for item in (study, without)
    )
    assert with_them.margin < 0.99 * bare.margin
    assert any("rigid blocks" in line for line in fit_cautions(study, machine, OVERSPEED))


def test_missing_values_are_named():
    """Each input that the hot gap lacks, by its key."""
    study, _, machine = even_heat()
    assert "[hot]" in hot_gap(study, machine_with(FIT, None))
    no_stator = machine_with(FIT, HotDesign(rotor_temperature_c=120.0))
    assert "hot.stator_temperature_c" in hot_gap(study, no_stator)
    bare = machine.stator_steel.model_copy(update={"expansion_um_per_m_k": None})
    lacking = Machine(machine.design, machine.rotor_steel, bare, machine.path)
    assert "stator's steel card" in hot_gap(study, lacking)
    cold, _ = studied(Machine(machine.design, bare, bare, machine.path))
    assert cold.loose_hot is None
    assert "rotor's steel card" in hot_gap(cold, machine)


def test_a_fit_that_opens_below_overspeed_is_told():
    """The caution names both the state and the speed."""
    study, _, machine = even_heat()
    speed = 1.1 * study.loose_cold.first
    lines = list(fit_cautions(study, machine, speed))
    assert any("begins to open at" in line and line.startswith("cold") for line in lines)
    assert not any("begins to open" in line for line in fit_cautions(study, machine, OVERSPEED))
