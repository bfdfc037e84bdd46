"""The rotor beyond yield: what an overspeed test leaves, where it bursts, start and stop."""

from functools import partial
from pathlib import Path

from lamwright.geometry.errors import NotConverged
from lamwright.postprocess.plastic_figures import (
    burst_figures,
    left_figures,
    plastic_rib_figures,
)
from lamwright.postprocess.plastic_ribs import plastic_study
from lamwright.postprocess.plastic_tables import plastic_cautions

from .ribbed import Ribbed, RibChapter


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
    if ribbed.pictures and report.yielded_share > 0.0:
        from lamwright.postprocess.figures import plastic_figure, write_figure

        compose = partial(plastic_figure, machine.design.name, section, study)
        write_figure(stage, "plastic", compose)
    lost = "growth left after the overspeed test: by limit load the rotor does not survive it"
    return RibChapter(
        figures=(burst_figures(report), *left_figures(report)),
        cautions=plastic_cautions(report, section),
        not_given=() if report.survives else (lost,),
        of_ribs=plastic_rib_figures(report),
        facts={
            "overspeed_test_survived": report.survives,
            "start_stop": report.regime,
            "steel_hardens": report.hardens,
        },
    )
