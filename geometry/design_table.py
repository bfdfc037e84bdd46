"""What all tables of a design file share: strict, frozen, no unknown key."""

from typing import Annotated

from pydantic import BaseModel, ConfigDict, Field

Positive = Annotated[float, Field(gt=0.0)]
NotNegative = Annotated[float, Field(ge=0.0)]


def whole(value: object) -> object:
    """Refuse true and 1.0, which compare equal to a choice of 1."""
    if isinstance(value, bool | float):
        raise ValueError("not a whole number")
    return value


class Table(BaseModel):
    """A table of a design file."""

    model_config = ConfigDict(strict=True, extra="forbid", frozen=True, allow_inf_nan=False)
