"""How far a made machine may be from its drawing: limits of each source of spread.

A table that is left out means the defaults: common practice of punched laminations, no source.
They are to be replaced by what the maker of the laminations states.
"""

from typing import Annotated, Literal

from pydantic import Field

from .design_table import NotNegative, Positive, Table

Percent = Annotated[float, Field(ge=0.0, le=50.0)]


class KeyTolerance(Table):
    """A single length or angle of the design that is not made as drawn."""

    name: str  # of the key, as `rotor.barrier[1].tangential_rib_mm`
    limit: Positive  # to both sides, mm or degrees


class ToleranceDesign(Table):
    """Limits to both sides; 0 leaves a source out."""

    distribution: Literal["normal", "uniform"] = "normal"  # normal: the limits are 3 sigma
    cut_mm: NotNegative = 0.02  # all cut edges of the rotor lamination together, as by wear
    gap_mm: NotNegative = 0.02  # radius of the stator's bore
    bore_eccentricity_mm: NotNegative = 0.03  # most, of the rotor's axis in the bore
    stacking_factor: Annotated[float, Field(ge=0.0, le=0.1)] = 0.01
    b_h_percent: Percent = 2.0  # flux density at a field strength
    yield_percent: Percent = 5.0
    edge_depth_mm: Positive | None = None  # of the steel that cutting has spoilt; none without
    edge_drop_percent: Annotated[float, Field(gt=0.0, le=90.0)] | None = None  # of permeability
    edge_depth_scatter_percent: Annotated[float, Field(ge=0.0, le=100.0)] = 50.0  # of the depth
    key: Annotated[tuple[KeyTolerance, ...], Field(max_length=40)] = ()
