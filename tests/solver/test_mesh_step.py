"""STEP files: volumes in closed form, circles as circles, the same bytes each time."""

import hashlib
import math
import re
import shutil
import subprocess
import sys

import pytest
from outlines import DESIGNS

from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Edge, Path, area, circle, line, reversed_path
from lamwright.geometry.design_file import read_design
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.skew import skew_offsets
from lamwright.solver.mesh_step import Solid, step_volumes, whole_circle, write_step

RING = (circle(0j, 0.05), (reversed_path(circle(0j, 0.015)),))
FREECAD = shutil.which("freecadcmd") or shutil.which("FreeCADCmd")


def _slot(radius, length):
    """A slotted hole: two lines and two half circles, clockwise."""
    a, b = complex(0.03, radius), complex(0.03 + length, radius)
    c, d = b.conjugate(), a.conjugate()
    return Path((line(a, b), Edge(b, c, -1.0), line(c, d), Edge(d, a, -1.0)))


def _skewed(name):
    """The stack of a shipped design, one solid a step, and its volume by the outline."""
    design = read_design(DESIGNS / name)
    section = cross_section(design)
    outer, *holes = (contour.path for contour in lamination_contours(section))
    offsets = skew_offsets(design)
    high = section.stack_length / len(offsets)
    solids = [Solid(outer, tuple(holes), k * high, high, turn) for k, turn in enumerate(offsets)]
    return solids, sum(area(path) for path in (outer, *holes)) * section.stack_length


def test_volume_of_a_ring_with_a_slot(tmp_path):
    """Area pi (R^2 - r^2) less the slot 2 r l + pi r^2, times height; 15 digits."""
    path = tmp_path / "ring.step"
    outer, bore = RING
    write_step(path, "ring", [Solid(outer, (*bore, _slot(0.002, 0.01)), 0.0, 5e-4)])
    slot = 2.0 * 0.002 * 0.01 + math.pi * 0.002**2
    expected = (math.pi * (0.05**2 - 0.015**2) - slot) * 5e-4
    assert step_volumes(path) == pytest.approx([expected], rel=1e-12)


def test_arcs_are_arcs_and_the_form_is_ap214(tmp_path):
    """One cylinder each for rim and bore, two for the slot's ends, and no spline at all."""
    path = tmp_path / "ring.step"
    write_step(path, "ring", [Solid(RING[0], (*RING[1], _slot(0.002, 0.01)), 0.0, 5e-4)])
    text = path.read_text()
    assert "FILE_SCHEMA(('AUTOMOTIVE_DESIGN { 1 0 10303 214 1 1 1 1 }'));" in text
    assert "SI_UNIT(.MILLI.,.METRE.)" in text
    assert len(re.findall("= CYLINDRICAL_SURFACE", text)) == 4
    assert "SPLINE" not in text
    assert "PCURVE" not in text
    numbers = [int(n) for n in re.findall(r"^#(\d+) =", text, re.MULTILINE)]
    assert numbers == list(range(1, len(numbers) + 1))
    assert {int(n) for n in re.findall(r"#(\d+)", text)} == set(numbers)


def test_a_skewed_stack_has_its_steps(tmp_path):
    """Three steps, each a third of area times length, to 1e-6 as the issue asks."""
    path = tmp_path / "stack.step"
    solids, volume = _skewed("gallery/fan_12s4p.toml")
    write_step(path, "rotor_stack", solids)
    found = step_volumes(path)
    assert found == pytest.approx([volume / 3.0] * 3, rel=1e-6)
    assert path.read_text().count("PRODUCT('rotor_stack_") == 3


def test_the_same_bytes_again_and_in_another_process(tmp_path):
    """The library counts the files it writes and stamps the time; neither may show."""
    solids = [Solid(*RING, 0.0, 5e-4), Solid(*RING, 5e-4, 5e-4, 0.1)]
    for name in ("one", "two"):
        write_step(tmp_path / f"{name}.step", "ring", solids, "2026-01-31")
    code = (
        "import sys; from pathlib import Path; "
        "from lamwright.solver.mesh_step import Solid, write_step;"
        "from lamwright.geometry.curves import circle, reversed_path;"
        "ring = circle(0j, 0.05), (reversed_path(circle(0j, 0.015)),);"
        "solids = [Solid(*ring, 0.0, 5e-4), Solid(*ring, 5e-4, 5e-4, 0.1)];"
        "write_step(Path(sys.argv[1]), 'ring', solids, '2026-01-31')"
    )
    run = [sys.executable, "-c", code, str(tmp_path / "three.step")]
    done = subprocess.run(run, capture_output=True, text=True, check=True)
    assert done.stdout == ""
    texts = {(tmp_path / f"{name}.step").read_bytes() for name in ("one", "two", "three")}
    assert len({hashlib.sha256(text).hexdigest() for text in texts}) == 1
    assert b"'2026-01-31T00:00:00'" in texts.pop()


def test_the_kernel_says_nothing(tmp_path, capfd):
    """It writes to the process's output below Python, and rooms never print."""
    write_step(tmp_path / "ring.step", "ring", [Solid(*RING, 0.0, 5e-4)])
    step_volumes(tmp_path / "ring.step")
    assert capfd.readouterr().out == ""


def test_a_file_that_is_no_step_is_refused(tmp_path):
    """One line, no traceback of the library."""
    path = tmp_path / "no.step"
    for text in ("", "nothing of the kind\n"):
        path.write_text(text)
        with pytest.raises(LamwrightError, match="no solid can be read from it"):
            step_volumes(path)


def test_which_paths_are_whole_circles():
    """Two halves or any pieces about one centre; not a slot's outline, nor a polygon."""
    found = whole_circle(reversed_path(circle(0.01 + 0.02j, 0.003)))
    assert found == (pytest.approx(0.01 + 0.02j), pytest.approx(0.003))
    assert whole_circle(_slot(0.002, 0.01)) is None
    lens = Path((Edge(0j, 1.0 + 0j, 0.5), Edge(1.0 + 0j, 0j, 0.5)))
    assert whole_circle(lens) is None


@pytest.mark.skipif(FREECAD is None, reason="freecadcmd is not installed")
def test_freecad_reads_the_same_volume(tmp_path):
    """A second program: valid solids, area x length to 1e-6, only planes and cylinders."""
    step, script = tmp_path / "stack.step", tmp_path / "read.py"
    solids, volume = _skewed("gallery/fan_12s4p.toml")
    write_step(step, "rotor_stack", solids)
    script.write_text(
        "import Part\n"
        "s = Part.Shape()\n"
        f"s.read({str(step)!r})\n"
        "kinds = sorted({type(f.Surface).__name__ for f in s.Faces})\n"
        "print('READ', repr(s.Volume), len(s.Solids), s.isValid(), *kinds)\n"
    )
    done = subprocess.run([FREECAD, str(script)], capture_output=True, text=True, check=True)
    row = next(r.split() for r in done.stdout.splitlines() if r.startswith("READ"))
    assert float(row[1]) == pytest.approx(volume * 1e9, rel=1e-6)
    assert row[2:] == ["3", "True", "Cylinder", "Plane"]
