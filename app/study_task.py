"""A task: all that one evaluation needs, small and complete, so that any process can do it."""

from collections.abc import Mapping
from dataclasses import dataclass, field

from .study import Effort, StudyLimit, Values


@dataclass(frozen=True, slots=True)
class Task:
    """One design of a study with the text of all files it names.

    Two tasks of one `hash` have the same evaluation: it covers design, cards, drawings, effort,
    tolerance and the program's version.
    """

    hash: str
    values: Values
    design_name: str  # of the file, for messages
    design_text: str
    cards: Mapping[str, str]
    drawings: Mapping[str, bytes] = field(default_factory=dict)
    effort: Effort = "quick"
    tolerance: str = "coarse"
    limits: tuple[StudyLimit, ...] = ()
    fault: str = ""  # why the values give no design at all; the text is then the base's
