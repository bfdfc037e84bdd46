"""The chapter of `ribs` on fit, heat and magnets: what it gives, and what it says is missing."""

from dataclasses import replace
from types import SimpleNamespace

import pytest

from lamwright.app.fit_chapter import NO_FIT, NO_HEAT, fit_chapter
from lamwright.app.progress import Stopwatch, silent
from lamwright.app.ribbed import Ribbed, RibWishes
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import Machine, read_machine
from lamwright.geometry.section import rotor_cell
from lamwright.postprocess.quantities import figures_of
from lamwright.solver.mesh import mesh_lamination
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.rotor_stress import StressSettings
from tests.broken_designs import DESIGNS


def ribbed(machine: Machine, pictures: bool = False) -> Ribbed:
    """On a coarse mesh, whose own stress the chapter does not ask for."""
    section = rotor_cell(cross_section(machine.design))
    mesh = mesh_lamination(section, MeshSettings(scale=2.5))
    stress = SimpleNamespace(solution=SimpleNamespace(mesh=mesh))
    watch = Stopwatch(silent, {})
    return Ribbed(machine, section, stress, StressSettings(), watch, RibWishes(), pictures)


def test_a_design_without_fit_heat_and_magnets_has_none(tmp_path):
    """Two lines name what is missing, and no figure stands."""
    chapter = fit_chapter(ribbed(read_machine(DESIGNS / "demo_24s4p_arc.toml")), tmp_path)
    assert chapter.figures == ()
    assert chapter.not_given == (NO_FIT, NO_HEAT)


@pytest.mark.slow
def test_the_shipped_magnet_machine_has_all(tmp_path):
    """Fit, heat and magnets stated: nothing missing, a row a rib, the picture, the gap hot."""
    item = ribbed(read_machine(DESIGNS / "demo_36s4p_magnet.toml"), pictures=True)
    chapter = fit_chapter(item, tmp_path)
    figures = {
        figure.key: figure.value for group in chapter.figures for figure in figures_of(group)
    }
    assert chapter.not_given == ()
    assert len(chapter.of_ribs) == len(item.section.ribs)
    assert {path.name for path in tmp_path.iterdir()} == {"fit_pressure.png", "fit_pressure.svg"}
    assert figures["fit_pressure_rest_least_mpa"] < figures["fit_pressure_rest_mpa"]
    assert figures["fit_pressure_overspeed_mpa"] < figures["fit_pressure_rest_mpa"]
    assert figures["fit_opens_rpm"] < figures["fit_lost_rpm"]
    assert 0.0 < figures["gap_hot_fast_mm"] < figures["gap_hot_rest_mm"] < 0.5
    # 12 x 3.6 mm of 4900 kg/m3 over 0.97 at 47 mm and 4800 rpm: some 2.4 N/mm (p = m r w2).
    assert figures["magnet_load_n_per_mm"] == pytest.approx(2.4, rel=0.2)
    assert set(chapter.errors) <= set(figures)


def test_a_magnet_that_would_tip_is_told_and_has_no_figure(tmp_path, monkeypatch):
    """Contact that is not found: one line with the reason, and no figure (issue 7, point 7)."""
    from lamwright.geometry.errors import NotConverged

    def fails(*_: object) -> None:
        raise NotConverged("magnet_1: it would tip over", ())

    monkeypatch.setattr("lamwright.app.fit_chapter.fit_study", fails)
    item = ribbed(read_machine(DESIGNS / "demo_36s4p_magnet.toml"))
    chapter = fit_chapter(replace(item, pictures=False), tmp_path)
    assert chapter.figures == ()
    assert chapter.of_ribs == ()
    assert any("magnet_1: it would tip over" in line for line in chapter.not_given)
