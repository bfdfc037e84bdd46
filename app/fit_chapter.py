"""The chapter of `ribs` on the shaft's fit, heat and the magnets' load."""

from pathlib import Path

from lamwright.geometry.errors import NotConverged
from lamwright.postprocess.figure_errors import lacking_errors
from lamwright.postprocess.fit_figures import (
    fit_cautions,
    fit_figures,
    hot_gap,
    pressed_errors,
    pressed_rib_errors,
    pressed_ribs,
)
from lamwright.postprocess.fit_study import fit_study

from .ribbed import Ribbed, RibChapter

NO_FIT = "pressure and loosening of the shaft's fit: needs [rotor.fit]"
NO_HEAT = "air gap left hot, stress of heat: needs [hot], the temperatures of rotor and stator"


def fit_chapter(ribbed: Ribbed, stage: Path) -> RibChapter:
    """What the shaft, heat and magnets add to the stress of the spin, where they are stated."""
    machine = ribbed.machine
    design = machine.design
    lacking = [NO_FIT] if design.rotor.fit is None else []
    if design.hot is None:
        lacking.append(NO_HEAT)
    has_magnets = any(region.material == "magnet" for region in ribbed.section.rotor)
    if len(lacking) == 2 and not has_magnets:
        return RibChapter((), not_given=tuple(lacking))
    try:
        study = fit_study(
            machine,
            ribbed.section,
            ribbed.stress.solution.mesh,
            ribbed.maximum_speed,
            ribbed.overspeed,
        )
    except NotConverged as error:
        return RibChapter((), not_given=(*lacking, f"stress with fit, heat and magnets: {error}"))
    if design.hot is not None and isinstance(why := hot_gap(study, machine), str):
        lacking.append(why)
    if ribbed.pictures and design.rotor.fit is not None:
        from lamwright.postprocess.figures_fit import write_fit

        write_fit(stage, design.name, study)
    figures = fit_figures(study, machine)
    errors = pressed_errors(study, machine)
    return RibChapter(
        figures=figures,
        cautions=tuple(fit_cautions(study, machine, ribbed.overspeed)),
        not_given=tuple(lacking),
        of_ribs=pressed_ribs(study),
        rib_errors=pressed_rib_errors(study),
        errors=errors,
        without_error=lacking_errors(figures, errors),
        facts={"worst_pressed_state": study.worst.name},
    )
