"""Tolerances that do not fit together are refused in one line, by key and value."""

import re
from pathlib import Path

import pytest

from lamwright.app.lamination import section_of
from lamwright.geometry.checks import check_design
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.design_tolerance import KeyTolerance, ToleranceDesign
from lamwright.geometry.errors import DesignError

DEMO = Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"
TWICE = KeyTolerance(name="rotor.gap_mm", limit=0.02)


@pytest.mark.parametrize(
    ("tolerance", "text"),
    [
        (
            ToleranceDesign(edge_depth_mm=0.2),
            "tolerance.edge_depth_mm = 0.2: a spoilt edge needs depth and drop;"
            " accepted edge_drop_percent beside it",
        ),
        (
            ToleranceDesign(edge_drop_percent=30.0),
            "tolerance.edge_drop_percent = 30: a spoilt edge needs depth and drop;"
            " accepted edge_depth_mm beside it",
        ),
        (
            ToleranceDesign(gap_mm=0.121),
            "tolerance.gap_mm = 0.121: over 0.3 of the gap of 0.4 mm; accepted 0 to 0.12",
        ),
        (
            ToleranceDesign(key=(TWICE, TWICE)),
            "tolerance.key[1].limit = 0.02: rotor.gap_mm stands 2 times; accepted once each",
        ),
    ],
)
def test_what_does_not_fit_is_told(tolerance, text):
    """Each fault with its key, value and remedy; of keys stated twice both are told."""
    design = read_machine(DEMO).design.model_copy(update={"tolerance": tolerance})
    assert check_design(design)[0].text == text


def test_what_fits_is_taken():
    """Limits at their largest, and depth with drop."""
    tolerance = ToleranceDesign(
        cut_mm=0.12, edge_depth_mm=0.2, edge_drop_percent=30.0, key=(TWICE,)
    )
    design = read_machine(DEMO).design.model_copy(update={"tolerance": tolerance})
    assert check_design(design) == ()


def test_a_file_tells_the_line(tmp_path):
    """A limit too wide for the gap, with the file's name and line; a misspelt key with its twin."""
    text = DEMO.read_text().replace('"steel/', f'"{DEMO.parent.as_posix()}/steel/')
    path = tmp_path / "demo.toml"
    line = len(text.splitlines()) + 2
    for row, fault in (
        ("cut_mm = 0.2", "tolerance.cut_mm = 0.2: over 0.3 of the gap of 0.4 mm; accepted 0 to"),
        ("cutt_mm = 0.2", "tolerance.cutt_mm: unknown key; did you mean cut_mm?"),
    ):
        path.write_text(f"{text}[tolerance]\n{row}\n")
        with pytest.raises(DesignError, match=re.escape(f"demo.toml:{line}: {fault}")):
            section_of(read_machine(path))
