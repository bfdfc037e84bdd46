"""Figures of a verdict from what the rooms before have computed."""

import math
from collections.abc import Sequence

import numpy as np

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.winding import end_winding_inductance, phase_resistance
from lamwright.solver.types import FieldSolution, PlanarMesh, SectorMesh, StressSolution

from .operating import saliency_ratio, terminal_state
from .ribs import RibReport
from .torque import TorqueWaveform, coenergy_difference, ripple, ripple_of_samples
from .verdict import RPM, MagneticFigures, SolverFigures, StressFigures, TerminalFigures


def magnetic_figures(waveform: TorqueWaveform, magnet_psi_q: float = 0.0) -> MagneticFigures:
    """Figures of a waveform whose currents are those of the operating point.

    Args:
        waveform: at the operating point.
        magnet_psi_q: mean psi_q at no load in V s, which is left out of the saliency.
    """
    w = waveform
    psi_d, psi_q = float(np.mean(w.psi_d)), float(np.mean(w.psi_q))
    return MagneticFigures(
        torque=w.mean,
        ripple=ripple(w),
        saliency=saliency_ratio(w.i_d, w.i_q, psi_d, psi_q - magnet_psi_q),
        gamma=math.atan2(w.i_q, w.i_d),
        current=math.hypot(w.i_d, w.i_q),
        i_d=w.i_d,
        i_q=w.i_q,
        psi_d=psi_d,
        psi_q=psi_q,
        torque_linkage=w.mean_linkage,
        torque_difference=w.mean / w.mean_linkage - 1.0,
        coenergy_difference=coenergy_difference(w),
        ripple_of_samples=ripple_of_samples(w),
    )


def terminal_figures(design: MachineDesign, magnetic: MagneticFigures) -> TerminalFigures:
    """Terminal quantities at rated speed, from mean linkages and two formulas."""
    speed = design.duty.rated_speed_rpm / RPM  # mechanical rad/s
    resistance, end_inductance = phase_resistance(design), end_winding_inductance(design)
    state = terminal_state(
        i_d=magnetic.i_d,
        i_q=magnetic.i_q,
        psi_d=magnetic.psi_d,
        psi_q=magnetic.psi_q,
        omega_e=design.pole_pairs * speed,
        resistance=resistance,
        end_inductance=end_inductance,
    )
    return TerminalFigures(
        power_factor=state.power_factor,
        line_voltage=state.line_voltage,
        supply_voltage=design.duty.supply_voltage_v,
        speed=speed,
        shaft_power=magnetic.torque * speed,
        copper_loss=state.copper_loss,
        resistance=resistance,
        end_inductance=end_inductance,
    )


def stress_figures(report: RibReport) -> StressFigures:
    """Figures of the rotor lamination; all stress grows with the square of the speed."""
    return StressFigures(
        peak=max(row.peak for row in report.ribs),
        tension=max(row.mean_tension for row in report.ribs),
        lamination_peak=report.peak,
        yield_margin=report.yield_margin,
        yield_strength=report.yield_strength,
        speed=report.speed,
        yield_speed=report.speed * math.sqrt(report.yield_margin),
        growth=report.growth_max,
        gap_left=report.gap_left,
    )


def solver_figures(
    sector: SectorMesh,
    unknowns: int,
    fields: Sequence[FieldSolution],
    positions: int,
    stress: StressSolution,
) -> SolverFigures:
    """Size of the meshes and course of all solutions of a run."""
    steps = [field.newton.steps for field in fields]
    return SolverFigures(
        field_elements=_elements(sector.rotor) + _elements(sector.stator),
        field_unknowns=unknowns,
        field_solutions=len(fields),
        newton_steps=sum(steps),
        newton_most=max(steps),
        residual=max(field.newton.history[-1] for field in fields),
        positions=positions,
        stress_elements=_elements(stress.mesh),
        stress_unknowns=2 * len(stress.mesh.nodes),
        stress_refinements=stress.refinements,
    )


def _elements(mesh: PlanarMesh) -> int:
    return len(mesh.elements)
