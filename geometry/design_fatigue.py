"""How a steel card states what its steel bears in start-stop cycles; rules in `fatigue_checks`."""

from typing import Annotated, Literal

from pydantic import Field

from .design_table import Positive, Table

MeanStressRule = Literal["goodman", "smith-watson-topper", "morrow"]
Share = Annotated[float, Field(gt=0.0, le=1.0)]


class FatigueData(Table):
    """A straight line of stress amplitude against reversals, 50 % of specimens failed (Basquin).

    Amplitude = coefficient x (2 N)^exponent without mean stress; the three factors lower it.
    """

    method: MeanStressRule  # how mean stress counts
    strength_coefficient_mpa: Positive
    strength_exponent: Annotated[float, Field(ge=-0.5, le=-0.02)]
    tested_to_cycles: Annotated[float, Field(ge=1e3, le=1e12)]  # how far the line was tested
    cut_edge_factor: Share  # amplitude of the cut edge over that of the specimens
    surface_factor: Share  # 1 where the cut edge's holds it
    size_factor: Share
    scatter_log10_life: Annotated[float, Field(gt=0.0, le=2.0)]  # standard deviation of log10 N
    # Ramberg-Osgood of the settled cycle; perfectly plastic at the yield strength without.
    cyclic_strength_mpa: Positive | None = None
    cyclic_exponent: Annotated[float, Field(ge=0.01, le=0.5)] | None = None
    source: Annotated[str, Field(min_length=3)]
