"""Design files and steel cards: TOML in, validated values out, every fault at once.

A fault is one line: `demo.toml:14: rotor.gap_mm = -0.4: too small; accepted a number above 0`.
"""

import difflib
import hashlib
import json
import re
import stat
import tomllib
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from operator import itemgetter
from pathlib import Path
from typing import TypeVar

from pydantic import BaseModel, ValidationError

from .design import MachineDesign, MagnetCard, SteelCard
from .design_faults import faults, key_text, shown
from .design_outlines import with_outlines
from .errors import CardError, DesignError, DrawingError, Finding, MagnetCardError
from .hot_steel import hot_findings
from .key_lines import KeyPath, key_lines, line_of
from .magnet_card import magnet_card_findings, temperature_findings
from .steel_card import card_findings

_Model = TypeVar("_Model", bound=BaseModel)

LARGEST_FILE = 1_000_000  # bytes; a design has 2 kB, a card with a thousand points 30 kB
_LARGEST_INTEGER = 2**63 - 1  # TOML promises whole numbers of 64 bits with sign, no more


@dataclass(frozen=True, slots=True)
class Machine:
    """A design with the cards it names; `path` is the design file."""

    design: MachineDesign
    rotor_steel: SteelCard
    stator_steel: SteelCard
    path: Path
    magnet: MagnetCard | None = None  # where the design names one

    @property
    def cards(self) -> tuple[SteelCard | MagnetCard, ...]:
        """All cards: rotor's and stator's steel, and the magnets' where there are any."""
        steel = (self.rotor_steel, self.stator_steel)
        return steel if self.magnet is None else (*steel, self.magnet)

    def _repr_html_(self) -> str:
        """The design as a notebook shows it, and its cards by name."""
        from .notebook import machine_html

        return machine_html(self)


def read_design(path: str | Path) -> MachineDesign:
    """The validated design in the TOML file `path`.

    Raises:
        DesignError: the file cannot be read or used; one line for each fault.
    """
    path = Path(path)
    return _design(path, _text(path))


def read_filled(
    path: Path, fillers: Mapping[str, object], tables: Sequence[str]
) -> tuple[MachineDesign, dict[str, object]]:
    """The design of some tables of a file with others in place of all the rest.

    Args:
        path: TOML file.
        fillers: a whole design's data, for what the file has not got.
        tables: that are taken from the file where it has them.

    Returns:
        The design, and the file's own data.

    Raises:
        DesignError: the file cannot be read or used; one line for each fault.
    """
    text = _text(path)
    data = _parsed(path, text)
    own = {name: data[name] for name in tables if name in data}
    return _design_of(path, text, {**fillers, **own}), data


def read_steel_card(path: Path) -> SteelCard:
    """The validated steel card in the TOML file `path`.

    Raises:
        DesignError: the file cannot be read or used; one line for each fault.
    """
    return _checked_card(path, SteelCard, card_findings)


def read_magnet_card(path: Path) -> MagnetCard:
    """The validated magnet card in the TOML file `path`.

    Raises:
        DesignError: the file cannot be read or used; one line for each fault.
    """
    return _checked_card(path, MagnetCard, magnet_card_findings)


def read_machine(path: str | Path, text: str | None = None) -> Machine:
    """The design in `path` and the cards it names; names count from the design's folder.

    Args:
        path: design file.
        text: that stands for what is in the file, as where it is being edited.

    Raises:
        DesignError: the design or a card cannot be read or used; one line for each fault.
    """
    path = Path(path)
    text = _text(path) if text is None else text
    design = _design(path, text)
    cards: list[SteelCard] = []
    # An ordered set, with the kind of each: both keys may name the same broken card.
    problems: dict[str, type[DesignError]] = {}
    for key in ("rotor_card", "stator_card"):
        name = getattr(design.steel, key)
        try:
            _raise_if_absent(path, text, ("steel", key), name)
            cards.append(read_steel_card(path.parent / name))
        except DesignError as error:
            problems[str(error)] = type(error)
    magnet: MagnetCard | None = None
    try:
        magnet = _magnet_card(path, text, design)
    except DesignError as error:
        problems[str(error)] = type(error)
    if not problems and (found := hot_findings(design, cards[0])):
        problems[_placed_text(found, path, text)] = DesignError
    if problems:
        first = next(iter(problems.values()))
        raise first("\n".join(problems))
    return Machine(design, cards[0], cards[1], path, magnet)


def _magnet_card(path: Path, text: str, design: MachineDesign) -> MagnetCard | None:
    """The magnet card that the design names, able to bear its temperature."""
    if design.magnet is None:
        return None
    _raise_if_absent(path, text, ("magnet", "card"), design.magnet.card)
    card = read_magnet_card(path.parent / design.magnet.card)
    found = temperature_findings(card, design.magnet)
    if found:
        raise DesignError(_placed_text(found, path, text))
    return card


