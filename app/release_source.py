"""The design of a package, with all the files it names, as copies that stand on their own.

The design refers to its cards and drawings by names relative to its folder, which are part of its
hash: the copies keep these places to each other, byte for byte. Folders above the design's own get
plain names, so that nothing of the maker's disk is sent along.
"""

import os
import posixpath
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path, PurePosixPath, PureWindowsPath

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import DesignError

FOLDER = "source"  # of the package
LEVEL = "design"  # name of each folder above the design that its names climb over


@dataclass(frozen=True, slots=True)
class Copies:
    """Where the design stands in the package, and every copy with the file it is made of."""

    design: str
    files: tuple[tuple[str, Path], ...]  # name in the package, sorted; the file

    def write_to(self, folder: Path) -> None:
        """Write all copies below the folder."""
        for name, file in self.files:
            target = folder / name
            target.parent.mkdir(parents=True, exist_ok=True)
            target.write_bytes(file.read_bytes())


def copies_of(machine: Machine) -> Copies:
    """The copies that a machine's files become.

    Raises:
        DesignError: a file is named by its place on the disk instead of relative to the design.
    """
    named = list(_named(machine.design))
    faults = [
        f'{machine.path}: {key} = "{name}": a place on this disk cannot be sent along; '
        "accepted a name relative to the design's folder"
        for key, name in named
        if PurePosixPath(name).is_absolute() or PureWindowsPath(name).drive or "\\" in name
    ]
    if faults:
        raise DesignError("\n".join(faults))
    climbs = [posixpath.normpath(name).split("/").count("..") for _, name in named]
    home = "/".join([FOLDER, *[LEVEL] * max(climbs, default=0)])
    here = machine.path.parent
    design = f"{home}/{machine.path.name}"
    files = {design: machine.path}
    for _, name in named:
        files[posixpath.normpath(f"{home}/{name}")] = Path(os.path.normpath(here / name))
    return Copies(design, tuple(sorted(files.items())))


def _named(design: MachineDesign) -> Iterator[tuple[str, str]]:
    """Key and name of every file that the design names."""
    yield "steel.rotor_card", design.steel.rotor_card
    yield "steel.stator_card", design.steel.stator_card
    if design.magnet is not None:
        yield "magnet.card", design.magnet.card
    for part, keys in (("stator", design.stator), ("rotor", design.rotor)):
        if keys.outline_dxf is not None:
            yield f"{part}.outline_dxf", keys.outline_dxf
