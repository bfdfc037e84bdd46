"""What every chapter of `ribs` is given, and what it gives back."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.verdict import RPM
from lamwright.solver.rotor_stress import StressSettings

from .chapter import Chapter
from .desk import StressWork
from .progress import Stopwatch

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


Rows = tuple[Mapping[str, object], ...]


@dataclass(frozen=True, slots=True)
class RibWishes:
    """What is asked of `ribs` beside the design."""

    overspeed_share: float = 0.0  # of the starts, that go up to overspeed
    teeth_mass_factor: float | None = None  # stator teeth with winding over bare ones, for modes


@dataclass(frozen=True, slots=True, eq=False)
class Ribbed:
    """A machine whose rotor's elastic stress at overspeed is known."""

    machine: Machine
    section: CrossSection
    stress: StressWork  # at overspeed, free bore
    settings: StressSettings  # of that stress
    watch: Stopwatch
    wishes: RibWishes
    pictures: bool
    has_stress_picture: bool = False  # whether it is drawn already, by `assess`

    @property
    def overspeed(self) -> float:
        """rad/s."""
        return self.machine.design.duty.overspeed_factor * self.maximum_speed

    @property
    def maximum_speed(self) -> float:
        """In service, rad/s."""
        return self.machine.design.duty.maximum_speed_rpm / RPM


@dataclass(frozen=True, slots=True)
class RibChapter(Chapter):
    """What a chapter adds to `ribs.json` and `ribs.csv`."""

    # One group for each rib of the rotor's own period, fields made by `quantities.shown_as`; what
    # has no meaning for a rib is nan or infinite.
    of_ribs: "tuple[DataclassInstance, ...]" = ()
    facts: Mapping[str, str | bool] = field(default_factory=dict)  # by key: what is no number
    tables: Mapping[str, Rows] = field(default_factory=dict)  # by key, of `ribs.json` as they are
    rib_errors: tuple[Mapping[str, float], ...] = ()  # of each rib, by the keys of `of_ribs`


# The machine and the hidden folder whose files move to the results when all chapters are done.
RibChapterMaker = Callable[[Ribbed, Path], Chapter]
