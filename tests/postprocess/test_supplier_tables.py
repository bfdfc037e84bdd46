"""What is told of a supplier's outline that has other lines and arcs than the design."""

from pathlib import Path

from supplier_forms import contours_mm, drawing_of, with_chamfer, with_relief

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_design
from lamwright.geometry.supplier_outline import supplier_outline
from lamwright.postprocess.supplier_tables import supplier_cautions, supplier_record

DEMO = Path(__file__).parent.parent.parent / "designs" / "demo_36s4p_straight.toml"
UM = 1e-6  # m


def test_other_lines_and_arcs_are_a_caution(tmp_path):
    """The first caution says that they are not analysed, where, and by how much.

    In one barrier a chamfer in place of a fillet of 1 mm, which leaves 1 - cos 45 deg = 0.293 mm;
    in another a half-round notch of 0.1 mm in such a fillet, 5 um less deep off its arc.
    """
    section = cross_section(read_design(DEMO))
    contours = contours_mm(section)
    fillets = [
        next(k for k, e in enumerate(contours[n]) if not e.is_line and abs(e.radius - 1.0) < 1e-9)
        for n in (3, 4)
    ]
    contours[3] = with_chamfer(contours[3], fillets[0])
    contours[4] = with_relief(contours[4], fillets[1], 0.1)
    drawing_of([e for edges in contours for e in edges]).saveas(tmp_path / "back.dxf")
    found = supplier_outline(section, tmp_path / "back.dxf")
    chamfer, notch = (abs(stray.deviation) / UM for stray in found.strays)
    assert 280.0 < chamfer < 300.0
    assert 90.0 < notch < 101.0
    caution = supplier_cautions(found)[0]
    assert caution.startswith("NOT ANALYSED AS DRAWN: 2 contours have a shape")
    assert found.strays[0].text in caution
    assert "stress and field there are those of the design's lines and arcs" in caution
    assert supplier_record(found, 40.0 * UM, ())["analysed_as_drawn"] is False