def design_hash(design: MachineDesign, cards: tuple[SteelCard | MagnetCard, ...]) -> str:
    """SHA-256 in hex of everything the files state: the same for any layout of the same values."""
    values = [item.model_dump(mode="json") for item in (design, *cards)]
    outlines = (design.stator.outline, design.rotor.outline)
    drawings = [outline.source.sha256 for outline in outlines if outline is not None]
    if drawings:
        values.append({"drawings": drawings})
    canonical = json.dumps(values, sort_keys=True, separators=(",", ":"), allow_nan=False)
    return hashlib.sha256(canonical.encode()).hexdigest()


def read_tables(path: Path, model: type[_Model]) -> tuple[_Model, str]:
    """The validated tables of another kind of file, and its text.

    Raises:
        DesignError: the file cannot be read or used; one line for each fault.
    """
    text = _text(path)
    return _validated(path, text, model), text


def faults_at(path: Path, text: str, found: Sequence[tuple[KeyPath, str]]) -> DesignError:
    """Faults of keys as an error that names the file and the line of each."""
    return DesignError(_lines_text(path, text, found))


def placed(findings: tuple[Finding, ...], path: Path) -> DesignError:
    """The findings of a check as an error that names the file and the line of each key."""
    return DesignError(_placed_text(findings, path, _text(path)))


def _placed_text(findings: tuple[Finding, ...], path: Path, text: str) -> str:
    lines = key_lines(text)
    return "\n".join(
        f"{_name(path)}:{line_of(lines, _key_path(finding.key))}: {finding.text}"
        for finding in findings
    )


def _key_path(key: str) -> KeyPath:
    """`rotor.barrier[2].depth_mm` as the reader counts it: ("rotor", "barrier", 1, "depth_mm")."""
    parts = re.findall(r"([^.\[\]]+)|\[(\d+)\]", key)
    return tuple(int(part[1]) - 1 if part[1] else part[0] for part in parts)


def _name(path: Path) -> str:
    """The path as given, safe to print on one line."""
    return "".join(c if c.isprintable() else "?" for c in str(path))


def _design(path: Path, text: str) -> MachineDesign:
    """The validated design with the drawings that it names."""
    data = _parsed(path, text)
    if not data or any(_beyond_toml((), data)):
        return _validated(path, text, MachineDesign)
    return _design_of(path, text, data)


def _design_of(path: Path, text: str, data: dict[str, object]) -> MachineDesign:
    filled = with_outlines(data, path.parent)
    if filled.faults:
        raise DrawingError(_lines_text(path, text, filled.faults), filled.marks)
    return filled.outlines.put_into(_validated(path, text, MachineDesign, filled.data))


def _checked_card(
    path: Path, model: type[_Model], check: Callable[[_Model], tuple[Finding, ...]]
) -> _Model:
    try:
        card: _Model = _card_of(path, _text(path), model, check)
    except DesignError as error:
        # Told apart for the guide: a card has words that a design has too.
        kind = MagnetCardError if model is MagnetCard else CardError
        raise kind(str(error)) from None
    return card


# Cards are frozen and stay as they are while a design changes; reading one takes 3 to 5 ms.
@lru_cache(maxsize=16)
def _card_of(
    path: Path, text: str, model: type[_Model], check: Callable[[_Model], tuple[Finding, ...]]
) -> _Model:
    card = _validated(path, text, model)
    findings = check(card)
    if findings:
        raise DesignError(_placed_text(findings, path, text))
    return card


def _validated(
    path: Path, text: str, model: type[_Model], data: dict[str, object] | None = None
) -> _Model:
    """The text's values, or the `data` that stand for them, as the model holds them."""
    if data is None:
        data = _parsed(path, text)
    if not data:
        remedy = f"accepted the tables {', '.join(f'[{key}]' for key in _tables(model))}"
        raise DesignError(f"{_name(path)}: no key in the file; {remedy}")
    found = list(_beyond_toml((), data))
    if not found:
        try:
            return model.model_validate(data)
        except ValidationError as error:
            found = faults(error, model)
    raise DesignError(_lines_text(path, text, found))


def _lines_text(path: Path, text: str, found: Sequence[tuple[KeyPath, str]]) -> str:
    """Faults with their file and line, in the order of the lines."""
    lines = key_lines(text)
    at_lines = sorted(((line_of(lines, loc), fault) for loc, fault in found), key=itemgetter(0))
    return "\n".join(f"{_name(path)}:{line}: {fault}" for line, fault in at_lines)


