"""Landmarks of an envelope as figures: corner, constant power, most torque per volt, rated speed.

A landmark that a machine does not have makes no figure but a line that says so.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from lamwright.solver.types import FloatArray

from .envelope import Corner, Envelope, Region, corner, envelope
from .quantities import RPM, STATED, shown_as
from .terminals import Terminals
from .within_limits import most_power_factor

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

DEGREE = math.pi / 180.0
LINE = math.sqrt(1.5)  # rms between lines over the peak of a phase, in star
PIECES = 4  # that a step between speeds is cut in when a landmark is looked for
ROUNDS = 8  # of cutting: to 4^-8 = 2e-5 of the step
AT_CORNER = 1e-5  # relative, below the corner's power: the corner itself counts as above


@dataclass(frozen=True, slots=True, kw_only=True)
class CurrentFigures:
    """The machine at its current limit, whatever the voltage."""

    current: float = field(
        metadata=shown_as("maximum_current_a", "current limit, peak of a phase", "A", exact=STATED)
    )
    voltage: float = field(
        metadata=shown_as(
            "voltage_limit_phase_v", "voltage limit, peak of a phase", "V", exact=STATED
        )
    )
    power_factor: float = field(
        metadata=shown_as(
            "most_power_factor", "greatest power factor at that current, without resistance", ""
        )
    )
    power_factor_gamma: float = field(
        metadata=shown_as("most_power_factor_angle_deg", "its current angle", "deg", 1.0 / DEGREE)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class CornerFigures:
    """Where the current limit meets the voltage limit."""

    speed: float = field(metadata=shown_as("base_speed_rpm", "base speed", "1/min", RPM))
    torque: float = field(
        metadata=shown_as("base_torque_nm", "torque up to base speed, of the field", "N m")
    )
    power: float = field(metadata=shown_as("corner_power_w", "power at base speed", "W"))
    gamma: float = field(
        metadata=shown_as(
            "base_current_angle_deg", "current angle up to base speed", "deg", 1.0 / DEGREE
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class ConstantPowerFigures:
    """How far up the power holds."""

    speed: float = field(
        metadata=shown_as(
            "constant_power_end_rpm", "speed above which power is under the corner's", "1/min", RPM
        )
    )
    ratio: float = field(
        metadata=shown_as("constant_power_ratio", "that speed over the base speed", "")
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class PerVoltFigures:
    """Where the voltage alone begins to rule."""

    speed: float = field(
        metadata=shown_as(
            "most_torque_per_volt_from_rpm", "most torque per volt from speed", "1/min", RPM
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class ReachFigures:
    """The last speed with torque, where that is under the maximum speed."""

    speed: float = field(
        metadata=shown_as("last_speed_with_torque_rpm", "last speed with torque", "1/min", RPM)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class RatedFigures:
    """The envelope at rated speed."""

    torque: float = field(
        metadata=shown_as("envelope_torque_rated_speed_nm", "most torque at rated speed", "N m")
    )
    power: float = field(
        metadata=shown_as("envelope_power_rated_speed_w", "power at rated speed, of the field", "W")
    )
    current: float = field(
        metadata=shown_as("envelope_current_rated_speed_a", "current at rated speed, peak", "A")
    )
    line_voltage: float = field(
        metadata=shown_as(
            "envelope_voltage_rated_speed_v", "voltage at rated speed, rms between lines", "V"
        )
    )
    power_factor: float = field(
        metadata=shown_as("envelope_power_factor_rated_speed", "power factor at rated speed", "")
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class TopFigures:
    """The envelope at maximum speed."""

    torque: float = field(
        metadata=shown_as("envelope_torque_maximum_speed_nm", "most torque at maximum speed", "N m")
    )
    power: float = field(
        metadata=shown_as(
            "envelope_power_maximum_speed_w", "power at maximum speed, of the field", "W"
        )
    )


@dataclass(frozen=True, slots=True)
class Landmarks:
    """Figures of an envelope, and what it does not have."""

    figures: "tuple[DataclassInstance, ...]"
    corner: Corner | None
    lines: tuple[str, ...]  # what is not given and why


def landmarks(drive: Terminals, found: Envelope, rated_speed: float) -> Landmarks:
    """The landmarks of an envelope whose speeds rise from 0 to the maximum speed.

    Args:
        drive: motoring.
        found: its envelope.
        rated_speed: rad/s, mechanical.
    """
    figures: list[DataclassInstance] = [_at_current(drive)]
    lines: list[str] = []
    base = corner(drive)
    if base is None:
        lines.append(_no_base(drive))
    else:
        figures.append(
            CornerFigures(
                speed=base.speed,
                torque=base.torque,
                power=base.torque * base.speed,
                gamma=base.gamma,
            )
        )
        held = _constant_power(drive, found, base)
        if isinstance(held, str):
            lines.append(held)
        else:
            figures.append(held)
    figures += _weak(drive, found)
    is_reached = found.region != Region.NONE
    if not is_reached.all() and is_reached.any():
        last = last_speed(drive, found, lambda e: e.region != Region.NONE)
        figures.append(ReachFigures(speed=last))
        lines.append(f"no torque is reached from {RPM * last:.0f}/min up: speeds left empty")
    rated = envelope(drive, np.array([rated_speed]))
    if rated.region[0] != Region.NONE:
        figures.append(_rated(rated))
    else:
        lines.append(f"no torque is reached at rated speed, {RPM * rated_speed:.0f}/min")
    if is_reached[-1]:
        figures.append(TopFigures(torque=float(found.torque[-1]), power=float(found.power[-1])))
    return Landmarks(tuple(figures), base, tuple(lines))


def last_speed(
    drive: Terminals, found: Envelope, holds: Callable[[Envelope], npt.NDArray[np.bool_]]
) -> float:
    """The last speed in rad/s at which something holds; the envelope's first if at none of them."""
    held = np.flatnonzero(holds(found))
    last = int(held[-1]) if held.size else 0
    low = float(found.speed[last])
    if last == found.speed.size - 1:
        return low
    step = float(found.speed[last + 1]) - low
    for _ in range(ROUNDS):
        step /= PIECES
        inner: FloatArray = low + step * np.arange(1.0, PIECES)
        low += step * int(np.append(np.flatnonzero(holds(envelope(drive, inner))) + 1, 0).max())
    return low


