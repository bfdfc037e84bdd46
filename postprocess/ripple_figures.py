"""Figures of ripple, forces and pull, as they leave the program."""

from dataclasses import dataclass, field

from .quantities import COUNT, FORMULA, STATED, shown_as, shown_estimate

MM = 1e3  # mm per m
NOTABLE_PULL = 1.0  # N, far above what rounding leaves where nothing pulls


@dataclass(frozen=True, slots=True, kw_only=True)
class RippleFigures:
    """Torque ripple at rated current, by order."""

    i_d: float = field(metadata=shown_as("ripple_i_d_a", "d-axis current of the ripple", "A"))
    i_q: float = field(metadata=shown_as("ripple_i_q_a", "q-axis current of the ripple", "A"))
    mean: float = field(metadata=shown_as("ripple_mean_torque_nm", "mean torque, no skew", "N m"))
    order: int = field(
        metadata=shown_as("ripple_largest_order_el", "largest order of torque", "", exact=COUNT)
    )
    largest: float = field(
        metadata=shown_as("ripple_largest_percent", "largest order, no skew", "% of mean", 100.0)
    )
    slot_order: int = field(
        metadata=shown_as("ripple_slot_order_el", "first slot order of torque", "", exact=COUNT)
    )
    slot: float = field(
        metadata=shown_as("ripple_slot_order_percent", "slot order, no skew", "% of mean", 100.0)
    )
    slot_skewed: float = field(
        metadata=shown_as(
            "ripple_slot_order_skewed_percent", "slot order, this rotor's skew", "% of mean", 100.0
        )
    )
    slot_period: float = field(
        metadata=shown_as(
            "ripple_slot_order_slot_skew_percent",
            "slot order, continuous skew by its own period",
            "% of mean",
            100.0,
        )
    )
    mean_period: float = field(
        metadata=shown_as("ripple_mean_slot_skew_nm", "mean torque with that skew", "N m")
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class ForceFigures:
    """Forces of the gap's field on the stator at rated current."""

    mean: float = field(
        metadata=shown_as("radial_stress_mean_kpa", "mean radial stress on the bore", "kPa", 1e-3)
    )
    space: int = field(
        metadata=shown_as(
            "force_lowest_space_order",
            "lowest space order above 0 that alternates",
            "",
            exact=COUNT,
        )
    )
    lowest: float = field(
        metadata=shown_as(
            "force_lowest_order_kpa", "largest radial stress of the lowest space order", "kPa", 1e-3
        )
    )
    frequency: float = field(
        metadata=shown_as(
            "force_lowest_order_hz", "frequency of that at rated speed", "Hz", exact=FORMULA
        )
    )
    frequency_at_most: float = field(
        metadata=shown_as(
            "force_lowest_order_maximum_hz",
            "frequency of that at maximum speed",
            "Hz",
            exact=FORMULA,
        )
    )
    tooth_pull: float = field(
        metadata=shown_as("tooth_pull_mean_n", "mean pull on a tooth, whole stack", "N")
    )
    tooth_most: float = field(
        metadata=shown_as("tooth_pull_most_n", "greatest pull on a tooth", "N")
    )
    tooth_sideways: float = field(
        metadata=shown_as("tooth_sideways_most_n", "greatest sideways force on a tooth", "N")
    )
    pull: float = field(
        metadata=shown_as("centred_pull_most_n", "pull on the centred rotor, greatest", "N")
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class PullFigures:
    """A rotor beside the stator's axis, at rated current."""

    offset: float = field(
        metadata=shown_as(
            "eccentricity_mm", "rotor's axis beside the stator's", "mm", MM, exact=STATED
        )
    )
    share: float = field(
        metadata=shown_as(
            "eccentricity_percent", "that offset over the gap", "%", 100.0, exact=STATED
        )
    )
    along: float = field(
        metadata=shown_as("eccentric_pull_n", "mean pull towards the narrow side", "N")
    )
    across: float = field(
        metadata=shown_as("eccentric_pull_across_n", "mean pull across that", "N")
    )
    most: float = field(
        metadata=shown_as("eccentric_pull_most_n", "greatest pull over the positions", "N")
    )
    stiffness: float = field(
        metadata=shown_as(
            "eccentric_pull_n_per_mm", "pull over the rotor's offset", "N/mm", 1.0 / MM
        )
    )
    smooth: float = field(
        metadata=shown_estimate(
            "eccentric_pull_smooth_n", "pull of a smooth unsaturated gap, by formula", "N"
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class CoggingFigures:
    """Torque of the magnets without current."""

    per_turn: int = field(
        metadata=shown_as(
            "cogging_periods_per_turn", "periods of cogging in a turn", "", exact=COUNT
        )
    )
    peak_to_peak: float = field(
        metadata=shown_as("cogging_peak_to_peak_nm", "cogging torque, peak to peak", "N m")
    )
    first: float = field(
        metadata=shown_as("cogging_first_order_nm", "cogging torque, first order", "N m")
    )


def force_cautions(skew_steps: int, centred_pull: float) -> tuple[str, ...]:
    """What a reader of forces and pull should be wary of.

    Args:
        skew_steps: of the rotor.
        centred_pull: greatest, in N.
    """
    lines = ["pull: currents between parallel paths would lower it; the shaft is not bent"]
    if skew_steps > 1:
        lines.append("forces and pull: of the whole stack as if it were not skewed")
    if centred_pull > NOTABLE_PULL:
        text = f"a centred rotor too is pulled, by up to {centred_pull:.0f} N that go round"
        lines.append(f"{text}: bearings and frame must bear it")
    return tuple(lines)
