"""The machine of a design that is known as text, with the texts of the files that it names.

The reader of designs wants files, so they are put into a folder of their own for a moment; what it
says is told without that folder. Cost: 1 ms beside the reading.
"""

import tempfile
from collections.abc import Mapping
from pathlib import Path, PurePosixPath

from lamwright.geometry.design_file import Machine, read_machine
from lamwright.geometry.errors import DesignError

_DOWN = "base"  # folders above the design, for names that lead upward


def machine_of(
    name: str, text: str, cards: Mapping[str, str], drawings: Mapping[str, bytes]
) -> Machine:
    """The validated machine.

    Args:
        name: of the design file, for messages.
        text: of the design.
        cards: texts by their names as the design states them.
        drawings: likewise.

    Raises:
        DesignError: it cannot be read or used; one line for each fault, as of files beside the
            design.
    """
    with tempfile.TemporaryDirectory(prefix="lamwright-") as made:
        root = Path(made)
        folder = root
        for _ in range(_most_up([*cards, *drawings])):
            folder /= _DOWN
        folder.mkdir(parents=True, exist_ok=True)
        path = folder / PurePosixPath(name).name
        path.write_text(text, encoding="utf-8")
        for file, content in cards.items():
            _put(root, folder / file, content.encode())
        for file, data in drawings.items():
            _put(root, folder / file, data)
        try:
            return read_machine(path)
        except DesignError as error:
            raise DesignError(str(error).replace(f"{folder}/", "")) from None


def _put(root: Path, path: Path, data: bytes) -> None:
    path = path.resolve()
    if not path.is_relative_to(root.resolve()):
        raise DesignError(f"{path}: outside the study; accepted names counted from the design")
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(data)


def _most_up(names: list[str]) -> int:
    """How many folders up any name leads, at the most."""
    return max((PurePosixPath(name).parts.count("..") for name in names), default=0)
