"""Error bars of quick figures, where a study asks for them by `errors = true`.

The same estimates as of `assess`: the field is carried to a mesh four times as fine at a few rotor
positions (`solver/estimate.py`), the stress is solved on one (`solver/estimate_stress.py`). Two
things are added, as a quick design's figures stand for those of the best angle and all positions:

1. Linkages, saliency, power factor and voltage change with the current angle, which is off too. By
   how much follows from the slopes of the linkages (`linkage_slope`, exact for the mesh).
2. Ripple is off by what its few positions do not see of the crests: by a share of what the
   interpolant adds to the samples, `BETWEEN`.

Cost: 0.9 of the quick design. How true they are: designs/studies/README.md.
"""

from dataclasses import replace

import numpy as np

from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection
from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.winding import winding_table
from lamwright.postprocess.error_bars import magnetic_errors, stress_errors, terminal_errors
from lamwright.postprocess.figure_errors import differences
from lamwright.postprocess.operating import dq_currents, saliency_ratio
from lamwright.postprocess.ribs import rib_report
from lamwright.postprocess.skew import mean_change, turned_back
from lamwright.postprocess.summary import terminal_figures
from lamwright.solver.chains import linkage_slope
from lamwright.solver.estimate import FieldErrors, errors_of, sample_places
from lamwright.solver.estimate_step import changes, fine_level
from lamwright.solver.estimate_stress import finer_stress, peak_errors

from .study_quick import STRESS, QuickField, QuickWork

# Of the difference between ripple by interpolant and by samples; chosen on seven random machines.
BETWEEN = 0.5
# Of the angle's error bar, which is near a bound: on these the angle was off by 0.01 to 0.6 of it.
TURNED = 0.5
WITH_ANGLE = ("psi_d_vs", "psi_q_vs", "saliency_ratio", "power_factor", "terminal_voltage_v")


def quick_errors_of(machine: Machine, section: CrossSection, work: QuickWork) -> dict[str, float]:
    """Error bars of the quick figures by their keys, in their units."""
    known, magnetic = _field_errors(machine, section, work.field), work.magnetic
    between = BETWEEN * abs(magnetic.ripple - magnetic.ripple_of_samples)
    known = replace(known, ripple=known.ripple + between)
    finer = finer_stress(section, machine.rotor_steel, work.solution, STRESS)
    zones = peak_errors(section, work.solution, finer)
    report = rib_report(finer, section, 1e6 * machine.rotor_steel.yield_strength_mpa.value)
    bars = {
        **magnetic_errors(magnetic, known, work.field.magnet_psi_q),
        **terminal_errors(machine.design, magnetic, work.terminal, known),
        **stress_errors(work.ribs, report, zones),
    }
    turn = TURNED * np.deg2rad(bars["current_angle_deg"])
    by_angle = _changes_with_angle(machine, work, turn)
    return bars | {key: bars[key] + by_angle[key] for key in WITH_ANGLE}


def _field_errors(machine: Machine, section: CrossSection, field: QuickField) -> FieldErrors:
    """Error bars of the waveform from a few of its positions."""
    level = fine_level(field.model, section, winding_table(machine.design))
    offsets, pole_pairs = skew_offsets(machine.design), section.pole_pairs
    sampled = {
        place: mean_change(
            [changes(level, step[place]) for step in field.by_step], offsets, pole_pairs
        )
        for place in sample_places(field.means)
    }
    return errors_of(field.means, sampled, pole_pairs)


def _changes_with_angle(machine: Machine, work: QuickWork, turn: float) -> dict[str, float]:
    """By how much figures change, by key, if the current angle does by `turn` in rad."""
    field, magnetic, design = work.field, work.magnetic, machine.design
    slopes = []
    for step, offset in zip(field.found.last, skew_offsets(design), strict=True):
        for one in step:  # at the last angle tried, which is near
            slope = linkage_slope(field.model, one, -one.i_q, one.i_d)
            slopes.append(turned_back(*slope, -design.pole_pairs * offset))
    slope_d, slope_q = np.mean(slopes, axis=0).tolist()
    i_d, i_q = dq_currents(design.duty.rated_current_a, magnetic.gamma + turn)
    psi_d, psi_q = magnetic.psi_d + turn * slope_d, magnetic.psi_q + turn * slope_q
    moved = replace(
        magnetic,
        i_d=i_d,
        i_q=i_q,
        psi_d=psi_d,
        psi_q=psi_q,
        saliency=saliency_ratio(i_d, i_q, psi_d, psi_q - field.magnet_psi_q),
    )
    return differences((magnetic, work.terminal), (moved, terminal_figures(design, moved)))
