"""Keys of a part that is taken from a drawing."""

from typing import Annotated

from pydantic import Field

from .design_table import Positive, Table


class OutlineKeys(Table):
    """A part that may be taken from a drawing instead of from dimensions."""

    outline_dxf: Annotated[str, Field(min_length=1)] | None = None  # from the design's folder
    outline_unit_mm: Positive | None = None  # mm per drawing unit, where the file states none
    outline_layers: tuple[str, ...] = ()  # that hold the outline; none: all that are shown
    heal_um: Annotated[float, Field(ge=0.1, le=100.0)] = 10.0  # gaps up to this are closed
