"""How a steel card states what its steel does beyond yield; rules in `hardening_checks`."""

from typing import Annotated

from pydantic import Field

from .design_table import NotNegative, Positive, Table


class HardeningCurve(Table):
    """True stress against plastic strain, from yield on; straight between points, then flat."""

    plastic_strain: Annotated[tuple[NotNegative, ...], Field(min_length=2)]
    true_stress_mpa: Annotated[tuple[Positive, ...], Field(min_length=2)]
    source: Annotated[str, Field(min_length=3)]
