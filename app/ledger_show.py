"""A design of a ledger as files again: its design file, and beside it the cards that it names."""

import hashlib
import tomllib
from collections.abc import Iterator, Mapping
from pathlib import Path, PurePosixPath

from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.restated import restated
from lamwright.geometry.whole_file import whole_file

CARDS_FOLDER = "cards"  # beside the design file


def written_design(path: Path, text: str, files: Mapping[str, bytes]) -> Path:
    """Write a design file with its cards and drawings in a folder beside it.

    Args:
        path: of the design file.
        text: of the design.
        files: cards and drawings by their names in the text, which become those of the copies.

    Raises:
        LamwrightError: it cannot be written.
    """
    try:
        names: dict[str, str] = {}
        for name, data in files.items():
            copy = _free(path.parent / CARDS_FOLDER, PurePosixPath(name).name, data)
            _write(copy, data)
            names[name] = copy.relative_to(path.parent).as_posix()
        stated = tomllib.loads(text)
        values = {key: names[value] for key, value in _texts(stated, "") if value in names}
        _write(path, restated(text, values).encode())
    except OSError as error:
        reason = (error.strerror or str(error)).lower()
        raise LamwrightError(f"{path}: cannot be written: {reason}; give another --to") from None
    return path


def _write(path: Path, data: bytes) -> None:
    path.parent.mkdir(parents=True, exist_ok=True)
    with whole_file(path) as temporary:
        temporary.write_bytes(data)


def _free(folder: Path, name: str, data: bytes) -> Path:
    """Where a copy may lie: under its own name, or with its hash where that is of another file."""
    path = folder / name
    if path.is_file() and path.read_bytes() != data:
        mark = hashlib.sha256(data).hexdigest()[:8]
        return path.with_name(f"{path.stem}-{mark}{path.suffix}")
    return path


def _texts(data: object, key: str) -> Iterator[tuple[str, str]]:
    """All texts of TOML data by their keys as messages write them."""
    if isinstance(data, dict):
        for name, value in data.items():
            yield from _texts(value, f"{key}.{name}" if key else name)
    elif isinstance(data, list):
        for k, value in enumerate(data):
            yield from _texts(value, f"{key}[{k + 1}]")
    elif isinstance(data, str):
        yield key, data
