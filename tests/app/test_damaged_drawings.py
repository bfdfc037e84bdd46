"""Damaged stator drawings are refused in one clear line, with a picture where there is a place."""

import warnings
from pathlib import Path

import pytest
from damages import DAMAGES
from draughting import design_text, sheet

from lamwright.app.drawings import read_marked
from lamwright.app.lamination import section_of
from lamwright.geometry.design_file import read_design, read_machine
from lamwright.geometry.errors import DesignError, DrawingError

DESIGNS = Path(__file__).parent.parent.parent / "designs"
DEMO = DESIGNS / "demo_24s4p_arc.toml"
PNG = b"\x89PNG\r\n\x1a\n"


@pytest.fixture(scope="module")
def drawn():
    return sheet(read_design(DEMO))


def damaged_design(damage, drawn, folder):
    """The demo with the damaged drawing for its stator."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # of the library that writes, about its own versions
        damage.write(drawn, folder / "stator.dxf")
    (folder / "steel").symlink_to(DESIGNS / "steel")
    path = folder / "drawn.toml"
    keys = f'outline_dxf = "stator.dxf"\n{damage.keys}'
    path.write_text(design_text(DEMO.read_text(), keys))
    return path


def test_there_are_forty():
    """As issued; each with a name of its own."""
    assert len({damage.name for damage in DAMAGES}) == len(DAMAGES) >= 40


@pytest.mark.parametrize("damage", DAMAGES, ids=lambda damage: damage.name)
def test_damaged_drawing_is_refused_in_one_line(damage, drawn, tmp_path):
    """File, line of the key and fault; a place wherever the damage has one."""
    path = damaged_design(damage, drawn, tmp_path)
    with pytest.raises(DesignError, match=damage.text) as caught:
        section_of(read_machine(path))
    text = str(caught.value)
    assert "\n" not in text
    assert text.startswith(f"{path}:")
    marks = caught.value.marks if isinstance(caught.value, DrawingError) else ()
    assert bool(marks) == damage.place


@pytest.mark.parametrize(
    "damage",
    [
        pytest.param(d, id=d.name, marks=() if d.name == "gap" else pytest.mark.slow)
        for d in DAMAGES
        if d.place
    ],
)
def test_place_of_the_damage_is_drawn(damage, drawn, tmp_path):
    """The line names a picture, which is there; the mark lies within the drawing's reach (mm)."""
    path = damaged_design(damage, drawn, tmp_path)
    out = tmp_path / "out"
    with pytest.raises(DrawingError, match="; marked in ") as caught:
        read_marked(path, out)
    picture = Path(str(caught.value).rsplit("; marked in ", 1)[1])
    assert picture.parent == out
    assert picture.read_bytes().startswith(PNG)
    assert abs(caught.value.marks[0].place) < 0.130
