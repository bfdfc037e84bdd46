"""Modes of the laminations as figures and as CSV, with their cautions."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field

from .files import csv_text
from .quantities import COUNT, RPM, shown_as
from .resonances import Lamination, Meeting, driver, meetings, nearest
from .table_errors import Columns

PERCENT = 100.0
NEAR = 0.1  # of the frequency: what damping and the model's error leave open (no source)

MODAL_STANDING = (
    "modes are of bare laminations in their plane, at rest: frame, end windings, bond between"
    " sheets and magnets shift them, and damping, so any amplitude, is not known",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class RotorModeFigures:
    """The rotor lamination's lowest modes."""

    free: float = field(
        metadata=shown_as("rotor_mode_free_hz", "lowest mode of the rotor, bore free", "Hz")
    )
    held: float = field(
        metadata=shown_as("rotor_mode_held_hz", "the same, bore held by a rigid shaft", "Hz")
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class RotorRingFigures:
    """The rotor's ring, where one of the lowest modes is that."""

    oval: float = field(
        metadata=shown_as("rotor_mode_oval_hz", "rotor's rim turns oval, bore free", "Hz")
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class StatorModeFigures:
    """The stator lamination's lowest mode."""

    lowest: float = field(
        metadata=shown_as("stator_mode_hz", "lowest mode of the stator, free", "Hz")
    )
    waves: int = field(
        metadata=shown_as("stator_mode_waves", "waves of it round the circle", "", exact=COUNT)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class MeetingFigures:
    """How often orders meet modes that the centred machine's field can shake."""

    service: int = field(
        metadata=shown_as(
            "mode_meetings", "orders meet modes of the field, to maximum", "", exact=COUNT
        )
    )
    test: int = field(
        metadata=shown_as("mode_meetings_overspeed", "the same, to overspeed", "", exact=COUNT)
    )
    rated: float = field(
        metadata=shown_as(
            "mode_nearest_rated_percent", "nearest such order at rated speed, off by", "%", PERCENT
        )
    )
    maximum: float = field(
        metadata=shown_as("mode_nearest_maximum_percent", "the same at maximum speed", "%", PERCENT)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class FirstMeeting:
    """The lowest such speed, where there is one."""

    speed: float = field(
        metadata=shown_as("speed_mode_met_lowest_rpm", "lowest speed of them", "1/min", RPM)
    )


@dataclass(frozen=True, slots=True)
class Speeds:
    """Mechanical speeds in rad/s."""

    rated: float
    maximum: float
    overspeed: float


ModalGroup = RotorModeFigures | RotorRingFigures | StatorModeFigures | MeetingFigures | FirstMeeting


def modal_figures(laminations: Sequence[Lamination], speeds: Speeds) -> tuple[ModalGroup, ...]:
    """Figures of the three laminations: rotor free, rotor held, stator."""
    free, held, stator = laminations
    groups: list[ModalGroup] = [
        RotorModeFigures(free=free.modes[0].frequency, held=held.modes[0].frequency)
    ]
    oval = [mode.frequency for mode in free.modes if mode.waves == 2]
    if oval:
        groups.append(RotorRingFigures(oval=oval[0]))
    lowest = stator.modes[0]
    groups.append(StatorModeFigures(lowest=lowest.frequency, waves=lowest.waves))
    driven = driven_meetings(laminations, speeds.overspeed)
    near = [_nearest_of_all(laminations, speed) for speed in (speeds.rated, speeds.maximum)]
    if all(math.isfinite(share) for share in near):
        groups.append(
            MeetingFigures(
                service=sum(meeting.speed <= speeds.maximum for meeting in driven),
                test=len(driven),
                rated=near[0],
                maximum=near[1],
            )
        )
    if driven:
        groups.append(FirstMeeting(speed=driven[0].speed))
    return tuple(groups)


def modal_errors(laminations: Sequence[Lamination], speeds: Speeds) -> dict[str, float]:
    """Errors of the figures by key, in their units; speeds and distances go with the mode's."""
    free, held, stator = laminations
    errors = {
        "rotor_mode_free_hz": float(free.errors[0]),
        "rotor_mode_held_hz": float(held.errors[0]),
        "stator_mode_hz": float(stator.errors[0]),
    }
    oval = [k for k, mode in enumerate(free.modes) if mode.waves == 2]
    if oval:
        errors["rotor_mode_oval_hz"] = float(free.errors[oval[0]])
    for key, speed in (
        ("mode_nearest_rated_percent", speeds.rated),
        ("mode_nearest_maximum_percent", speeds.maximum),
    ):
        near = _near(laminations, speed)
        if near:
            share, off = min(near, key=lambda one: abs(one[0]))
            errors[key] = PERCENT * (1.0 + share) * off
    driven = driven_meetings(laminations, speeds.overspeed)
    if driven:
        first = driven[0]
        off = float(first.lamination.errors[first.number - 1]) / first.mode.frequency
        errors["speed_mode_met_lowest_rpm"] = RPM * first.speed * off
    return errors


def modal_columns(laminations: Sequence[Lamination], speeds: Speeds) -> dict[str, Columns]:
    """Errors of the columns of `modes.csv` and `mode_speeds.csv`, by file."""
    shares = "of the mode's shape: not estimated"
    off = max(
        float(error) / mode.frequency
        for lamination in laminations
        for error, mode in zip(lamination.errors, lamination.modes, strict=True)
    )
    most = [
        abs(nearest(mode, lamination.orders, speed)[1])
        for lamination in laminations
        for mode in lamination.modes
        for speed in (speeds.rated, speeds.maximum)
    ]
    met = meetings(laminations, speeds.overspeed)
    return {
        "modes.csv": {
            "frequency_hz": "its error stands beside it",
            "alike": COUNT,
            "cyclic_index": COUNT,
            "waves": COUNT,
            "wave_share_percent": shares,
            "turned_inertia_percent": shares,
            "shaken_mass_percent": shares,
            "off_rated_percent_error": PERCENT * (1.0 + max(most)) * off,
            "off_maximum_percent_error": PERCENT * (1.0 + max(most)) * off,
        },
        "mode_speeds.csv": {
            "speed_rpm_error": off * max((RPM * one.speed for one in met), default=0.0),
            "frequency_hz_error": off * max((one.mode.frequency for one in met), default=0.0),
            "waves": COUNT,
            "times_speed": COUNT,
        },
    }


def driven_meetings(laminations: Sequence[Lamination], top_speed: float) -> tuple[Meeting, ...]:
    """Meetings with modes that the field of the centred machine can shake, by rising speed."""
    return tuple(
        meeting
        for meeting in meetings(laminations, top_speed)
        if driver(meeting.mode, meeting.lamination.sectors) == "field"
    )


def _nearest_of_all(laminations: Sequence[Lamination], speed: float) -> float:
    """The least distance of an order to a mode of the field, with its sign; nan without one."""
    return min((share for share, _ in _near(laminations, speed)), key=abs, default=math.nan)


def _near(laminations: Sequence[Lamination], speed: float) -> list[tuple[float, float]]:
    """Of each mode of the field its distance to an order, and its frequency's relative error."""
    return [
        (nearest(mode, lamination.orders, speed)[1], float(error) / mode.frequency)
        for lamination in laminations
        for mode, error in zip(lamination.modes, lamination.errors, strict=True)
        if driver(mode, lamination.sectors) == "field"
    ]


def modes_csv(laminations: Sequence[Lamination], speeds: Speeds) -> str:
    """One row for each mode, with the order nearest to it at rated and at maximum speed."""
    header = [
        "lamination", "mode", "frequency_hz", "frequency_hz_error", "alike", "cyclic_index",
        "waves", "wave_share_percent", "turned_inertia_percent", "shaken_mass_percent", "shaken_by",
        "nearest_rated", "off_rated_percent", "nearest_maximum", "off_maximum_percent",
    ]  # fmt: skip
    rows = []
    for lamination in laminations:
        for number, mode in enumerate(lamination.modes, start=1):
            rated, maximum = (
                nearest(mode, lamination.orders, speed) for speed in (speeds.rated, speeds.maximum)
            )
            rows.append(
                [
                    lamination.key,
                    str(number),
                    f"{mode.frequency:.6g}",
                    f"{lamination.errors[number - 1]:.3g}",
                    str(1 + mode.is_pair),
                    str(mode.index),
                    str(mode.waves),
                    *_percents(mode.wave_share, mode.turned_share, mode.shaken_share),
                    driver(mode, lamination.sectors),
                    rated[0].name,
                    *_percents(rated[1]),
                    maximum[0].name,
                    *_percents(maximum[1]),
                ]
            )
    return csv_text(header, rows)


def meetings_csv(laminations: Sequence[Lamination], speeds: Speeds) -> str:
    """One row for each speed up to overspeed at which an order meets a mode."""
    header = ["speed_rpm", "within", "lamination", "mode", "frequency_hz", "waves", "shaken_by"]
    header += ["order", "times_speed"]
    rows = [
        [
            f"{RPM * meeting.speed:.6g}",
            "maximum" if meeting.speed <= speeds.maximum else "overspeed",
            meeting.lamination.key,
            str(meeting.number),
            f"{meeting.mode.frequency:.6g}",
            str(meeting.mode.waves),
            driver(meeting.mode, meeting.lamination.sectors),
            meeting.order.name,
            str(meeting.order.times),
        ]
        for meeting in meetings(laminations, speeds.overspeed)
    ]
    return csv_text(header, rows)


def modal_cautions(laminations: Sequence[Lamination], speeds: Speeds) -> tuple[str, ...]:
    """The standing ones, and modes of the field that are met within reach of maximum speed."""
    within = driven_meetings(laminations, (1.0 + NEAR) * speeds.maximum)
    told = []
    for meeting in within[:1]:
        more = f", the lowest of {len(within)} such speeds" if len(within) > 1 else ""
        speed = f"{RPM * meeting.speed:.0f} 1/min"
        told.append(
            f"{meeting.lamination.name}: order {meeting.order.times} ({meeting.order.name}) meets"
            f" the mode of {meeting.mode.frequency:.0f} Hz at {speed}{more}:"
            " run through it, do not stay there, or measure it"
        )
    return (*told, *MODAL_STANDING)


def _percents(*shares: float) -> list[str]:
    return [f"{PERCENT * share:.2f}" for share in shares]
