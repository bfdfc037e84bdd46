"""The ideal anisotropic rotor in a design's stator: what barriers and ribs could reach at best.

Same stator, gap, shaft, stack and steel; the rotor is one block of endlessly thin sheets and gaps
along the flux lines of a solid disc, without ribs, its sheets saturating as the steel does
(`solver.laminate`). The share of gaps is searched for most torque at rated current, each at its
own best current angle: three shares and the vertex of their parabola. It is a yardstick and no
machine: such a rotor has nothing that holds it together. Nor is it a bound that no design can pass:
lines of another family may do better by little.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial

import numpy as np

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import Machine
from lamwright.geometry.round_rotor import round_rotor_section
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.operating import (
    TurnedLinkage,
    best_angle,
    dq_currents,
    mean_linkage_slope,
    saliency_ratio,
    search_positions,
)
from lamwright.solver.anisotropic import (
    LaminatedPoint,
    laminated_model,
    laminated_slope,
    solve_laminated,
)
from lamwright.solver.field import MagneticModel
from lamwright.solver.laminate import Laminate
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings

from .desk import Desk
from .point import model_of
from .pool import Crew

SHARES = (0.2, 0.35, 0.5)  # of gaps; most torque of the demonstration stators lies between
LEAST_SHARE, MOST_SHARE = 0.1, 0.65
# Torque and saliency within 0.04 % of twice as fine (24 slots, share 0.35); 0.6 s a share.
MESH = MeshSettings(scale=2.0)


@dataclass(frozen=True, slots=True)
class IdealRotor:
    """The ideal rotor at its own best share of gaps and current angle, at one current."""

    gap_share: float
    i_d: float  # A
    i_q: float
    psi_d: float  # V s, means over positions, without end winding
    psi_q: float
    torque: float  # N m, mean
    tried: tuple[tuple[float, float], ...]  # share of gaps and its torque

    @property
    def saliency(self) -> float:
        """Apparent saliency at the currents."""
        return saliency_ratio(self.i_d, self.i_q, self.psi_d, self.psi_q)


def round_model(machine: Machine, section: CrossSection) -> MagneticModel:
    """The magnetic model of the machine's stator round a solid rotor of its steel."""
    solid = round_rotor_section(machine.design, section)
    return model_of(machine, solid, mesh_section(solid, MESH))


def ideal_rotor(
    design: MachineDesign, model: MagneticModel, shaft_radius: float, crew: Crew[Desk]
) -> IdealRotor:
    """The ideal rotor at rated current.

    Args:
        design: its poles, slots and rated current count.
        model: of `round_model`.
        shaft_radius: in m.
        crew: shares the work.

    Raises:
        NotConverged: an iteration did not end; with its history.
    """
    tasks = [partial(_at_share, design, model, shaft_radius, share) for share in SHARES]
    found = crew.share(tasks, lambda count: None)
    share = parabola_vertex(SHARES, [one.torque for one in found])
    found.append(at_share(design, model, shaft_radius, share))
    best = max(found, key=lambda one: one.torque)
    tried = tuple(sorted((one.gap_share, one.torque) for one in found))
    return IdealRotor(
        best.gap_share, best.i_d, best.i_q, best.psi_d, best.psi_q, best.torque, tried
    )


def parabola_vertex(shares: Sequence[float], torques: Sequence[float]) -> float:
    """Share of most torque by the parabola through three, kept within what is sensible."""
    bend, slope, _ = np.polyfit(shares, torques, 2)
    if bend >= 0.0:
        return LEAST_SHARE if torques[0] > torques[-1] else MOST_SHARE
    return float(np.clip(-0.5 * slope / bend, LEAST_SHARE, MOST_SHARE))


def at_share(
    design: MachineDesign, model: MagneticModel, shaft_radius: float, share: float
) -> IdealRotor:
    """The ideal rotor with one share of gaps, at the best current angle of rated current."""
    pole_pairs, current = design.pole_pairs, design.duty.rated_current_a
    laminated = laminated_model(model, Laminate(model.iron.rotor_law, share), shaft_radius)
    positions = search_positions(pole_pairs, design.stator.slots).tolist()
    last: list[LaminatedPoint] = []

    def torque_of(gamma: float) -> tuple[float, float]:
        i_d, i_q = dq_currents(current, gamma)
        values = []
        for k, position in enumerate(positions):
            start = last[k].a if k < len(last) else None
            point = solve_laminated(laminated, i_d, i_q, position, start)
            last[k : k + 1] = [point]
            # d i_d/d gamma = -i_q, d i_q/d gamma = i_d at constant current
            slopes = laminated_slope(laminated, point, -i_q, i_d)
            values.append((point.psi_d, point.psi_q, *slopes))
        mean = TurnedLinkage(*np.mean(values, axis=0).tolist())
        return mean_linkage_slope(pole_pairs, current, gamma, mean)

    gamma = best_angle(torque_of).gamma
    torque, _ = torque_of(gamma)
    i_d, i_q = dq_currents(current, gamma)
    psi_d, psi_q = (
        math.fsum(v) / len(last) for v in zip(*((p.psi_d, p.psi_q) for p in last), strict=True)
    )
    return IdealRotor(share, i_d, i_q, psi_d, psi_q, torque, ((share, torque),))


def _at_share(
    design: MachineDesign, model: MagneticModel, shaft_radius: float, share: float, _: Desk
) -> IdealRotor:
    return at_share(design, model, shaft_radius, share)
