"""A design file with some values changed in place."""

import tomllib

import pytest

from lamwright.geometry.errors import DesignError
from lamwright.geometry.restated import restated

TEXT = """# head
[steel]
card = "a b.toml"  # which
[[rotor.barrier]]
rib_mm = 0.6  # thin, was rib_mm = 0.7
rib_inner_mm = 1e-1
other = { rib_mm = 0.5, rib_inner_mm = 0.4 }
[[rotor.barrier]]
rib_mm=+0.8
"""


def test_values_change_and_all_else_stays():
    """Comments, order, layout: only the stated values differ, those of the right tables."""
    values = {
        "rotor.barrier[1].rib_mm": 0.614,
        "rotor.barrier[1].other.rib_inner_mm": 0.45,
        "rotor.barrier[2].rib_mm": 1.0,
        "steel.card": "../c.toml",
    }
    changed = restated(TEXT, values)
    expected = (
        TEXT.replace("rib_mm = 0.6 ", "rib_mm = 0.614 ")
        .replace("rib_inner_mm = 0.4 }", "rib_inner_mm = 0.45 }")
        .replace("+0.8", "1")
        .replace("a b.toml", "../c.toml")
    )
    assert changed.splitlines() == expected.splitlines()
    assert tomllib.loads(changed)["rotor"]["barrier"][0]["rib_inner_mm"] == 0.1


def test_what_cannot_be_changed_in_place_is_refused():
    """Two tables in one line: the first would be taken for the second."""
    text = "a = [{ x_mm = 1.0 }, { x_mm = 2.0 }]\n"
    with pytest.raises(DesignError, match=r"a\[2\].x_mm: cannot be changed in place"):
        restated(text, {"a[2].x_mm": 3.0})