def _at_current(drive: Terminals) -> CurrentFigures:
    factor, gamma = most_power_factor(drive, drive.current_limit)
    return CurrentFigures(
        current=drive.current_limit,
        voltage=drive.voltage_limit,
        power_factor=factor,
        power_factor_gamma=gamma,
    )


def _no_base(drive: Terminals) -> str:
    drop = drive.resistance * drive.current_limit
    return (
        f"base speed: the resistance alone takes {drop:.4g} V at {drive.current_limit:.4g} A, the"
        f" supply gives {drive.voltage_limit:.4g} V a phase"
    )


def _constant_power(drive: Terminals, found: Envelope, base: Corner) -> ConstantPowerFigures | str:
    """Where the power falls under the corner's for good, or a line that says why not."""
    top, least = float(found.speed[-1]), (1.0 - AT_CORNER) * base.torque * base.speed
    if base.speed >= top:
        return (
            f"constant-power ratio: base speed {RPM * base.speed:.0f}/min is not under the"
            f" maximum speed {RPM * top:.0f}/min"
        )
    # From the corner on, lest a coarse step miss a power that falls at once.
    beyond = np.concatenate([[base.speed], found.speed[found.speed > base.speed]])
    end = last_speed(drive, envelope(drive, beyond), lambda e: e.power >= least)
    if end >= top:
        return (
            f"constant-power ratio: power is above the corner's up to the maximum speed"
            f" {RPM * top:.0f}/min, a ratio of {top / base.speed:.2f} or more"
        )
    return ConstantPowerFigures(speed=end, ratio=end / base.speed)


def _weak(drive: Terminals, found: Envelope) -> tuple[PerVoltFigures, ...]:
    before = (Region.CURRENT, Region.BOTH)
    is_before = np.isin(found.region, before)
    if not np.any(found.region == Region.VOLTAGE) or not is_before.any():
        return ()
    start = last_speed(drive, found, lambda e: np.isin(e.region, before))
    return (PerVoltFigures(speed=start),)


def _rated(rated: Envelope) -> RatedFigures:
    return RatedFigures(
        torque=float(rated.torque[0]),
        power=float(rated.power[0]),
        current=float(rated.current[0]),
        line_voltage=LINE * float(rated.voltage[0]),
        power_factor=float(rated.power_factor[0]),
    )
