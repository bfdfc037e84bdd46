"""Errors of all rooms, and the findings a check returns.

The text form is one line without a full stop: place, key, value, fault, remedy, as in
`demo.toml:14: rotor.barrier[1].tangential_rib_mm = 0.1: thinner than the sheet; accepted 0.5 to 5`.
"""

from dataclasses import dataclass
from pathlib import Path


class LamwrightError(Exception):
    """Any error that Lamwright reports to its user."""

    exit_code = 2


class DesignError(LamwrightError, ValueError):
    """A design or steel file that cannot be used; its text has one line per fault."""


class CardError(DesignError):
    """A steel card, or a magnet's, that cannot be used."""


class MagnetCardError(CardError):
    """A magnet card that cannot be used."""


class DrawingError(DesignError):
    """A drawing named by a design that cannot be used; where it fails, as far as it is known."""

    def __init__(self, text: str, marks: "tuple[DrawingMark, ...]" = ()) -> None:
        """Keep the places beside the text, for pictures that mark them."""
        super().__init__(text)
        self.marks = marks


@dataclass(frozen=True, slots=True)
class DrawingMark:
    """A place in a drawing file: m in its own coordinates, with how the file was to be read."""

    path: Path
    place: complex
    text: str
    unit_mm: float | None
    layers: tuple[str, ...]


class GeometryError(LamwrightError, ValueError):
    """A shape that cannot be drawn from valid numbers; `findings` names the keys."""

    def __init__(self, findings: "tuple[Finding, ...]") -> None:
        """Join the findings' texts, one line each."""
        super().__init__("\n".join(finding.text for finding in findings))
        self.findings = findings


class NotConverged(LamwrightError, RuntimeError):
    """An iteration that ended without meeting its tolerance; carries the residual history."""

    exit_code = 3

    def __init__(self, text: str, history: tuple[float, ...] = ()) -> None:
        """Keep the history beside the text."""
        super().__init__(text)
        self.history = history


class MeshError(LamwrightError, ValueError):
    """An outline that the mesher cannot fill with sound elements."""

    exit_code = 3


@dataclass(frozen=True, slots=True)
class Finding:
    """One fault of a design: stable code, key as written in the file, its value, what would fit."""

    code: str
    key: str
    value: float
    fault: str
    remedy: str  # empty where what would fit was not looked for

    @property
    def text(self) -> str:
        """The finding as one line without its place in the file."""
        told = f"{self.key} = {self.value:g}: {self.fault}"
        return f"{told}; {self.remedy}" if self.remedy else told


class OutlineError(LamwrightError, ValueError):
    """A drawing in which no lamination is recognised; one line, with the place where there is one.

    `place` is in m in the drawing's own coordinates.
    """

    def __init__(self, text: str, place: complex | None = None) -> None:
        """Keep the place beside the text, for a picture that marks it."""
        super().__init__(text)
        self.place = place


class OffsetError(DesignError):
    """An allowance that leaves nothing of a contour or of the steel beside it; place in m."""

    def __init__(self, text: str, place: complex) -> None:
        """Keep the place beside the text."""
        super().__init__(text)
        self.place = place
