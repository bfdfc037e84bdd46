"""Figures of the rotor on its shaft, hot and with its magnets, and what to be wary of."""

import math
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import Machine
from lamwright.solver.estimate_stress import BEYOND
from lamwright.solver.pressed_stress import Loosening

from .figure_errors import differences
from .fit_study import UM, FitStudy, PressedState
from .quantities import RPM, STATED, scaled_by_key, shown_as

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

MPA, MM = 1e-6, 1e3  # from SI
OVERSPEED = "overspeed"


@dataclass(frozen=True, slots=True, kw_only=True)
class ColdFit:
    """Pressure between lamination and shaft, as cold as the drawing."""

    interference: float = field(
        metadata=shown_as("radial_interference_um", "radial interference", "um", 1e6, exact=STATED)
    )
    rest: float = field(
        metadata=shown_as("fit_pressure_rest_mpa", "mean fit pressure at rest", "MPa", MPA)
    )
    rest_least: float = field(
        metadata=shown_as("fit_pressure_rest_least_mpa", "its least, round the bore", "MPa", MPA)
    )
    rest_most: float = field(
        metadata=shown_as("fit_pressure_rest_most_mpa", "its greatest", "MPa", MPA)
    )
    maximum: float = field(
        metadata=shown_as(
            "fit_pressure_maximum_speed_mpa", "mean fit pressure at maximum speed", "MPa", MPA
        )
    )
    overspeed: float = field(
        metadata=shown_as("fit_pressure_overspeed_mpa", "the same at overspeed", "MPa", MPA)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class HotFit:
    """The same at the stated temperatures."""

    rest: float = field(
        metadata=shown_as("fit_pressure_hot_rest_mpa", "hot: mean fit pressure at rest", "MPa", MPA)
    )
    maximum: float = field(
        metadata=shown_as(
            "fit_pressure_hot_maximum_speed_mpa", "hot: the same at maximum speed", "MPa", MPA
        )
    )
    overspeed: float = field(
        metadata=shown_as(
            "fit_pressure_hot_overspeed_mpa", "hot: the same at overspeed", "MPa", MPA
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class LostFirst:
    """Where the fit begins to open."""

    speed: float = field(
        metadata=shown_as("fit_opens_rpm", "speed at which the fit begins to open", "1/min", RPM)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class LostEverywhere:
    """Where the fit is lost all round."""

    speed: float = field(
        metadata=shown_as("fit_lost_rpm", "speed at which the fit is lost all round", "1/min", RPM)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class HotLostFirst:
    """Where the hot fit begins to open."""

    speed: float = field(
        metadata=shown_as("fit_opens_hot_rpm", "hot: begins to open", "1/min", RPM)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class HotLostEverywhere:
    """Where the hot fit is lost all round."""

    speed: float = field(metadata=shown_as("fit_lost_hot_rpm", "hot: lost all round", "1/min", RPM))


@dataclass(frozen=True, slots=True, kw_only=True)
class PressedFigures:
    """The worst of all states: fit, heat, spin and magnets together."""

    peak: float = field(
        metadata=shown_as("peak_pressed_mpa", "greatest stress with fit, heat, magnets", "MPa", MPA)
    )
    margin: float = field(
        metadata=shown_as("yield_margin_pressed", "yield margin with fit, heat, magnets", "")
    )
    growth: float = field(
        metadata=shown_as("growth_pressed_um", "greatest growth of the rim in any state", "um", 1e6)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class HotGap:
    """What is left of the air gap in service."""

    rest: float = field(metadata=shown_as("gap_hot_rest_mm", "air gap hot, at rest", "mm", MM))
    fast: float = field(metadata=shown_as("gap_hot_fast_mm", "air gap hot, at overspeed", "mm", MM))


@dataclass(frozen=True, slots=True, kw_only=True)
class MagnetLoad:
    """What the most loaded magnet does to its wall at overspeed."""

    load: float = field(
        metadata=shown_as("magnet_load_n_per_mm", "load of a magnet on its wall", "N/mm", 1e-3)
    )
    grip: float = field(
        metadata=shown_as("magnet_grip", "friction or glue it needs over the wall's pressure", "")
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class PressedRib:
    """One rib in its worst state."""

    tension: float = field(
        metadata=shown_as("pressed_tension_mean_mpa", "mean tension, pressed", "MPa", MPA)
    )
    peak: float = field(metadata=shown_as("pressed_peak_mpa", "peak, pressed", "MPa", MPA))
    margin: float = field(metadata=shown_as("pressed_yield_margin", "yield margin, pressed", ""))


def fit_figures(study: FitStudy, machine: Machine) -> "tuple[DataclassInstance, ...]":
    """All figures that the study has; a speed that is never reached has none."""
    found: list[DataclassInstance] = []
    fit = machine.design.rotor.fit
    if fit is not None:
        rest, maximum, overspeed = (_named(study, "cold", place) for place in PLACES)
        found.append(
            ColdFit(
                interference=UM * fit.radial_interference_um,
                rest=rest.stress.mean_pressure,
                rest_least=float(rest.stress.pressure.min()),
                rest_most=float(rest.stress.pressure.max()),
                maximum=maximum.stress.mean_pressure,
                overspeed=overspeed.stress.mean_pressure,
            )
        )
        found += _lost(study.loose_cold, LostFirst, LostEverywhere)
        if study.loose_hot is not None:
            pressures = [_named(study, "hot", place).stress.mean_pressure for place in PLACES]
            found.append(HotFit(rest=pressures[0], maximum=pressures[1], overspeed=pressures[2]))
            found += _lost(study.loose_hot, HotLostFirst, HotLostEverywhere)
    worst = study.worst.report
    growth = max(state.report.growth_max for state in study.states)
    found.append(PressedFigures(peak=worst.peak, margin=worst.yield_margin, growth=growth))
    if not isinstance(gap := hot_gap(study, machine), str):
        found.append(gap)
    if study.cold.seats:
        state = _named(study, "cold", OVERSPEED)
        bearing = state.stress.bearing
        grips = [seat.grip for seat in study.cold.seats]
        found.append(MagnetLoad(load=float(bearing.max()), grip=max(grips)))
    return tuple(found)


PLACES = ("rest", "maximum speed", OVERSPEED)


def _named(study: FitStudy, heat: str, place: str) -> PressedState:
    state = study.state(f"{heat} at {place}")
    assert state is not None
    return state


def _lost(loose: Loosening, first: type, everywhere: type) -> "Iterator[DataclassInstance]":
    if math.isfinite(loose.first):
        yield first(speed=loose.first)
    if math.isfinite(loose.everywhere):
        yield everywhere(speed=loose.everywhere)


def hot_gap(study: FitStudy, machine: Machine) -> HotGap | str:
    """The gap left hot, or why it is not given.

    Cold gap + free growth of the stator's bore - growth of the rotor's farthest point - run-out:
    the stator is free to grow (what holds it is left out) and all of it is as hot.
    """
    hot = machine.design.hot
    if hot is None:
        return "air gap left hot: needs [hot], the temperatures of rotor and stator"
    if study.needs_expansion:
        return "air gap left hot: needs expansion_um_per_m_k in the rotor's steel card"
    if hot.stator_temperature_c is None:
        return "air gap left hot: needs hot.stator_temperature_c"
    expansion = machine.stator_steel.expansion_um_per_m_k
    if expansion is None:
        return "air gap left hot: needs expansion_um_per_m_k in the stator's steel card"
    rise = hot.stator_temperature_c - hot.reference_temperature_c
    more = 1e-6 * expansion.value * rise * study.section.stator_bore_radius - UM * hot.run_out_um
    rest, fast = (_named(study, "hot", place).report.gap_left for place in ("rest", OVERSPEED))
    return HotGap(rest=rest + more, fast=fast + more)


def pressed_ribs(study: FitStudy) -> tuple[PressedRib, ...]:
    """Every rib in the state of its least margin."""
    rows = zip(*(state.report.ribs for state in study.states), strict=True)
    worst = [min(row, key=lambda rib: rib.yield_margin) for row in rows]
    return tuple(
        PressedRib(tension=rib.mean_tension, peak=rib.peak, margin=rib.yield_margin)
        for rib in worst
    )


def pressed_errors(study: FitStudy, machine: Machine) -> dict[str, float]:
    """Errors by key in the figures' units.

    Peak and margin from the mesh four times as fine; all others are bounds: by how much they
    differ from those of a coarser mesh.
    """
    worst, finer = study.worst.report, study.finer
    error = BEYOND * abs(finer.peak - worst.peak)
    return {
        **differences(fit_figures(study, machine), _coarser(study, machine)),
        "peak_pressed_mpa": MPA * error,
        "yield_margin_pressed": worst.yield_margin * error / worst.peak,
    }


def _coarser(study: FitStudy, machine: Machine) -> "tuple[DataclassInstance, ...]":
    return () if study.coarser is None else fit_figures(study.coarser, machine)


def pressed_rib_errors(study: FitStudy) -> tuple[dict[str, float], ...]:
    """Of each rib, from the mesh four times as fine: the shares by which the worst state is off."""
    found = []
    rows = zip(pressed_ribs(study), study.worst.report.ribs, study.finer.ribs, strict=True)
    for rib, own, fine in rows:
        peak = BEYOND * abs(fine.peak - own.peak) / own.peak
        tension = BEYOND * abs(fine.mean_tension - own.mean_tension)
        errors = {"tension": tension, "peak": peak * rib.peak, "margin": peak * rib.margin}
        found.append(scaled_by_key(rib, errors))
    return tuple(found)


def fit_cautions(study: FitStudy, machine: Machine, overspeed: float) -> Iterator[str]:
    """One line each."""
    least = machine.design.limits.least_yield_margin
    worst = study.worst
    if worst.report.yield_margin < least:
        yield (
            f"{worst.name} the yield margin with fit, heat and magnets is"
            f" {worst.report.yield_margin:.3g}, below the limit of {least:g}"
        )
    if machine.design.rotor.fit is not None:
        for heat, loose in (("cold", study.loose_cold), ("hot", study.loose_hot)):
            if loose is not None and loose.first < overspeed:
                yield (
                    f"{heat}, the fit begins to open at {RPM * loose.first:.5g} rpm, below"
                    " overspeed: the rotor may move on its shaft and lose its balance"
                )
        yield (
            "the fit is without friction, the shaft a disc of plane stress as thick as the stack"
            " and without a groove of its own: neither the torque that fit or key carries nor the"
            " shaft's ends are in it"
        )
    if study.cold.seats:
        yield (
            "magnets are rigid blocks on the wall toward the rim: what of their load lies along it"
            " is put on the wall as an even shear that glue or friction must bear; the stress right"
            " under a magnet, in the magnet and in the glue is in no figure"
        )
