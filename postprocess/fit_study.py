"""The lamination on its shaft, with its magnets, cold and hot, at rest and at overspeed.

Each state is the stress of solver.pressed on the mesh that the spin alone was refined for, its
bore made finer; how far the worst state is off is told by the same on four times the elements.
Under a magnet, where the mesh does not resolve the contact, no peak is taken.
Source: Lame's rings generalised to any bore by finite elements; heat as a free strain (derived).
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from lamwright.geometry.design import SteelCard
from lamwright.geometry.design_file import Machine
from lamwright.geometry.design_fit import FitDesign, HotDesign
from lamwright.geometry.errors import NotConverged
from lamwright.geometry.hot_steel import steel_at
from lamwright.geometry.section import CrossSection, rotor_cell
from lamwright.solver.elastic import ElasticMaterial
from lamwright.solver.pressed import Fit, Heat, Pressed, pressed, with_fine_bore
from lamwright.solver.pressed_stress import Loosening, PressedStress, loosening, stress_at
from lamwright.solver.refine import refined
from lamwright.solver.rotor_stress import coarser_lamination, elastic_material, lamination_circles
from lamwright.solver.shaft import Shaft
from lamwright.solver.types import PlanarMesh

from .ribs import RibReport, rib_report

MPA, UM, GPA = 1e6, 1e-6, 1e9


@dataclass(frozen=True, slots=True, eq=False)
class PressedState:
    """One state: how hot, how fast, and what that does to the ribs."""

    name: str
    is_hot: bool
    stress: PressedStress
    report: RibReport  # against the yield strength at that temperature


@dataclass(frozen=True, slots=True, eq=False)
class FitStudy:
    """All states of a rotor, and when its fit is lost."""

    section: CrossSection
    states: tuple[PressedState, ...]
    finer: RibReport  # of the worst state, on four times the elements
    cold: Pressed
    loose_cold: Loosening
    loose_hot: Loosening | None  # without temperatures there is none
    needs_expansion: bool  # temperatures are stated, the card has no expansion
    coarser: "FitStudy | None"  # the same on a coarser mesh; None where that finds no contact

    @property
    def worst(self) -> PressedState:
        """The state of the least yield margin."""
        return min(self.states, key=lambda state: state.report.yield_margin)

    def state(self, name: str) -> PressedState | None:
        """The state of a name, where there is one."""
        return next((state for state in self.states if state.name == name), None)


def fit_study(
    machine: Machine, section: CrossSection, mesh: PlanarMesh, maximum: float, overspeed: float
) -> FitStudy:
    """All states of the rotor.

    Args:
        machine: with `rotor.fit`, `hot` or magnets.
        section: its cross-section.
        mesh: of the lamination, refined for the stress of the spin.
        maximum: speed in service, rad/s.
        overspeed: rad/s.

    Raises:
        NotConverged: where a contact was not found, or a magnet tips over.
    """
    section = rotor_cell(section)
    design = machine.design
    hot = design.hot
    needs_expansion = hot is not None and machine.rotor_steel.expansion_um_per_m_k is None
    if needs_expansion:
        hot = None
    speeds = (
        {"overspeed": overspeed}
        if design.rotor.fit is None and hot is None
        else {"rest": 0.0, "maximum speed": maximum, "overspeed": overspeed}
    )
    mesh = with_fine_bore(section, mesh)
    own = _study(machine, section, mesh, hot, speeds, needs_expansion)
    worst = own.worst
    every = np.arange(len(mesh.elements))
    fine_mesh = refined(mesh, every, lamination_circles(section))
    fine = _pressed(machine, section, fine_mesh, hot if worst.is_hot else None)
    finer = _state(machine, fine, worst.is_hot, "", worst.report.speed)
    try:
        coarse = with_fine_bore(section, coarser_lamination(section))
        coarser = _study(machine, section, coarse, hot, speeds, needs_expansion)
    except NotConverged:
        return replace(own, finer=finer.report)
    return replace(own, finer=finer.report, coarser=coarser)


def _study(
    machine: Machine,
    section: CrossSection,
    mesh: PlanarMesh,
    hot: HotDesign | None,
    speeds: Mapping[str, float],
    needs_expansion: bool,
) -> FitStudy:
    """All states on one mesh; its worst is its own `finer`."""
    cold = _pressed(machine, section, mesh, None)
    items = {False: cold}
    if hot is not None:
        items[True] = _pressed(machine, section, mesh, hot)
    states = tuple(
        _state(machine, item, is_hot, place, speed)
        for is_hot, item in items.items()
        for place, speed in speeds.items()
    )
    return FitStudy(
        section=section,
        states=states,
        finer=min((state.report for state in states), key=lambda report: report.yield_margin),
        cold=cold,
        loose_cold=loosening(cold),
        loose_hot=loosening(items[True]) if hot is not None else None,
        needs_expansion=needs_expansion,
        coarser=None,
    )


def _pressed(
    machine: Machine, section: CrossSection, mesh: PlanarMesh, hot: HotDesign | None
) -> Pressed:
    design, magnet = machine.design, machine.magnet
    magnets, density = [], 0.0
    if magnet is not None:
        magnets = [region for region in section.rotor if region.material == "magnet"]
        # Magnets fill the stack's length, sheets only their share of it.
        density = magnet.density_kg_per_m3.value / design.rotor.stacking_factor
    card = rotor_card(machine, is_hot=hot is not None)
    return pressed(
        section,
        mesh,
        elastic_material(card),
        None if design.rotor.fit is None else shaft_fit(design.rotor.fit),
        None if hot is None else rotor_heat(card, hot),
        (magnets, density),
    )


def rotor_card(machine: Machine, *, is_hot: bool) -> SteelCard:
    """The rotor's steel at its hottest place, or as cold as the drawing."""
    hot = machine.design.hot
    if hot is None:
        return machine.rotor_steel
    return steel_at(
        machine.rotor_steel, hot.hottest_rotor_c if is_hot else hot.reference_temperature_c
    )


def shaft_fit(fit: FitDesign) -> Fit:
    """The design's fit in SI."""
    material = ElasticMaterial(
        youngs_modulus=GPA * fit.shaft_youngs_modulus_gpa,
        poissons_ratio=fit.shaft_poissons_ratio,
        density=fit.shaft_density_kg_per_m3,
    )
    bore = 0.5e-3 * fit.shaft_bore_diameter_mm
    shaft = Shaft(material, bore, 1e-6 * fit.shaft_expansion_um_per_m_k)
    return Fit(shaft, UM * fit.radial_interference_um)


def rotor_heat(card: SteelCard, hot: HotDesign) -> Heat:
    """The design's temperatures over its reference."""
    assert card.expansion_um_per_m_k is not None
    return Heat(
        expansion=1e-6 * card.expansion_um_per_m_k.value,
        bore=hot.rotor_temperature_c - hot.reference_temperature_c,
        rim_over_bore=hot.rim_over_bore_k,
        shaft=hot.shaft_c - hot.reference_temperature_c,
    )


def _state(machine: Machine, item: Pressed, is_hot: bool, place: str, speed: float) -> PressedState:
    stress = stress_at(item, speed)
    level = np.where(stress.resolved, stress.solution.von_mises, 0.0)
    judged = replace(stress.solution, von_mises=level, peak=float(level.max()))
    strength = MPA * rotor_card(machine, is_hot=is_hot).yield_strength_mpa.value
    name = f"{'hot' if is_hot else 'cold'} at {place}"
    return PressedState(name, is_hot, stress, rib_report(judged, item.section, strength))
