"""The solids of a package, and whether a STEP file still holds them.

The same solids give the same bytes, so a file is first compared with one made anew. Only where it
differs is it read, by a process of its own: the kernel that reads STEP ends the whole process on
some damaged files (7 of 24 with bytes changed or cut off), and may take any time.
"""

import json
import subprocess
import sys
from collections.abc import Iterator, Sequence
from importlib.metadata import version as installed_version
from pathlib import Path
from tempfile import TemporaryDirectory

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.mesh_step import Solid, step_volumes, write_step

from .release_parts import Part

VOLUME_TOL = 1e-6  # relative, of a solid against area x height
MM3 = 1e9  # mm^3 per m^3
PATIENCE = 120.0  # s for a file that is not the design's; 10 s for the largest of the gallery
_READ = (
    "import json, sys; from pathlib import Path; from lamwright.solver.mesh_step import "
    "step_volumes; Path(sys.argv[2]).write_text(json.dumps(step_volumes(Path(sys.argv[1]))))"
)


def kernel() -> str:
    """What makes the solids: other versions of it may write other bytes."""
    return f"gmsh {installed_version('gmsh')}"


def write_solids(parts: Sequence[Part], folder: Path, date: str) -> None:
    """Write one lamination and the stack of each part as STEP; read back and compared.

    Raises:
        LamwrightError: a volume is not area x length.
    """
    for part in parts:
        for name, solids in _solids_of(part).items():
            file = folder / f"{name}.step"
            write_step(file, name, solids, date)
            fault = _unlike(part, solids, step_volumes(file))
            if fault:
                raise LamwrightError(f"{file.name}: {fault}")


def solid_faults(parts: Sequence[Part], folder: Path, date: str) -> Iterator[str]:
    """One line for each STEP file in the folder that is not what is made of the parts now."""
    with TemporaryDirectory() as made:
        for part in parts:
            for name, solids in _solids_of(part).items():
                file, own = folder / f"{name}.step", Path(made, f"{name}.step")
                if not file.is_file():
                    continue
                write_step(own, name, solids, date)
                if file.read_bytes() != own.read_bytes():
                    yield f"{file.name}: {_told(part, solids, file)}"


def _solids_of(part: Part) -> dict[str, tuple[Solid, ...]]:
    """What stands in each STEP file of a part, by the file's name without ending."""
    return {f"{part.name}_lamination": part.lamination(), f"{part.name}_stack": part.stack()}


def _told(part: Part, solids: Sequence[Solid], file: Path) -> str:
    volumes = _read_apart(file)
    if volumes is None:
        return "cannot be read as solids"
    return _unlike(part, solids, volumes) or "not the design's solids, though of their volume"


def _unlike(part: Part, solids: Sequence[Solid], found: Sequence[float]) -> str:
    """How the volumes in m^3 miss area x height; nothing where they do not."""
    due = [part.area * solid.height for solid in solids]
    if len(found) != len(due):
        return f"{len(found)} solids; the design has {len(due)}"
    pairs = zip(sorted(found), sorted(due), strict=True)
    if all(abs(a / b - 1.0) <= VOLUME_TOL for a, b in pairs):
        return ""
    return f"{MM3 * sum(found):.9g} mm3; the design has {MM3 * sum(due):.9g}"


def _read_apart(file: Path) -> list[float] | None:
    """Volumes in m^3, read in a process of its own; None where that does not end well."""
    with TemporaryDirectory() as folder:
        result = Path(folder, "volumes.json")
        line = [sys.executable, "-c", _READ, str(file), str(result)]
        try:
            subprocess.run(line, capture_output=True, timeout=PATIENCE, check=True)
            volumes: list[float] = json.loads(result.read_text())
        except (subprocess.SubprocessError, OSError, ValueError):
            return None
        return volumes
