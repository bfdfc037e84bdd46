"""Released DXFs in two general-purpose CAD programs: they open, without a word, at the right size.

LibreCAD prints them true to scale without a screen, FreeCAD's own reader turns them into edges; of
both what comes out is measured. Neither program knows of this tool. Where one is not installed its
test says so and is left out: `apt-get install librecad freecad` (16 MB and 281 MB to fetch).
"""

import json
import math
import os
import re
import shutil
import subprocess
import zlib
from pathlib import Path as FilePath

import pytest
from outlines import DESIGNS

from lamwright.geometry.contours import Contour
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area
from lamwright.geometry.design_file import read_design
from lamwright.geometry.dxf_release import COLOURS, FORMS, bounding_box, write_release
from lamwright.geometry.punch_layers import rotor_lamination, stator_lamination
from lamwright.geometry.punch_offset import punched
from lamwright.geometry.punch_options import PunchOptions

pytestmark = pytest.mark.slow

MM = 1e-3  # m
COMPLAINTS = re.compile(r"error|warning|repair|recover|fail|unsupported|exception", re.IGNORECASE)
PRINTER_STEP = 25.4 / 1200.0  # mm, to which LibreCAD rounds what it prints
PRINTER_SCALE = 5e-4  # of any length: its millimetre is 47.26 steps, not 47.24, for every drawing
RGB = {7: (0, 0, 0), 1: (1, 0, 0), 5: (0, 0, 1), 6: (1, 0, 1), 3: (0, 1, 0)}

Lamination = tuple[Contour, ...]


def laminations() -> dict[str, Lamination]:
    """Notches, magnets, keyways, holes, an eccentric rim cut by a beam; slots open and closed."""
    sections = {
        name: cross_section(read_design(DESIGNS / "gallery" / f"{name}.toml"))
        for name in ("conveyor_36s6p", "compressor_24s4p", "winder_72s12p", "spindle_24s2p")
    }
    return {
        "conveyor_rotor": rotor_lamination(sections["conveyor_36s6p"]),
        "compressor_rotor": punched(
            rotor_lamination(sections["compressor_24s4p"]), PunchOptions(0.06)
        ),
        "winder_rotor": rotor_lamination(sections["winder_72s12p"]),
        "conveyor_stator": stator_lamination(sections["conveyor_36s6p"]),
        "spindle_stator": stator_lamination(sections["spindle_24s2p"]),
    }


@pytest.fixture(scope="module")
def released(tmp_path_factory) -> dict[FilePath, Lamination]:
    """Every lamination in both forms."""
    folder = tmp_path_factory.mktemp("release")
    files = {}
    for name, contours in laminations().items():
        for form in FORMS:
            path = folder / f"{name}_{form}.dxf"
            write_release(contours, path, form, ("Invented", "millimetres"), 0.4)
            files[path] = contours
    return files


def program(name: str) -> str:
    found = shutil.which(name)
    if found is None:
        pytest.skip(f"{name} is not installed (apt-get install librecad freecad)")
    return found


FREECAD = """
import json, os, FreeCAD, Import, Part
wanted = os.environ["LAMINATIONS"]
result = {}
for path in json.load(open(wanted)):
    document = FreeCAD.newDocument()
    Import.readDXF(path)
    edges = [e for o in document.Objects if hasattr(o, "Shape") for e in o.Shape.Edges]
    loops = []
    for run in Part.sortEdges(edges):
        wire = Part.Wire(run)
        if wire.isClosed():
            kinds = sorted({type(e.Curve).__name__ for e in run})
            loops.append([Part.Face(wire).Area, wire.Length, kinds, len(run)])
    result[path] = loops
    FreeCAD.closeDocument(document.Name)
open(wanted + ".out", "w").write(json.dumps(result))
"""


