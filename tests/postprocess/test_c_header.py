"""The C header: compiled without a warning, read by a program, compared with what was written."""

import re
import shutil
import subprocess

import numpy as np
import pytest

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.c_header import CArray, CHeader, c_header_text, c_name, quantity_bases
from lamwright.postprocess.c_numbers import held, number_format, table_size

COMPILER = shutil.which("cc")
needs_compiler = pytest.mark.skipif(COMPILER is None, reason="no C compiler")
FORMATS = ["float", "q7", "q15", "q24", "q31"]
ODD_NAMES = [
    "demo 24/4 arc",
    "*/ int x; /* 24",
    "Läufer \u00bd \\ ??/ \u2028 2",
    "int",
    "---",
    "line\nbreak // and more",
    "x" * 200,
]

# Invented: a table over 3 shares and 4 speeds, one node missing.
SHARES, SPEEDS = np.array([0.0, 0.25, 1.0]), np.array([0.0, 100.0, 250.0, 628.3])
I_D = np.array([[0.0, 0.0, 0.0, 0.0], [3.1, 3.1, 2.9, 1.2], [7.9, 7.9, np.nan, 2.2]])
I_Q = np.array([[0.0, 0.0, 0.0, 0.0], [3.4, 3.5, 3.9, 4.2], [9.7, 9.8, 11.1, -11.5]])


def header(design_name="demo 24/4 arc"):
    return CHeader(
        design_name=design_name,
        text=(f"Currents of {design_name}, invented.", "Caution: " + 12 * "long text "),
        constants=(("POLE_PAIRS", "2", "pole pairs"),),
        units={"share": "1", "speed": "rad/s", "current": "A"},
        arrays=(
            CArray("share", "share", SHARES, "share of the torque limit"),
            CArray("speed", "speed", SPEEDS, "electrical speed"),
            CArray("i_d", "current", I_D, "d-axis current, peak"),
            CArray("i_q", "current", I_Q, "q-axis current, peak"),
            CArray("valid", "", np.isfinite(I_D), "whether a node exists"),
        ),
    )


def compiled(tmp_path, text, program):
    """What the program prints that includes the header."""
    (tmp_path / "table.h").write_text(text, encoding="utf-8")
    (tmp_path / "read.c").write_text(program, encoding="utf-8")
    flags = ["-Wall", "-Wextra", "-Werror", "-pedantic", "-std=c99"]
    call = [COMPILER, *flags, "-o", str(tmp_path / "read"), str(tmp_path / "read.c")]
    built = subprocess.run(call, capture_output=True, text=True, check=False)
    assert built.returncode == 0, built.stderr
    run = subprocess.run([tmp_path / "read"], capture_output=True, text=True, check=True)
    return run.stdout.split()


READER = """
#include <stdio.h>
#include "table.h"
#include "table.h"
int main(void)
{{
    for (int r = 0; r < 3; r++)
        for (int c = 0; c < 4; c++) {{
            double i_d = {name}_i_d[r][c], i_q = {name}_i_q[r][c];
            printf("%.9g %.9g %d ", i_d * {scale}, i_q * {scale}, (int){name}_valid[r][c]);
        }}
    /* A quarter of the way between shares 1 and 2, at speed 1: bilinear with one term. */
    double low = {name}_i_q[1][1], high = {name}_i_q[2][1];
    printf("%.9g %d\\n", (low + 0.25 * (high - low)) * {scale}, {upper}_POLE_PAIRS);
    return 0;
}}
"""


@needs_compiler
@pytest.mark.parametrize("text", FORMATS)
def test_a_program_reads_what_was_written(tmp_path, text):
    """Every node as the drive holds it, to the nine digits printed; one bilinear reading."""
    form = number_format(text)
    name = c_name("demo 24/4 arc")
    bits = form.bits
    scale = f"(M_BASE / {2**bits}.0)".replace("M", f"{name.upper()}_CURRENT") if bits else "1.0"
    program = READER.format(name=name, upper=name.upper(), scale=scale)
    found = compiled(tmp_path, c_header_text(header(), form), program)
    base = quantity_bases(header(), form)["current"]
    want_d, want_q = held(form, np.nan_to_num(I_D), base), held(form, I_Q, base)
    rows = np.array(found[:36], dtype=float).reshape(12, 3)
    assert rows[:, 0] == pytest.approx(want_d.ravel(), rel=1e-8)
    assert rows[:, 1] == pytest.approx(want_q.ravel(), rel=1e-8)
    assert np.array_equal(rows[:, 2], np.isfinite(I_D).ravel())
    assert float(found[36]) == pytest.approx(want_q[1, 1] + 0.25 * (want_q[2, 1] - want_q[1, 1]))
    assert found[37] == "2"
    if bits:
        # Rounded to the nearest count: never off by more than half of one.
        assert np.abs(want_q - I_Q).max() <= 0.5001 * base / 2.0**bits


@needs_compiler
@pytest.mark.parametrize("design_name", ODD_NAMES)
def test_no_name_breaks_the_header(tmp_path, design_name):
    """Names of designs are free text; the header compiles and declares nothing but its own."""
    text = c_header_text(header(design_name), number_format("q15"))
    name = c_name(design_name)
    program = f'#include "table.h"\nint main(void) {{ return {name}_valid[2][2]; }}\n'
    assert compiled(tmp_path, text, program) == []
    assert re.fullmatch(r"[a-z][a-z0-9_]*", name)
    assert max(map(len, text.splitlines())) < 160


@pytest.mark.parametrize(
    ("design_name", "name"),
    [
        ("demo 24/4 arc", "demo_24_4_arc"),
        ("24/4", "m_24_4"),
        ("Läufer", "laufer"),
        ("\u4e2d", "machine"),
    ],
)
def test_names(design_name, name):
    """Letters and digits stay, accents go, a leading digit gets a letter before it."""
    assert c_name(design_name) == name


@pytest.mark.parametrize(
    ("text", "bits", "c_type"),
    [("float", 0, "float"), ("q7", 7, "int8_t"), ("q15", 15, "int16_t"), ("q16", 16, "int32_t")],
)
def test_formats(text, bits, c_type):
    """The smallest type that holds sign and bits."""
    form = number_format(text)
    assert (form.bits, form.c_type) == (bits, c_type)


@pytest.mark.parametrize("text", ["double", "q6", "q32", "Q15", "", "q-3", "15"])
def test_unknown_formats_are_one_line(text):
    """What is accepted stands in the line."""
    with pytest.raises(LamwrightError, match="accepted float, or q7 to q31"):
        number_format(text)


@pytest.mark.parametrize("text", ["16", "1x16", "16x", "16x1000", "axb", "-3x4", "4 x 4"])
def test_unknown_sizes_are_one_line(text):
    """Two whole numbers, 2 to 256."""
    with pytest.raises(LamwrightError, match="accepted torques x speeds from 2x2 to 256x256"):
        table_size(text)


def test_sizes():
    """Torques first, as the arrays are indexed."""
    assert table_size("16x32") == (16, 32)
