"""No load and demagnetisation of the magnet demo, from fields to figures."""

import dataclasses
from pathlib import Path

import pytest

from lamwright.app.magnet_work import MagnetWork, magnet_work
from lamwright.app.point import model_of, read_machine
from lamwright.app.pool import Crew
from lamwright.app.run import make_desk
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.quantities import figures_of
from lamwright.postprocess.tables import verdict_record
from lamwright.postprocess.torque import TorqueSpectrum
from lamwright.postprocess.verdict import all_figures
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from tests import invented_verdict as invented

DEMO = Path(__file__).parents[2] / "designs" / "demo_36s4p_magnet.toml"
I_D, I_Q = 13.0, 27.0  # A


@pytest.fixture(scope="module")
def machine() -> Machine:
    return read_machine(DEMO)


@pytest.fixture(scope="module")
def section(machine: Machine) -> CrossSection:
    return cross_section(machine.design)


@pytest.fixture(scope="module")
def work(machine: Machine, section: CrossSection) -> MagnetWork:
    """On a mesh twice as coarse as by default; the test's bounds allow for it."""
    model = model_of(machine, section, mesh_section(section, MeshSettings(scale=2.0)))
    with Crew(make_desk, 0) as crew:
        crew.everywhere(type(crew.own).take_model, model)
        return magnet_work(machine, section, model, crew)


def test_figures_of_the_demo(machine: Machine, section: CrossSection, work: MagnetWork) -> None:
    """Each from its law: mass from the drawn areas, magnet torque 3/2 p psi_m i_d, emf from psi_m.

    The emf's fundamental is sqrt(3/2) omega psi_m (1e-9); the linkage is all q axis (1e-6).
    """
    figures, design = work.figures(machine, section, I_D, I_Q), machine.design
    area = 2.0 * (10.0 * 3.4 / 2.0 + 10.0 * 4.4 + 12.0 * 4.8)  # mm2 of a pole
    mass = 4.0 * area * 1e-6 * 1e-3 * design.stator.stack_length_mm * 4900.0
    assert figures.mass == pytest.approx(mass, rel=1e-9)
    assert figures.psi_q == pytest.approx(-figures.linkage, rel=1e-6)
    assert figures.torque_share == pytest.approx(1.5 * 2.0 * figures.linkage * I_D, rel=1e-3)
    omega = 2.0 * design.duty.rated_speed_rpm * 2.0 * 3.141592653589793 / 60.0
    assert figures.line_emf_fundamental == pytest.approx(
        1.5**0.5 * omega * figures.linkage, rel=1e-9
    )
    assert figures.line_emf >= figures.line_emf_fundamental
    assert figures.remanence == pytest.approx(0.42 * 0.88)  # 80 C
    assert figures.demagnetising_temperature == -20.0
    assert figures.knee < 0.42 * 1.08
    assert 0.0 <= figures.below_knee_all <= figures.below_knee <= 0.02


def test_cold_ferrite_with_more_current_is_lost(
    machine: Machine, section: CrossSection, work: MagnetWork
) -> None:
    """Five times rated current opposes far beyond the knee: the check must bite."""
    duty = machine.design.duty.model_copy(update={"demagnetising_current_a": 150.0})
    design = machine.design.model_copy(update={"duty": duty})
    harsh = dataclasses.replace(machine, design=design)
    model = model_of(harsh, section, mesh_section(section, MeshSettings(scale=2.0)))
    with Crew(make_desk, 0) as crew:
        crew.everywhere(type(crew.own).take_model, model)
        lost = magnet_work(harsh, section, model, crew)
    assert min(state.share_below for state in lost.states) > 0.9
    assert all("below the knee" in line for line in lost.cautions(harsh)[:5])
    assert lost.record.psi == pytest.approx(work.record.psi, abs=1e-6)  # no load is the same


def test_every_figure_of_magnets_has_an_error_or_a_reason(
    machine: Machine, section: CrossSection, work: MagnetWork
) -> None:
    """Errors of all that fields give, each under a tenth but those of shares near nothing."""
    figures = work.figures(machine, section, I_D, I_Q)
    errors = work.error_bars(machine, figures, I_D, I_Q)
    for figure in figures_of(figures):
        assert (figure.key in errors) != bool(figure.exact), figure.key
        if "below_knee" not in figure.key and figure.key in errors:
            assert 0.0 < errors[figure.key] < 0.1 * abs(figure.value), figure.key


def test_verdict_tells_magnets_only_where_there_are_any(
    machine: Machine, section: CrossSection, work: MagnetWork
) -> None:
    """Keys of magnets stand in the record of a machine that has them, and in no other."""
    plain = invented.verdict()
    figures = work.figures(machine, section, I_D, I_Q)
    full = dataclasses.replace(
        plain,
        magnets=(figures,),
        magnet_states=work.states,
        finer_states=work.finer_states,
    )
    new = set(all_figures(full)) - set(all_figures(plain))
    assert {"no_load_linkage_fundamental_vs", "back_emf_v", "magnet_below_knee_percent"} <= new
    empty = TorqueSpectrum((), *(work.record.psi[:0],) * 2)
    with_magnets, without = (verdict_record(v, empty) for v in (full, plain))
    assert all(m["flux_density_mean_t_error"] > 0.0 for m in with_magnets["magnets"])
    assert [m["magnet"] for m in with_magnets["magnets"]] == [s.name for s in work.states]
    assert "magnets" not in without
    assert new <= set(with_magnets) - set(without)


def test_files_of_the_no_load(work: MagnetWork, tmp_path: Path) -> None:
    """180 places of the period, and its orders up to 60 with 100 % for the first."""
    work.write(tmp_path)
    rows = (tmp_path / "no_load.csv").read_text().splitlines()
    assert rows[0] == "angle_el_deg,psi_phase_vs,torque_nm"
    assert len(rows) == 181
    orders = (tmp_path / "no_load_orders.csv").read_text().splitlines()
    assert len(orders) == 61
    assert float(orders[1].split(",")[2]) == 100.0
