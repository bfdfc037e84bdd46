"""A stator from a drawing is the machine that was drawn: the same flux linkage.

Law: outlines that agree to a micrometre have the same field. The parametric design is the
original; the drawings of it are made by a general DXF library in the forms draughtsmen send.
Tolerance 0.2 % of each linkage, as issued; the mesh differs, which alone makes 0.02 %.
"""

import math
from pathlib import Path

import pytest
from draughting import FORMS, add_edge, design_text, new_drawing, scaled, sheet, write_form

from lamwright.app.point import point
from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_design, read_machine
from lamwright.solver.rotor_stress import rotor_stress

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


@pytest.mark.slow
def test_a_machine_of_two_drawings_has_the_original_field_and_stress(original, tmp_path):
    """Rotor drawn loose, too: linkages within 0.2 %, as above.

    Peak stress within the 2 % to which its adaptive loop settles.
    """
    write_form("polylines", sheet(read_design(DEMO)), tmp_path)
    section = cross_section(read_design(DEMO))
    drawing = new_drawing()
    for contour in lamination_contours(section):
        for edge in contour.path.edges:
            add_edge(drawing.modelspace(), scaled(edge))
    drawing.saveas(tmp_path / "rotor.dxf")
    (tmp_path / "steel").symlink_to(DESIGNS / "steel")
    stator = 'outline_dxf = "stator.dxf"\nstack_length_mm = 100.0\n'
    text = design_text(DEMO.read_text(), stator)
    head, rest = text.split("[rotor]\n")
    rotor = 'outline_dxf = "rotor.dxf"\npoles = 4\nsheet_thickness_mm = 0.5\n'
    path = tmp_path / "drawn.toml"
    path.write_text(f"{head}[rotor]\n{rotor}\n[steel]{rest.split('[steel]', 1)[1]}")
    found = point(path, **LOAD)
    for key in ("psi_d_vs", "psi_q_vs"):
        assert found[key] == pytest.approx(original[key], rel=2e-3)
    machine = read_machine(path)
    speed = 7200.0 * math.pi / 30.0
    peaks = [
        float(rotor_stress(one, machine.rotor_steel, speed).von_mises.max())
        for one in (section, cross_section(machine.design))
    ]
    assert peaks[1] == pytest.approx(peaks[0], rel=0.02)
