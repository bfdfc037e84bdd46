"""Broken design files: each is refused, in the designer's words, one line for each fault."""

import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import placed, read_design, read_machine
from lamwright.geometry.errors import DesignError, GeometryError
from tests.broken_designs import READER, SHAPES


@pytest.mark.parametrize("broken", READER, ids=lambda broken: broken.name)
def test_reader_refuses_with_place_fault_and_remedy(broken, tmp_path):
    """House rule: place, key, value, fault and remedy, one line each, naming nothing else."""
    path = broken.write(tmp_path)
    with pytest.raises(DesignError) as caught:
        read_machine(path)
    lines = str(caught.value).splitlines()
    assert lines[0].startswith(f"{path}{broken.line}")
    assert all(line.startswith(f"{path}:") and line.isprintable() for line in lines)
    # A slip in one place is one fault; only a file cut short lacks several things.
    assert len(lines) == (3 if broken.name == "cut between lines" else 1)


@pytest.mark.parametrize("broken", SHAPES, ids=lambda broken: broken.name)
def test_geometry_refuses_shapes_with_the_range_that_fits(broken, tmp_path):
    """The same form for what only the shape shows: the barrier, the key, and what would fit."""
    path = broken.write(tmp_path)
    with pytest.raises(GeometryError) as caught:
        cross_section(read_design(path))
    lines = str(placed(caught.value.findings, path)).splitlines()
    assert any(line.startswith(f"{path}{broken.line}") for line in lines)
    assert all(line.startswith(f"{path}:") and line.isprintable() for line in lines)
