"""Contours as solids in a STEP file, by gmsh's OpenCASCADE kernel: arcs stay arcs.

A circle becomes one edge and its wall one cylinder, an arc a piece of a cylinder; nothing is
turned into splines or chords. The form is AP214 (AUTOMOTIVE_DESIGN), millimetres, what every
general CAD program reads. The same solids give the same bytes: the time, the library's names and
its count of files written are taken out of the text. The library also writes each edge a second
time, in the parameters of its surfaces, splines among them: a reader makes these itself, and
without them a file has a third of its size and nothing but lines and circles.
"""

import cmath
import math
import os
import re
import sys
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from itertools import count as count_from
from pathlib import Path as FilePath
from tempfile import TemporaryDirectory

from lamwright.geometry.curves import Edge, Path
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.whole_file import write_text

from .mesh import GMSH_LOCK, begin_gmsh

MM = 1e3  # mm per m
# m: an arc that leaves its chord by less is drawn as a line. The kernel makes no circle through
# three points that are one line within its own 1e-7 mm.
LEAST_RISE = 1e-9
WHOLE_TOL = 1e-9  # m and rad, of the centres and the whole turn of arcs that are one circle
_PRODUCT = re.compile(r"'Open CASCADE STEP translator [\d.]+ \d+((?:\.\d+)?)'")
_USAGE = re.compile(r"(?<=NEXT_ASSEMBLY_USAGE_OCCURRENCE\(')\d+(?=')")
_STATEMENT = re.compile(r"#(\d+) = (.*?);\n(?=#|ENDSEC)", re.DOTALL)
_REFERENCE = re.compile(r"#(\d+)")
_DOUBLED = re.compile(r"(?:SURFACE|SEAM)_CURVE\('',#(\d+),")
_HEADER = re.compile(r"FILE_NAME\(.*?\);\nFILE_DESCRIPTION\(.*?\);", re.DOTALL)


@dataclass(frozen=True, slots=True)
class Solid:
    """A sheet or a pile of sheets: an outline and its holes, raised from `bottom` by `height`.

    Lengths in m; `turn` in rad about the shaft axis.
    """

    outer: Path
    holes: tuple[Path, ...]
    bottom: float
    height: float
    turn: float = 0.0


def write_step(path: FilePath, name: str, solids: Sequence[Solid], date: str = "") -> None:
    """Write solids as STEP; the file appears complete or not at all.

    Args:
        path: file to write; its folder must exist.
        name: of the product; of several solids each has its number from 1 after it.
        solids: what to write.
        date: of the header, as 2026-01-31; none where not given.

    Raises:
        LamwrightError: the kernel cannot make a solid of an outline.
    """
    import gmsh

    with GMSH_LOCK, TemporaryDirectory() as folder, _session():
        try:
            for solid in solids:
                _add(solid)
            gmsh.model.occ.synchronize()
            raw = FilePath(folder, "raw.step")
            gmsh.write(str(raw))
        except Exception as fault:  # gmsh raises no narrower kind
            raise LamwrightError(f"{path.name}: no solid of this outline: {fault}") from fault
        text = raw.read_text(encoding="ascii")
    write_text(path, _named(_without_pcurves(text), name, date))


def step_volumes(path: FilePath) -> tuple[float, ...]:
    """Volumes in m^3 of the solids in a STEP file, in its order.

    Raises:
        LamwrightError: the file cannot be read.
    """
    import gmsh

    with GMSH_LOCK, _session():
        try:
            found = gmsh.model.occ.importShapes(str(path))
            masses = [gmsh.model.occ.getMass(3, tag) for dim, tag in found if dim == 3]
        except Exception:
            masses = []
    if not masses:
        raise LamwrightError(f"{path}: no solid can be read from it; accepted a STEP file")
    return tuple(mass / MM**3 for mass in masses)


@contextmanager
def _session() -> Iterator[None]:
    """A gmsh of its own, silent: its kernel writes to the process's output, whatever gmsh is told.

    The output is turned away below Python, where the kernel writes.
    """
    import gmsh

    sys.stdout.flush()
    kept = os.dup(1)
    with open(os.devnull, "wb") as nowhere:
        os.dup2(nowhere.fileno(), 1)
    try:
        is_ours = not gmsh.isInitialized()
        if is_ours:
            begin_gmsh()
        gmsh.option.setNumber("General.Terminal", 0)
        gmsh.option.setNumber("General.NumThreads", 1)
        gmsh.option.setString("Geometry.OCCTargetUnit", "MM")
        gmsh.model.add("lamwright_step")
        try:
            yield
        finally:
            gmsh.model.remove()
            if is_ours:
                gmsh.finalize()
    finally:
        os.dup2(kept, 1)
        os.close(kept)


