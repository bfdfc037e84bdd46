"""A stator from a drawing is the machine that was drawn: the same flux linkage.

Law: outlines that agree to a micrometre have the same field. The parametric design is the
original; the drawings of it are made by a general DXF library in the forms draughtsmen send.
Tolerance 0.2 % of each linkage, as issued; the mesh differs, which alone makes 0.02 %.
"""

from pathlib import Path

import pytest
from draughting import FORMS, design_text, sheet, write_form

from lamwright.app.point import point
from lamwright.geometry.design_file import read_design

DESIGNS = Path(__file__).parent.parent.parent / "designs"
DEMO = DESIGNS / "demo_24s4p_arc.toml"
LOAD = {"i_d": 6.0, "i_q": 9.0, "angle_deg": 4.0}


@pytest.fixture(scope="module")
def original():
    return point(DEMO, **LOAD)


def drawn_design(name, folder, keys=""):
    """The demo with its stator drawn in one form, in `folder`."""
    write_form(name, sheet(read_design(DEMO)), folder)
    (folder / "steel").symlink_to(DESIGNS / "steel")
    unit = "outline_unit_mm = 1.0\n" if name == "loose" else ""
    text = f'outline_dxf = "stator.dxf"\n{unit}stack_length_mm = 100.0\n{keys}'
    path = folder / "drawn.toml"
    path.write_text(design_text(DEMO.read_text(), text))
    return path


@pytest.mark.parametrize(
    "name",
    [pytest.param(name, marks=() if name == "gaps" else pytest.mark.slow) for name in FORMS],
)
def test_drawn_stator_has_the_original_linkage(name, original, tmp_path):
    found = point(drawn_design(name, tmp_path), **LOAD)
    for key in ("psi_d_vs", "psi_q_vs"):
        assert found[key] == pytest.approx(original[key], rel=2e-3)
