"""What losses need to know: a steel card's measured loss, strands of the winding, air and bearings.

All of it is optional: what is not stated is told as not given, never guessed.
"""

from typing import Annotated

from pydantic import Field

from .design_table import NotNegative, Positive, Table


class LossPoints(Table):
    """Measured loss of the sheet in sinusoidal alternating flux density; one value per point."""

    frequency_hz: Annotated[tuple[Positive, ...], Field(min_length=4)]
    b_t: Annotated[tuple[Positive, ...], Field(min_length=4)]  # peak
    loss_w_per_kg: Annotated[tuple[Positive, ...], Field(min_length=4)]
    sheet_thickness_mm: Annotated[float, Field(gt=0.0, le=5.0)]
    resistivity_uohm_m: Annotated[float, Field(ge=0.05, le=2.0)]
    source: Annotated[str, Field(min_length=3)]


class StrandDesign(Table):
    """The strands that a turn consists of, side by side in hand: round, or rectangular."""

    round_diameter_mm: Positive | None = None  # bare copper
    width_mm: Positive | None = None  # bare copper, across the slot
    height_mm: Positive | None = None  # bare copper, along the slot's depth
    in_hand: Annotated[int, Field(ge=1, le=1000)] = 1  # strands of one turn
    layers: Annotated[int, Field(ge=1, le=200)] | None = None  # over the depth of the slot


class LossesDesign(Table):
    """What friction and windage are computed with."""

    air_temperature_c: Annotated[float, Field(ge=-40.0, le=250.0)] = 60.0  # in the gap
    bearing_friction_nm: NotNegative | None = None  # torque of bearings and seals, any speed