def _add(solid: Solid) -> None:
    import gmsh

    occ = gmsh.model.occ
    loops = [_loop(path, solid) for path in (solid.outer, *solid.holes)]
    face = occ.addPlaneSurface(loops)
    occ.extrude([(2, face)], 0.0, 0.0, MM * solid.height)


def _loop(path: Path, solid: Solid) -> int:
    import gmsh

    occ, height = gmsh.model.occ, MM * solid.bottom
    turn = cmath.exp(1j * solid.turn) if solid.turn else 1.0
    whole = whole_circle(path)
    if whole is not None:
        centre, radius = MM * whole[0] * turn, MM * whole[1]
        return int(occ.addCurveLoop([occ.addCircle(centre.real, centre.imag, height, radius)]))

    def point(at: complex) -> int:
        at *= MM * turn
        return int(occ.addPoint(at.real, at.imag, height))

    starts = [point(edge.start) for edge in path.edges]
    curves = []
    for edge, start, end in zip(path.edges, starts, [*starts[1:], starts[0]], strict=True):
        if _is_straight(edge):
            curves.append(occ.addLine(start, end))
        else:
            middle = point(edge.point(0.5))
            curves.append(occ.addCircleArc(start, middle, end, center=False))
            occ.remove([(0, middle)])  # left there, it is written as a body of its own
    return int(occ.addCurveLoop(curves))


def _is_straight(edge: Edge) -> bool:
    # Height of the arc over its chord: half the chord times the bulge.
    return 0.5 * abs(edge.end - edge.start) * abs(edge.bulge) < LEAST_RISE


def whole_circle(path: Path) -> tuple[complex, float] | None:
    """Centre and radius in m of the circle that the path is, None where it is none."""
    if any(edge.is_line for edge in path.edges):
        return None
    first = path.edges[0]
    turn = sum(edge.sweep for edge in path.edges)
    if abs(abs(turn) - 2.0 * math.pi) > WHOLE_TOL or any(
        max(abs(edge.centre - first.centre), abs(edge.radius - first.radius)) > WHOLE_TOL
        for edge in path.edges
    ):
        return None
    return first.centre, first.radius


def _without_pcurves(text: str) -> str:
    """The text with each edge's curve in space alone, numbered anew."""
    start = text.index("DATA;\n") + len("DATA;\n")
    end = text.index("ENDSEC;", start)
    bodies = {int(number): body for number, body in _STATEMENT.findall(text[start:])}
    space = {n: int(m[1]) for n, body in bodies.items() if (m := _DOUBLED.match(body))}
    uses = {n: [int(k) for k in _REFERENCE.findall(body)] for n, body in bodies.items()}
    used = {k for named in uses.values() for k in named}
    todo = [n for n in bodies if n not in used]
    kept = set(todo)
    while todo:
        for one in uses[todo.pop()]:
            k = space.get(one, one)
            if k not in kept:
                kept.add(k)
                todo.append(k)
    number = {n: at for at, n in enumerate((n for n in bodies if n in kept), start=1)}

    def renumbered(found: re.Match[str]) -> str:
        n = int(found[1])
        return f"#{number[space.get(n, n)]}"

    rows = [f"#{number[n]} = {_REFERENCE.sub(renumbered, bodies[n])};\n" for n in number]
    return text[:start] + "".join(rows) + text[end:]


def _named(text: str, name: str, date: str) -> str:
    stamp = f"{date}T00:00:00" if date else ""
    header = (
        f"FILE_DESCRIPTION(('{name}'),'2;1');\n"
        f"FILE_NAME('{name}','{stamp}',(''),(''),'','Lamwright','');"
    )
    text, count = _HEADER.subn(header, text, count=1)
    if count != 1:
        raise LamwrightError(f"{name}: the STEP header is not the expected one")
    usages = count_from(1)
    text = _USAGE.sub(lambda _: str(next(usages)), text)
    return _PRODUCT.sub(lambda found: f"'{name}{found[1].replace('.', '_')}'", text)
