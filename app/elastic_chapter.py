"""The elastic ribs at overspeed: figures, rows and the picture of the stress."""

from functools import partial
from pathlib import Path

from lamwright.postprocess.detail_cautions import detail_cautions
from lamwright.postprocess.error_bars import stress_errors
from lamwright.postprocess.magnet_cautions import LOAD_LEFT_OUT
from lamwright.postprocess.quantities import scaled_by_key
from lamwright.postprocess.rib_figures import mean_yield, rotor_errors, rotor_figures
from lamwright.postprocess.rib_tables import elastic_errors, elastic_figures
from lamwright.postprocess.summary import stress_figures
from lamwright.solver.estimate_stress import BEYOND

from .ribbed import Ribbed, RibChapter


def elastic_chapter(ribbed: Ribbed, stage: Path) -> RibChapter:
    """Figures at overspeed with their error bars, a row for each rib, and the picture."""
    stress, section = ribbed.stress, ribbed.section
    rotor = rotor_figures(section, stress.report)
    if ribbed.pictures and not ribbed.has_stress_picture:
        from lamwright.postprocess.figures import stress_figure, write_figure

        name = ribbed.machine.design.name
        compose = partial(stress_figure, name, section, stress.solution, stress.report)
        write_figure(stage, "stress", compose)
    mean = mean_yield(stress.report)
    means = {}
    for own, finer in zip(mean, mean_yield(stress.finer), strict=False):
        means = scaled_by_key(own, {"speed": BEYOND * abs(finer.speed - own.speed)})
    return RibChapter(
        figures=(stress_figures(stress.report), rotor, *mean),
        cautions=(
            *(() if ribbed.machine.magnet is None else (LOAD_LEFT_OUT,)),
            *detail_cautions(section, ribbed.machine.rotor_steel, ribbed.overspeed),
        ),
        of_ribs=elastic_figures(section, stress.report),
        rib_errors=elastic_errors(section, stress.report, stress.finer, stress.zone_errors),
        errors={
            **stress_errors(stress.report, stress.finer, stress.zone_errors),
            **scaled_by_key(rotor, rotor_errors(stress.report, stress.finer)),
            **means,
        },
    )
