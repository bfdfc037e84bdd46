"""Modes of the laminations as figures and as CSV, with their cautions."""

import math
from collections.abc import Sequence
from dataclasses import dataclass, field

from .files import csv_text
from .quantities import RPM, shown_as
from .resonances import Lamination, Meeting, driver, meetings, nearest

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
    waves: int = field(metadata=shown_as("stator_mode_waves", "waves of it round the circle", ""))


@dataclass(frozen=True, slots=True, kw_only=True)
class MeetingFigures:
    """How often orders meet modes that the centred machine's field can shake."""

    service: int = field(
        metadata=shown_as("mode_meetings", "orders meet modes of the field, to maximum", "")
    )
    test: int = field(metadata=shown_as("mode_meetings_overspeed", "the same, to overspeed", ""))
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


def driven_meetings(laminations: Sequence[Lamination], top_speed: float) -> tuple[Meeting, ...]:
    """Meetings with modes that the field of the centred machine can shake, by rising speed."""
    return tuple(
        meeting
        for meeting in meetings(laminations, top_speed)
        if driver(meeting.mode, meeting.lamination.sectors) == "field"
    )


def _nearest_of_all(laminations: Sequence[Lamination], speed: float) -> float:
    """The least distance of an order to a mode of the field, with its sign; nan without one."""
    shares = [
        nearest(mode, lamination.orders, speed)[1]
        for lamination in laminations
        for mode in lamination.modes
        if driver(mode, lamination.sectors) == "field"
    ]
    return min(shares, key=abs, default=math.nan)


def modes_csv(laminations: Sequence[Lamination], speeds: Speeds) -> str:
    """One row for each mode, with the order nearest to it at rated and at maximum speed."""
    header = [
        "lamination", "mode", "frequency_hz", "alike", "cyclic_index", "waves",
        "wave_share_percent", "turned_inertia_percent", "shaken_mass_percent", "shaken_by",
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
