"""What a ledger keeps of its study: what tells it from another, and what its readers need."""

import base64
import hashlib
import json
import sqlite3
from collections.abc import Mapping
from dataclasses import asdict, dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from .study import Study


@dataclass(frozen=True, slots=True)
class KeptStudy:
    """A study as its ledger tells it, without the study file."""

    name: str
    base_text: str  # the base design's file
    keys: tuple[str, ...]
    limits: tuple[tuple[str, float | None, float | None], ...]  # figure, least, most
    goals: tuple[tuple[str, str], ...]  # figure, most or least
    effort: str
    tolerance: str

    @property
    def figures(self) -> tuple[str, ...]:
        """Figures of the goals, then those of the limits."""
        named = [figure for figure, _ in self.goals] + [figure for figure, _, _ in self.limits]
        return tuple(dict.fromkeys(named))


@dataclass(frozen=True, slots=True)
class KeptDesign:
    """A design file, and the files that it names by their names in it."""

    text: str
    cards: Mapping[str, str]
    drawings: Mapping[str, bytes]

    @property
    def files(self) -> dict[str, bytes]:
        """Cards and drawings alike."""
        return {name: text.encode() for name, text in self.cards.items()} | dict(self.drawings)


def stated(study: "Study") -> dict[str, str]:
    """What makes the study, by name, each as JSON: another value is another study.

    Its sampling is left out: a set of more points goes on in the same folder.
    """
    made: dict[str, object] = {
        "base design": study.base_text,
        "cards": dict(study.cards),
        "drawings": {
            name: hashlib.sha256(data).hexdigest() for name, data in study.drawings.items()
        },
        "keys": [asdict(key) for key in study.keys],
        "effort": study.effort_told,
        "tolerance": study.tolerance,
        "limits": [asdict(limit) for limit in study.limits],
        "goals": [asdict(goal) for goal in study.goals],
    }
    return {name: json.dumps(value, sort_keys=True) for name, value in made.items()}


def kept_study(name: str, stated_texts: Mapping[str, str]) -> KeptStudy:
    """The study from what `stated` made of it.

    Raises:
        sqlite3.DatabaseError: it is damaged.
    """
    try:
        made = {key: json.loads(text) for key, text in stated_texts.items()}
        return KeptStudy(
            name,
            made["base design"],
            tuple(key["key"] for key in made["keys"]),
            tuple((limit["figure"], limit["least"], limit["most"]) for limit in made["limits"]),
            tuple((goal["figure"], goal["sense"]) for goal in made["goals"]),
            made["effort"],
            made["tolerance"],
        )
    except (ValueError, LookupError, TypeError):
        raise sqlite3.DatabaseError("what it says of its study is malformed") from None


def texts_of(cards: Mapping[str, str], drawings: Mapping[str, bytes]) -> str:
    """Cards and drawings as one text."""
    coded = {name: base64.b64encode(data).decode() for name, data in drawings.items()}
    return json.dumps({"cards": dict(cards), "drawings": coded}, sort_keys=True)


def kept_design(text: str, files: str) -> KeptDesign:
    """A design with the files that `texts_of` made one text."""
    made = json.loads(files)
    drawings = {name: base64.b64decode(coded) for name, coded in made["drawings"].items()}
    return KeptDesign(text, made["cards"], drawings)
