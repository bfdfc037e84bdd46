"""The tables of a study file, as `study_file` reads them: strict, every range of a value stated."""

from typing import Annotated, Literal

from pydantic import Field

from lamwright.geometry.design_table import Positive, Table

Text = Annotated[str, Field(min_length=1)]


class VaryTable(Table):
    """A key that varies: its values, or a range with or without a step."""

    key: Text
    values: Annotated[tuple[float | int | str, ...], Field(min_length=1)] | None = None
    least: float | None = None
    most: float | None = None
    step: Positive | None = None
    distribution: Literal["even", "normal"] = "even"
    mean: float | None = None  # of the normal distribution; default the middle of the range
    deviation: Positive | None = None  # likewise; default a quarter of the range


class LimitTable(Table):
    """What a figure must keep."""

    figure: Text
    least: float | None = None
    most: float | None = None


class GoalTable(Table):
    """A figure that is to be most or least."""

    figure: Text
    sense: Literal["most", "least"]


class SampleTable(Table):
    """Which points are computed."""

    kind: Literal["grid", "sobol", "halton"] = "grid"
    designs: Annotated[int, Field(ge=1, le=1_000_000)] = 64  # of a sobol or halton set
    seed: Annotated[int, Field(ge=0)] = 1


class StudyTables(Table):
    """One study file."""

    name: Text
    note: str = ""
    base: Text  # design file, counted from the study's folder
    effort: Literal["quick", "full"] = "quick"
    tolerance: Literal["coarse", "normal", "fine"] = "coarse"  # of a full computation
    errors: bool = False  # error bars of quick figures; a full computation has them anyway
    most_designs: Annotated[int, Field(ge=1, le=1_000_000)] = 2000  # that a grid may have
    most_seconds: Positive | None = None  # that a design may take; default 60 quick, 1800 full
    vary: Annotated[tuple[VaryTable, ...], Field(min_length=1, max_length=40)]
    limit: tuple[LimitTable, ...] = ()
    goal: tuple[GoalTable, ...] = ()
    sample: SampleTable = SampleTable()
