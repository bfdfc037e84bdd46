"""A released DXF that was changed: what is read of it, and what is named as strange."""

import ezdxf
import pytest
from outlines import plain_design

from lamwright.geometry.contour_changes import contour_changes
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.dxf_cut import read_cut
from lamwright.geometry.dxf_release import FORMS, write_release
from lamwright.geometry.errors import DesignError
from lamwright.geometry.punch_layers import rotor_lamination

TEXTS = ("one note", "and another")


@pytest.fixture(scope="module")
def contours():
    """The plain rotor's."""
    return rotor_lamination(cross_section(plain_design()))


@pytest.fixture
def path(contours, tmp_path):
    """As it was released."""
    file = tmp_path / "rotor.dxf"
    write_release(contours, file, "R2018", TEXTS, 0.7)
    return file


def redrawn(path, change):
    """Read again after a change of the model space by a general library."""
    document = ezdxf.readfile(path)
    change(document.modelspace())
    document.saveas(path)
    return read_cut(path)


@pytest.mark.parametrize("form", FORMS)
def test_a_released_file_reads_back_whole(contours, tmp_path, form):
    """Contours to 1e-12 m, in order, notes as written, nothing strange."""
    file = tmp_path / "rotor.dxf"
    write_release(contours, file, form, TEXTS, 0.7)
    found = read_cut(file)
    assert contour_changes(contours, found.contours, 1e-12) == ()
    assert [c.layer for c in found.contours] == [c.layer for c in contours]
    assert (found.notes, found.strange) == (TEXTS, ())


def test_a_contour_seen_from_below_lies_where_it_is_drawn(contours, path):
    """A program that mirrors an entity may turn its plane over: the vertices stay as they were."""

    def change(model):
        for entity in model.query("LWPOLYLINE"):
            entity.transform(ezdxf.math.Matrix44.scale(-1.0, 1.0, 1.0))
            assert entity.dxf.extrusion.z == -1.0

    found = redrawn(path, change)
    assert [c.kind for c in contour_changes(contours, found.contours)] == ["mirrored"]


def test_everything_strange_is_named(path):
    """Other entities, other layers, other planes, an open polyline, one without an area."""

    def change(model):
        model.add_circle((0.0, 0.0), 3.0, dxfattribs={"layer": "HOLES"})
        model.add_point((0.0, 0.0), dxfattribs={"layer": "TEXT"})
        model.add_line((0.0, 0.0), (1.0, 0.0), dxfattribs={"layer": "laser"})
        cut = {"layer": "HOLES"}
        triangle = [(0.0, 0.0), (1.0, 0.0), (0.0, 1.0)]
        model.add_lwpolyline(triangle, dxfattribs=cut)
        model.add_lwpolyline(triangle, close=True, dxfattribs={**cut, "elevation": 1.0})
        model.add_lwpolyline(triangle, close=True, dxfattribs={**cut, "extrusion": (0, 1, 0)})
        model.add_lwpolyline([(0.0, 0.0), (1.0, 0.0)], close=True, dxfattribs=cut)
        model.add_lwpolyline([(0.0, 0.0), (1e9, 0.0), (0.0, 1e9)], close=True, dxfattribs=cut)

    assert redrawn(path, change).strange == (
        "CIRCLE on layer HOLES is no closed polyline",
        "POINT on layer TEXT",
        "LINE on layer laser, which no release has",
        "LWPOLYLINE on layer HOLES is no closed polyline",
        "a polyline on layer HOLES is not in the plane",
        "a polyline on layer HOLES is not in the plane",
        "a polyline on layer HOLES without an area",
        "a polyline on layer HOLES without an area",
    )


def test_damaged_files_are_one_line(path):
    """Cut off or overwritten anywhere: read, or refused in one line."""
    data = path.read_bytes()
    told = []
    for k in range(1, 20):
        cut = data[: k * len(data) // 20]
        other = bytearray(data)
        other[k * len(data) // 20] = 0xFF
        for damaged in (cut, bytes(other)):
            path.write_bytes(damaged)
            try:
                read_cut(path)
            except DesignError as error:
                told.append(str(error))
    assert len(told) > 15
    assert not [text for text in told if "\n" in text]


def test_a_huge_file_is_not_read(path):
    """A file of holes, 17 MB: refused by its size."""
    with path.open("ab") as file:
        file.truncate(17_000_000)
    with pytest.raises(DesignError, match="file too large; accepted up to 16 MB"):
        read_cut(path)