def test_freecad_reads_every_contour_closed_with_its_area_and_length(released, tmp_path):
    """Areas and lengths to 1e-7 (the program keeps points to 1e-7 mm), lines and circles only."""
    command = program("freecadcmd")
    script, wanted = tmp_path / "read.py", tmp_path / "files.json"
    script.write_text(FREECAD)
    wanted.write_text(json.dumps([str(path) for path in released]))
    env = {**os.environ, "HOME": str(tmp_path), "LAMINATIONS": str(wanted)}
    env.pop("VIRTUAL_ENV", None)  # it would look there for a script of its own and complain
    run = subprocess.run(
        [command, str(script)], env=env, capture_output=True, text=True, timeout=600
    )
    assert run.returncode == 0, run.stderr
    assert not COMPLAINTS.search(run.stdout + run.stderr)
    result = json.loads(FilePath(f"{wanted}.out").read_text())
    for path, contours in released.items():
        loops = sorted(result[str(path)])
        ours = sorted(
            [abs(area(c.path)) / MM**2, sum(e.length for e in c.path.edges) / MM] for c in contours
        )
        assert [loop[:2] for loop in loops] == [pytest.approx(one, rel=1e-7) for one in ours]
        assert sum(loop[3] for loop in loops) == sum(len(c.path.edges) for c in contours)
        assert {kind for loop in loops for kind in loop[2]} <= {"Circle", "Line"}


def test_librecad_prints_every_layer_at_its_size(released, tmp_path):
    """Printed 1 to 1 or 1 to 2, the extents of each layer are those of its contours."""
    command = program("librecad")
    env = {**os.environ, "HOME": str(tmp_path), "QT_QPA_PLATFORM": "offscreen"}
    for path, contours in released.items():
        # Its page is A3 whatever is asked for, so large ones are printed at half their size.
        low, high = bounding_box(contours)
        scale = 1.0 if (high - low).imag < 250 * MM else 0.5
        options = ["dxf2pdf", "-c", "-s", f"{scale:g}", "-t", str(tmp_path), str(path)]
        run = subprocess.run(
            [command, *options], env=env, capture_output=True, text=True, timeout=300
        )
        assert run.returncode == 0, run.stderr
        assert not COMPLAINTS.search((run.stdout + run.stderr).replace("RS_DEBUG: Warnings", ""))
        drawn = printed_extents(tmp_path / f"{path.stem}.pdf")
        for layer in {c.layer for c in contours}:
            low, high = bounding_box([c for c in contours if c.layer == layer])
            width, height = (scale * (high - low).real / MM, scale * (high - low).imag / MM)
            size = pytest.approx((width, height), rel=PRINTER_SCALE, abs=2.0 * PRINTER_STEP)
            assert drawn[RGB[COLOURS[layer]]] == size


def printed_extents(path: FilePath) -> dict[tuple[int, ...], tuple[float, float]]:
    """Width and height in mm of all strokes of each colour on the first page that draws."""
    data = path.read_bytes()
    streams = re.findall(rb"stream\r?\n(.*?)endstream", data, re.DOTALL)
    page = max((_inflated(stream) for stream in streams), key=len).decode("latin1")
    scale, colour = 1.0, None
    points: dict[tuple[int, ...], list[complex]] = {}
    for row in page.splitlines():
        words = row.split()
        if words[-1:] == ["cm"] and scale == 1.0:
            scale = float(words[0]) * 25.4 / 72.0  # points to mm
        elif words[-1:] == ["SCN"]:
            colour = tuple(round(float(word)) for word in words[:3])
            is_grey = any(0.01 < float(word) < 0.99 for word in words[:3])
            colour = None if is_grey else colour
        elif len(words) == 3 and words[2] in ("m", "l") and colour is not None:
            points.setdefault(colour, []).append(scale * complex(float(words[0]), float(words[1])))
    assert not math.isclose(scale, 1.0)
    return {
        key: (
            max(p.real for p in all_of) - min(p.real for p in all_of),
            max(p.imag for p in all_of) - min(p.imag for p in all_of),
        )
        for key, all_of in points.items()
    }


def _inflated(stream: bytes) -> bytes:
    try:
        return zlib.decompress(stream)
    except zlib.error:
        return b""
