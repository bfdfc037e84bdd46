"""What a verdict on the page is known by, and how far it is."""

import hashlib
import json
import re
from collections.abc import Hashable
from dataclasses import dataclass
from typing import Literal

from .page_drawing import Record
from .page_folder import Outside
from .version import version

Effort = Literal["coarse", "full"]
State = Literal["none", "waiting", "running", "done", "failed", "superseded"]
TOLERANCE = "normal"  # of full verdicts, as of assess
_ID = re.compile(r"(coarse|full)-[0-9a-f]{40}")


@dataclass(frozen=True, slots=True)
class Job:
    """A verdict that was asked for."""

    id: str
    effort: Effort
    state: State
    phase: str = ""
    share: float = 0.0
    error: str | None = None
    path: str = ""
    text: str = ""
    design_hash: str = ""
    owners: frozenset[Hashable] = frozenset()
    figures: Record | None = None  # its result but for its files, while pictures are being drawn

    @property
    def record(self) -> Record:
        """As the page gets it."""
        return {
            "job": self.id,
            "effort": self.effort,
            "state": self.state,
            "phase": self.phase,
            "share": self.share,
            "error": self.error,
        }


def job_id_of(effort: Effort, due: str) -> str:
    """The id of a verdict of a design.

    Args:
        effort: coarse or full.
        due: hash of the design with its cards.
    """
    stated = json.dumps([due, version(), TOLERANCE if effort == "full" else ""])
    return f"{effort}-{hashlib.sha256(stated.encode()).hexdigest()[:40]}"


def effort_of_id(job_id: str) -> Effort:
    """The effort of a job by its id.

    Raises:
        Outside: this is no id.
    """
    found = _ID.fullmatch(job_id)
    if found is None:
        raise Outside("no job's id")
    return "coarse" if found[1] == "coarse" else "full"
