"""Broken design files: each is refused, in the designer's words, one line for each fault."""

import pytest

import broken_designs
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.errors import DesignError


@pytest.mark.parametrize("broken", broken_designs.READER, ids=lambda broken: broken.name)
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
