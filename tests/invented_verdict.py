"""Invented figures of a verdict, for tests of what is made of them; no real machine."""

import dataclasses

from lamwright.geometry.design import LimitsDesign
from lamwright.postprocess.quantities import OutlineFigures
from lamwright.postprocess.verdict import (
    MagneticFigures,
    PhaseTime,
    SolverFigures,
    StressFigures,
    TerminalFigures,
    Verdict,
    judged,
)

LIMITS = LimitsDesign(
    least_torque_nm=9.0,
    most_ripple_percent=25.0,
    least_saliency_ratio=3.0,
    least_yield_margin=1.2,
)
MAGNETIC = MagneticFigures(
    torque=10.0,
    ripple=0.2,
    saliency=4.0,
    gamma=1.0,
    current=12.0,
    i_d=6.5,
    i_q=10.1,
    psi_d=0.45,
    psi_q=0.11,
    torque_linkage=10.01,
    torque_difference=0.001,
    coenergy_difference=0.004,
    ripple_of_samples=0.195,
)
TERMINAL = TerminalFigures(
    power_factor=0.62,
    line_voltage=180.0,
    supply_voltage=400.0,
    speed=157.0,
    shaft_power=1570.0,
    copper_loss=210.0,
    resistance=1.0,
    end_inductance=1.3e-3,
)
STRESS = StressFigures(
    peak=250e6,
    tension=90e6,
    lamination_peak=250e6,
    yield_margin=1.52,
    yield_strength=380e6,
    speed=754.0,
    yield_speed=1200.0,
    growth=8e-6,
    gap_left=0.392e-3,
)
OUTLINE = OutlineFigures(
    area=3e-3,
    perimeter=1.3,
    area_difference=0.0,
    perimeter_difference=1e-16,
    vertex_difference=1e-17,
)
SOLVER = SolverFigures(
    field_elements=16000,
    field_unknowns=33000,
    field_solutions=42,
    newton_steps=210,
    newton_most=15,
    residual=1e-8,
    positions=30,
    stress_elements=9000,
    stress_unknowns=38000,
    stress_refinements=2,
)


def verdict(
    magnetic: MagneticFigures = MAGNETIC, stress: StressFigures = STRESS, **changed: object
) -> Verdict:
    """The invented verdict, judged by `LIMITS`, with some of its fields changed."""
    made = Verdict(
        design_name="invented",
        design_hash="0" * 64,
        version="0.0.0",
        outline_dxf="lamination.dxf",
        tolerance="normal",
        magnetic=magnetic,
        terminal=TERMINAL,
        stress=stress,
        outline=OUTLINE,
        solver=SOLVER,
        outcomes=judged(LIMITS, magnetic, stress),
        cautions=("invented figures",),
        times=(PhaseTime("mesh", 0.5), PhaseTime("total", 4.0)),
    )
    return dataclasses.replace(made, **changed)
