"""The spinning lamination as an elastic-plastic body: overspeed and back, start-stop, collapse.

The rotor's own period with coupled sides and a free bore, as in `rotor_stress`, on a mesh at hand
(that of the elastic solution has its small elements where ribs yield). The load's factor is the
square of the speed over that of `unit_speed`. Not in it: a shaft's press fit, magnets, heat, and
the growth's own effect on the load (radii grow by parts of a thousand before collapse).
"""

from dataclasses import dataclass

import numpy as np

from lamwright.geometry.design import SteelCard
from lamwright.geometry.section import CrossSection, rotor_cell

from .elastic import centrifugal_force, elastic_body, without_rigid_motion
from .plastic_kernel import PlasticBody, PlasticState, plastic_body
from .return_mapping import Criterion, YieldCurve, perfectly_plastic
from .rotor_stress import elastic_material, sides_of, spin_centre
from .supports import unsupported, with_coupled_sides, without_drift
from .types import FloatArray, PlanarMesh


@dataclass(frozen=True, slots=True, eq=False)
class SpinningBody:
    """A lamination that can yield, and what spinning at `unit_speed` pulls at it."""

    section: CrossSection  # the rotor's own period
    plastic: PlasticBody
    force: FloatArray  # (n_node, 2), N/m at `unit_speed`
    unit_speed: float  # rad/s

    def factor(self, speed: float) -> float:
        """The load's factor at a speed in rad/s."""
        return (speed / self.unit_speed) ** 2

    def speed(self, factor: float) -> float:
        """The speed in rad/s at a factor of the load."""
        return float(self.unit_speed * np.sqrt(factor))

    def displacement(self, state: PlasticState) -> FloatArray:
        """Displacement (n_node, 2) in m; that of a whole ring less its rigid motion."""
        moved = self.plastic.displacement(state)
        if self.section.is_full_circle:
            return without_rigid_motion(self.plastic.body, moved)
        return moved


def yield_curve(card: SteelCard) -> YieldCurve:
    """The card's hardening curve in SI; perfectly plastic at its yield strength without one."""
    if card.hardening is None:
        return perfectly_plastic(1e6 * card.yield_strength_mpa.value)
    curve = card.hardening
    return YieldCurve(np.array(curve.plastic_strain), 1e6 * np.array(curve.true_stress_mpa))


def spinning_body(
    section: CrossSection,
    mesh: PlanarMesh,
    card: SteelCard,
    unit_speed: float,
    curve: YieldCurve | None = None,
    criterion: Criterion = "von Mises",
) -> SpinningBody:
    """The rotor lamination of `section` on `mesh`.

    Args:
        section: exact outlines.
        mesh: of the rotor's own period, e.g. that of a `StressSolution`.
        card: elastic constants, density and, unless `curve` is given, the yield strength.
        unit_speed: rad/s at which the load's factor is 1.
        curve: yield stress against plastic strain; perfectly plastic by default.
        criterion: yield surface.
    """
    section = rotor_cell(section)
    sides = sides_of(section, mesh)
    body = elastic_body(mesh, elastic_material(card))
    supports = with_coupled_sides(unsupported(mesh), mesh, sides)
    supports = without_drift(supports, mesh, sides)
    law = curve or perfectly_plastic(1e6 * card.yield_strength_mpa.value)
    return SpinningBody(
        section=section,
        plastic=plastic_body(body, supports, law, criterion),
        force=centrifugal_force(body, unit_speed, spin_centre(body, sides)),
        unit_speed=unit_speed,
    )
