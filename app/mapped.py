"""What every chapter of `map` is given."""

from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path

from lamwright.geometry.design_file import Machine
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.coenergy_surface import CoenergySurface
from lamwright.postprocess.flux_map import FluxMap
from lamwright.postprocess.iron_loss_map import IronLossMap
from lamwright.solver.field import MagneticModel

from .chapter import Chapter
from .control_wishes import ControlWishes
from .desk import Desk
from .pool import Crew
from .progress import Stopwatch


@dataclass(frozen=True, slots=True, eq=False)
class Mapped:
    """A machine whose flux map is known."""

    machine: Machine
    section: CrossSection
    model: MagneticModel
    flux_map: FluxMap
    surface: CoenergySurface
    losses: IronLossMap | str  # or why iron loss is not given
    crew: Crew[Desk]  # every desk has the model
    watch: Stopwatch
    eccentricity: float | None = None  # m, of the rotor's axis beside the stator's; if asked for
    control: ControlWishes = field(default_factory=ControlWishes)
    # What errors are told by: the surface with each linkage off, and a mesh half as fine.
    shifted: tuple[CoenergySurface, ...] = ()
    coarser: MagneticModel | None = None
    angle_error: float = 0.0  # rad, of the current angle of most torque at rated current


# The machine and the hidden folder whose files move to the results when all chapters are done.
ChapterMaker = Callable[[Mapped, Path], Chapter]
