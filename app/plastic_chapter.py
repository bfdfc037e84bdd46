"""The rotor beyond yield: what an overspeed test leaves, where it bursts, start and stop."""

from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.errors import NotConverged
from lamwright.postprocess.figure_errors import differences, lacking_errors
from lamwright.postprocess.plastic_figures import (
    burst_figures,
    left_figures,
    plastic_rib_figures,
    rib_differences,
)
from lamwright.postprocess.plastic_ribs import PlasticReport, plastic_study
from lamwright.postprocess.plastic_tables import plastic_cautions
from lamwright.solver.rotor_stress import coarser_lamination, stress_on

from .ribbed import Ribbed, RibChapter

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


def plastic_chapter(ribbed: Ribbed, stage: Path) -> RibChapter:
    """Growth left, plastic zones, burst by limit load with the mean hoop beside it, shakedown.

    A picture only where something yields.
    """
    machine, section = ribbed.machine, ribbed.section
    try:
        study = plastic_study(
            section,
            ribbed.stress.solution,
            machine.rotor_steel,
            ribbed.overspeed,
            ribbed.maximum_speed,
        )
    except NotConverged as error:
        return RibChapter((), (), (f"growth left, burst and start-stop: {error}",))
    report = study.report
    figures: tuple[DataclassInstance, ...] = (burst_figures(report), *left_figures(report))
    coarser = _coarser(ribbed)
    errors: dict[str, float] = {}
    of_ribs: tuple[dict[str, float], ...] = ()
    if coarser is not None:
        errors = differences(figures, (burst_figures(coarser), *left_figures(coarser)))
        pairs = zip(plastic_rib_figures(report), plastic_rib_figures(coarser), strict=True)
        of_ribs = tuple(rib_differences(*pair) for pair in pairs)
    if ribbed.pictures and report.yielded_share > 0.0:
        from lamwright.postprocess.figures import plastic_figure, write_figure

        compose = partial(plastic_figure, machine.design.name, section, study)
        write_figure(stage, "plastic", compose)
    lost = "growth left after the overspeed test: by limit load the rotor does not survive it"
    return RibChapter(
        figures=figures,
        cautions=plastic_cautions(report, section),
        not_given=() if report.survives else (lost,),
        of_ribs=plastic_rib_figures(report),
        rib_errors=of_ribs,
        errors=errors,
        without_error=lacking_errors(figures, errors),
        facts={
            "overspeed_test_survived": report.survives,
            "start_stop": report.regime,
            "steel_hardens": report.hardens,
        },
    )


def _coarser(ribbed: Ribbed) -> PlasticReport | None:
    """The same from a coarser mesh, which differs by more than the own one errs; None if lost."""
    machine, section = ribbed.machine, ribbed.section
    mesh = coarser_lamination(section)
    solution = stress_on(section, mesh, machine.rotor_steel, ribbed.overspeed, ribbed.settings)
    try:
        return plastic_study(
            section, solution, machine.rotor_steel, ribbed.overspeed, ribbed.maximum_speed
        ).report
    except NotConverged:
        return None
