"""What a report tells of repeating it: all files in one folder, and the command to run there.

Files name each other by relative places, which may climb above the design's own folder: there the
folders get plain names, so that nothing of this disk is told and an empty folder holds all.
"""

import posixpath
import shlex
import tomllib
from collections.abc import Mapping, Sequence
from pathlib import Path, PurePosixPath, PureWindowsPath
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import Machine
from lamwright.postprocess.report import Listing, Paragraph, Section

from .report_parts import made_by

if TYPE_CHECKING:
    from .study import Study

LEVEL = "design"  # name of each folder above the first file's that the others' names climb over


def together(names: Sequence[str]) -> list[str]:
    """Names relative to one folder as names below a folder that holds them all.

    A name that is a place on a disk stays as it is.
    """
    climbs = max((posixpath.normpath(name).split("/").count("..") for name in names), default=0)
    home = "/".join([LEVEL] * climbs)

    def placed(name: str) -> str:
        is_absolute = PurePosixPath(name).is_absolute() or bool(PureWindowsPath(name).drive)
        return name if is_absolute else posixpath.normpath(posixpath.join(home, name))

    return [placed(name) for name in names]


def repeat_section(
    command: str,
    options: str,
    machine: Machine,
    design_hash: str,
    drawings: Mapping[str, str] | None = None,
) -> Section:
    """All that a second person needs to compute the same.

    Args:
        command: as `assess`.
        options: of the command, as it is typed.
        machine: the design with its cards.
        design_hash: SHA-256 of what they state.
        drawings: SHA-256 of further files that take part, by names counted from where the command
            is run.
    """
    design = machine.design
    cards = dict.fromkeys((design.steel.rotor_card, design.steel.stator_card))
    if design.magnet is not None:
        cards[design.magnet.card] = None
    outlines = [
        (keys.outline_dxf, keys.outline.source.sha256)
        for keys in (design.stator, design.rotor)
        if keys.outline_dxf is not None and keys.outline is not None
    ]
    names = together([machine.path.name, *cards, *(name for name, _ in outlines)])
    home = machine.path.parent
    texts = [_text(path) for path in (machine.path, *(home / card for card in cards))]
    kinds = ["Design file", *["Card"] * len(cards)]
    hashes = {name: sha for name, (_, sha) in zip(names[len(texts) :], outlines, strict=True)}
    return _section(
        f"lamwright {command} {shlex.quote(names[0])} {options}",
        [Listing(f"{k} {n}", t) for k, n, t in zip(kinds, names, texts, strict=False)],
        {**hashes, **(drawings or {})},
        f"The design and its cards have the SHA-256 {design_hash}, which the new report has to "
        "tell too; the same versions give the same figures.",
    )


def study_section(study: "Study", command: str, options: str) -> Section:
    """All that a second person needs to compute a study.

    Args:
        study: as read from its file.
        command: `sweep` or `search`.
        options: of the command, as it is typed.
    """
    from .study import sha256_of

    text = _text(study.path)
    base = str(tomllib.loads(text).get("base", study.base_name))
    beside = posixpath.dirname(base)
    others = [posixpath.join(beside, name) for name in (*study.cards, *study.drawings)]
    names = together([study.path.name, base, *others])
    cards = names[2 : 2 + len(study.cards)]
    return _section(
        f"lamwright {command} {shlex.quote(names[0])} {options}",
        [
            Listing(f"Study file {names[0]}", text),
            Listing(f"Base design {names[1]}", study.base_text),
            *(Listing(f"Card {n}", t) for n, t in zip(cards, study.cards.values(), strict=True)),
        ],
        dict(zip(names[2 + len(cards) :], map(sha256_of, study.drawings.values()), strict=True)),
        f"The study has the hash {study.hash}; the same versions give the same figures. "
        "lamwright ledger FOLDER --show NUMBER writes a design back, ready for assess.",
    )


def _section(
    command: str, listings: Sequence[Listing], drawings: Mapping[str, str], told: str
) -> Section:
    where = "".join(f" Beside them belongs {n}, of SHA-256 {s}." for n, s in drawings.items())
    return Section(
        "To repeat it",
        (
            Paragraph(
                "Save each file listed below by the name in its heading, all in one empty folder "
                "(copy from report.html: a PDF breaks long lines)." + where + " There, run"
            ),
            Listing("Command", command),
            Paragraph(told),
            made_by(),
            *listings,
        ),
    )


def _text(path: Path) -> str:
    return path.read_text(encoding="utf-8-sig")
