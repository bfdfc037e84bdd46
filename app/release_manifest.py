"""The manifest of a package: what is in it, what is promised, and by what a change shows.

Every figure has its unit in its key. The seal is the SHA-256 of all else in the manifest, so that
a figure changed by hand shows; who changes the seal along is found by the figures' sources, see
`verify`, or by the number of the package that both sides have noted.
"""

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass, fields
from pathlib import Path

from lamwright.geometry.design import LimitsDesign
from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.files import json_text
from lamwright.postprocess.magnet_figures import MagnetFigures
from lamwright.postprocess.quantities import Shown
from lamwright.postprocess.verdict import MagneticFigures, StressFigures, TerminalFigures

MANIFEST_FILE = "manifest.json"
FORM = 1  # of the manifest
PASSED, NOT_PASSED = "passed", "NOT PASSED"
LEFT_OUT = ("seconds", "outline_dxf")  # of a verdict: what changes from run to run, no file here
LARGEST = 4_000_000  # bytes of a manifest or a verdict; 10 kB are usual
PROMISED = (MagneticFigures, TerminalFigures, StressFigures, MagnetFigures)

FIGURE_OF_LIMIT = {
    "least_torque_nm": "torque_nm",
    "most_ripple_percent": "torque_ripple_percent",
    "least_saliency_ratio": "saliency_ratio",
    "least_yield_margin": "yield_margin",
}

Record = dict[str, object]


@dataclass(frozen=True, slots=True)
class Promise:
    """What a verdict promises: its record without what changes from run to run."""

    record: Record
    missed: tuple[str, ...]  # limits of the design that do not hold

    @property
    def passes(self) -> bool:
        """Whether every limit holds."""
        return not self.missed


def promise_of(record: Mapping[str, object], limits: LimitsDesign) -> Promise:
    """The promise of a verdict's record; its figures are judged anew, by the design's limits.

    Raises:
        LamwrightError: a figure that a limit needs is not in the record.
    """
    missed = []
    for key, limit in limits.model_dump().items():
        value = record.get(FIGURE_OF_LIMIT[key])
        if isinstance(value, bool) or not isinstance(value, int | float):
            raise LamwrightError(f"the figure of limits.{key} is missing; assess the design again")
        if not (value >= limit if key.startswith("least_") else value <= limit):
            missed.append(key)
    kept = {key: value for key, value in record.items() if key not in LEFT_OUT}
    return Promise(kept, tuple(missed))


def promised_figures(record: Mapping[str, object]) -> Record:
    """Value, error, unit and standing of each figure promised; an error not known is None."""
    estimates = record.get("estimates")
    found: Record = {}
    for group in PROMISED:
        for item in fields(group):
            shown: Shown = item.metadata["shown"]
            if shown.key in record:
                found[shown.key] = {
                    "value": record[shown.key],
                    "error": record.get(f"{shown.key}_error"),
                    "unit": shown.unit,
                    "is_estimate": isinstance(estimates, list) and shown.key in estimates,
                }
    return found


def sealed(record: Mapping[str, object]) -> Record:
    """The manifest with its seal as the last key."""
    return {**record, "seal": seal_of(record)}


def seal_of(record: Mapping[str, object]) -> str:
    """SHA-256 in hex of all of the manifest but its seal."""
    rest = {key: value for key, value in record.items() if key != "seal"}
    text = json.dumps(rest, sort_keys=True, separators=(",", ":"), allow_nan=False)
    return hashlib.sha256(text.encode()).hexdigest()


def package_number(text: str) -> str:
    """The number that both sides may compare: the manifest's SHA-256, four groups of four."""
    digest = hashlib.sha256(text.encode()).hexdigest()[:16]
    return " ".join(digest[k : k + 4] for k in range(0, 16, 4))


def file_sha256(path: Path) -> str:
    """SHA-256 in hex of a file."""
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()


def read_record(path: Path, what: str) -> Record:
    """The JSON object in a file; numbers that are none are refused.

    Raises:
        LamwrightError: the file cannot be read as one.
    """
    try:
        if path.stat().st_size > LARGEST:
            raise LamwrightError(f"{path}: file too large; accepted {what}")
        record = json.loads(path.read_text(encoding="utf-8"), parse_constant=_refuse)
    except OSError as error:
        reason = (error.strerror or "unknown reason").lower()
        raise LamwrightError(f"{path}: {reason}; accepted {what}") from None
    except (ValueError, RecursionError):
        raise LamwrightError(f"{path}: not JSON; accepted {what}") from None
    if not isinstance(record, dict):
        raise LamwrightError(f"{path}: no JSON object; accepted {what}")
    return record


def manifest_text(record: Mapping[str, object]) -> str:
    """The manifest's bytes."""
    return json_text(sealed(record))


def rounded(value: float) -> float:
    """To nine significant digits: the same on machines whose last bits differ."""
    return float(f"{value:.9g}")


def _refuse(constant: str) -> float:
    raise ValueError(constant)
