"""Single entities of a drawing as lines and arcs in metres."""

import cmath
import math
from itertools import pairwise

import ezdxf
import numpy as np
import pytest

from lamwright.geometry.curves import Edge, Path, area, perimeter
from lamwright.geometry.dxf_reader import read_pieces
from lamwright.geometry.errors import OutlineError
from lamwright.geometry.outline_edges import chained_loop, distance_to
from lamwright.geometry.spline_arcs import FIT_TOL, fitted_arcs


def pieces_of(draw, folder, unit=4):
    drawing = ezdxf.new()
    drawing.header["$INSUNITS"] = unit
    draw(drawing)
    drawing.saveas(folder / "x.dxf")
    return read_pieces(folder / "x.dxf")


def test_an_ellipse_is_fitted_within_two_micrometres(tmp_path):
    """Half axes 30 and 18 mm; 2000 points of the exact curve; area pi a b to the tolerance."""
    pieces = pieces_of(lambda d: d.modelspace().add_ellipse((5, 7), (30, 0), 0.6), tmp_path)
    t = np.linspace(0.0, 2.0 * np.pi, 2000)
    exact = 1e-3 * (5 + 7j + 30 * np.cos(t) + 18j * np.sin(t))
    worst = max(min(distance_to(e, complex(p)) for e in pieces.edges) for p in exact)
    assert worst < FIT_TOL
    whole = area(Path(pieces.edges))
    assert whole == pytest.approx(
        math.pi * 0.030 * 0.018, abs=FIT_TOL * perimeter(Path(pieces.edges))
    )


def test_a_fitted_curve_has_no_kinks():
    """Biarcs have the curve's tangent at every joint of intervals: rounding alone may differ."""

    def spiral(t):
        return 0.01 * t * cmath.exp(1j * t), (1 + 1j * t) / abs(1 + 1j * t) * cmath.exp(1j * t)

    edges = fitted_arcs(spiral, [1.0, 6.0])
    turns = [abs(cmath.phase(b.direction(0.0) / a.direction(1.0))) for a, b in pairwise(edges)]
    assert max(turns) < 1e-9


def test_a_spline_that_is_a_circle_stays_one(tmp_path):
    """A rational spline of a circle is met exactly; radius 25 mm to a nanometre."""
    curve = ezdxf.math.rational_bspline_from_arc((0, 0), radius=25.0, start_angle=0, end_angle=360)
    pieces = pieces_of(
        lambda d: d.modelspace().add_spline().apply_construction_tool(curve), tmp_path
    )
    assert len(pieces.edges) >= 2
    for edge in pieces.edges:
        assert edge.radius == pytest.approx(0.025, abs=1e-9)
        assert abs(edge.centre) < 1e-9


@pytest.mark.parametrize(("unit", "metres"), [(1, 0.0254), (4, 1e-3), (5, 1e-2), (6, 1.0)])
def test_units_are_those_of_the_file(unit, metres, tmp_path):
    """Inch, mm, cm, m by the header's code."""
    pieces = pieces_of(lambda d: d.modelspace().add_line((0, 0), (3, 4)), tmp_path, unit)
    assert pieces.edges[0].length == pytest.approx(5.0 * metres, rel=1e-12)


def test_blocks_are_placed_and_squeezed(tmp_path):
    """A unit circle in a block: doubled and turned it stays a circle; squeezed, an ellipse."""

    def draw(drawing):
        block = drawing.blocks.new("b")
        block.add_circle((1, 0), 1.0)
        model = drawing.modelspace()
        model.add_blockref("b", (10, 0), {"xscale": 2, "yscale": 2, "rotation": 90})

    circle = pieces_of(draw, tmp_path)
    assert {round(e.radius, 9) for e in circle.edges} == {0.002}
    assert circle.edges[0].centre == pytest.approx(0.010 + 0.002j)

    def squeeze(drawing):
        drawing.blocks.new("b").add_circle((0, 0), 10.0)
        drawing.modelspace().add_blockref("b", (0, 0), {"xscale": 1.5})

    ellipse = pieces_of(squeeze, tmp_path)
    loop = chained_loop(_welded(ellipse.edges))
    assert abs(area(loop)) == pytest.approx(math.pi * 1.5e-4, abs=FIT_TOL * perimeter(loop))


def _welded(edges):
    points = [e.start for e in edges]
    near = [min(points, key=lambda p, q=e.end: abs(p - q)) for e in edges]
    return [Edge(e.start, end, e.bulge) for e, end in zip(edges, near, strict=True)]


def test_what_is_left_out_is_counted(tmp_path):
    """Texts, centre lines, hidden layers and points are told, not taken."""

    def draw(drawing):
        drawing.linetypes.add("CENTER2", [1.0, 0.8, -0.2])
        drawing.layers.add("off").off()
        model = drawing.modelspace()
        model.add_line((0, 0), (1, 0))
        model.add_line((0, 1), (1, 1), {"linetype": "CENTER2"})
        model.add_line((0, 2), (1, 2), {"layer": "off"})
        model.add_text("x")
        model.add_line((3, 3), (3, 3))

    pieces = pieces_of(draw, tmp_path)
    assert len(pieces.edges) == 1
    assert dict(pieces.left_out) == {
        "TEXT, no outline": 1,
        "centre line": 1,
        "layer not shown": 1,
        "no length": 1,
    }


def test_layers_may_be_named(tmp_path):
    """Only the named layer is read, whatever its case; a name that is not there is refused."""

    def draw(drawing):
        drawing.modelspace().add_line((0, 0), (1, 0), {"layer": "Sheet"})
        drawing.modelspace().add_line((0, 1), (1, 1), {"layer": "frame"})

    pieces_of(draw, tmp_path)
    assert len(read_pieces(tmp_path / "x.dxf", None, ("sheet",)).edges) == 1
    with pytest.raises(OutlineError, match="nothing on layer iron; the layers are frame, sheet"):
        read_pieces(tmp_path / "x.dxf", None, ("iron",))