def _beyond_toml(path: KeyPath, value: object) -> Iterator[tuple[KeyPath, str]]:
    """Whole numbers too large for TOML, which the standard reader takes all the same."""
    if isinstance(value, int) and abs(value) > _LARGEST_INTEGER:
        fault = f"too large; accepted up to {_LARGEST_INTEGER}"
        yield path, f"{key_text(path)} = {shown(value)}: {fault}"
    items = value.items() if isinstance(value, dict) else ()
    for key, item in enumerate(value) if isinstance(value, tuple) else items:
        yield from _beyond_toml((*path, key), item)


def _tables(model: type[BaseModel]) -> list[str]:
    fields = model.model_fields.items()
    return [
        key
        for key, field in fields
        if isinstance(field.annotation, type) and issubclass(field.annotation, BaseModel)
    ]


def _parsed(path: Path, text: str) -> dict[str, object]:
    """The file as the standard reader sees it, arrays as tuples for the strict tables."""
    try:
        data = tomllib.loads(text)
        frozen = _frozen(data)
    except tomllib.TOMLDecodeError as error:
        raise DesignError(f"{_name(path)}:{_syntax_fault(str(error), text)}") from None
    except RecursionError:
        raise DesignError(f"{_name(path)}: nested too deeply; accepted plain tables") from None
    except ValueError:
        # The interpreter refuses to read whole numbers of thousands of digits.
        fault = "a whole number has too many digits"
        raise DesignError(f"{_name(path)}: {fault}; accepted up to 18 digits") from None
    assert isinstance(frozen, dict)
    return frozen


def _frozen(value: object) -> object:
    if isinstance(value, list):
        return tuple(_frozen(item) for item in value)
    if isinstance(value, dict):
        return {key: _frozen(item) for key, item in value.items()}
    return value


def _syntax_fault(message: str, text: str) -> str:
    """Line, column and the line itself, from the reader's message."""
    what = re.sub(r" \(at .*\)$", "", message)
    what = what[:1].lower() + what[1:]
    remedy = "accepted lines like [table] and key = 1.5"
    if what.startswith("cannot overwrite") or what.endswith("twice"):
        what = "this key or table stands twice"
        remedy = "accepted each once, and [[table]] for each of several barriers"
    at = re.search(r"\(at line (\d+), column (\d+)\)$", message)
    rows = text.split("\n")
    row = int(at[1]) if at else len(rows)
    column = int(at[2]) if at else len(rows[-1]) + 1
    where = f"{row}: column {column} of {shown(rows[row - 1].strip())[1:-1] or 'an empty line'}"
    return f"{where}: not TOML, {what}; {remedy}"


def _text(path: Path) -> str:
    data = _bytes(path)
    try:
        # Some editors put a byte order mark before UTF-8: harmless, and dropped.
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        fault = f"byte 0x{data[error.start]:02x} is not UTF-8"
        raise DesignError(f"{_name(path)}:{line}: {fault}; accepted UTF-8 text") from None
    if not text.strip():
        raise DesignError(f"{_name(path)}: the file is empty; accepted a TOML file")
    return text.replace("\r\n", "\n")


def _bytes(path: Path) -> bytes:
    fault = _read_fault(path)
    if fault:
        raise DesignError(f"{_name(path)}: {fault}; accepted a TOML file")
    with path.open("rb") as file:
        data = file.read(LARGEST_FILE + 1)
    if len(data) > LARGEST_FILE:
        remedy = f"accepted up to {LARGEST_FILE // 1000} kB"
        raise DesignError(f"{_name(path)}: file too large; {remedy}")
    return data


def _read_fault(path: Path) -> str:
    """Why `path` cannot be read, empty where it can."""
    try:
        mode = path.stat().st_mode
        if stat.S_ISDIR(mode):
            return "this is a folder"
        if not stat.S_ISREG(mode):
            return "not a regular file"
        with path.open("rb"):
            return ""
    except (FileNotFoundError, NotADirectoryError):
        return "no such file"
    except OSError as error:
        return f"cannot be read, {(error.strerror or 'unknown reason').lower()}"
    except ValueError:  # a null character in the name
        return "not a file name"


def _raise_if_absent(path: Path, text: str, key: tuple[str, str], name: str) -> None:
    """A card that is not there is a fault of the key that names it, not of the card."""
    try:
        if (path.parent / name).is_file():
            return
        folder = (path.parent / name).parent
        others = sorted(item.name for item in folder.iterdir() if item.suffix == ".toml")
    except (OSError, ValueError):
        others = []
    near = difflib.get_close_matches(Path(name).name, others, n=1)
    hint = f"; did you mean {shown(str(Path(name).with_name(near[0]).as_posix()))}?" if near else ""
    remedy = hint or f"; accepted a {key[0]} card's file name, counted from the design's folder"
    line = line_of(key_lines(text), key)
    told = f"{key_text(key)} = {shown(name)}: no such file"
    raise DesignError(f"{_name(path)}:{line}: {told}{remedy}")
