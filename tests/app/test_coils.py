"""The `winding` command: what it prints and writes, against a winding written down by hand."""

import csv
from pathlib import Path

import pytest
from click.testing import CliRunner

from lamwright.app.cli import main
from lamwright.app.coils import winding

DEMO = Path(__file__).parents[2] / "designs" / "demo_24s4p_arc.toml"


@pytest.fixture
def tooth_coils(tmp_path):
    """The demonstration machine with 12 slots, 10 poles and tooth coils in two layers."""
    text = DEMO.read_text(encoding="utf-8")
    for old, new in (
        ("slots = 24", "slots = 12"),
        ("poles = 4", "poles = 10"),
        ("layers = 1", "layers = 2"),
        ("coil_span_slots = 6", "coil_span_slots = 1"),
    ):
        assert text.count(f"\n{old}") == 1
        text = text.replace(f"\n{old}", f"\n{new}")
    path = tmp_path / "teeth.toml"
    path.write_text(text, encoding="utf-8")
    return path


def test_tooth_coils_by_hand(tooth_coils, tmp_path):
    """12/10: coils round the teeth A -A B... in pairs of opposite sense, -A A' B' ... all round.

    Known from any text on tooth coils: neighbours in pairs of one phase, opposite senses, the
    second half of the machine the first reversed.
    """
    out = tmp_path / "coils.csv"
    result = CliRunner().invoke(main, ["winding", str(tooth_coils), "--csv", str(out)])
    assert result.exit_code == 0, result.output
    rows = list(csv.DictReader(out.read_text(encoding="utf-8").splitlines()))
    ends = [row["sign"] + row["phase"] for row in rows if row["layer"] == "0"]
    # The coil that ends in a slot starts in the one before.
    starts = [row["sign"] + row["phase"] for row in rows if row["layer"] == "1"]
    opposite = str.maketrans("+-", "-+")
    assert [one.translate(opposite) for one in starts] == [*ends[1:], ends[0]]
    first = ends.index("+A") if ends[ends.index("+A") - 1][1] != "A" else ends.index("+A") - 1
    ring = [*ends[first:], *ends[:first]]
    assert [one[1] for one in ring] in (list("AABBCCAABBCC"), list("AACCBBAACCBB"))
    for k in range(12):
        assert ring[(k + 6) % 12] == ring[k].translate(opposite)
    assert all(ring[k] == ring[k + 1].translate(opposite) for k in range(0, 12, 2))
    for row in rows:
        assert row["sign"] in result.output
    assert "0.93301" in result.output
    assert "0.4 slots per pole and phase" in result.output


def test_orders_under_the_working_one(tooth_coils):
    """12/10, working order 5: orders 1 and 3, with k_w(1) = sin 15 sin 15 by hand, no even one.

    A pair of neighbour coils in opposite sense, pitch factor sin(pi/12), distribution the same.
    """
    report = winding(tooth_coils)
    assert [order for order, _ in report.below] == [1, 3]
    assert report.below[0][1] == pytest.approx(0.0669873, abs=1e-6)


def test_a_pair_that_cannot_be_wound_ends_with_2_and_its_place(tooth_coils):
    """20 slots: file, line, key, and the slot numbers next to it."""
    text = tooth_coils.read_text(encoding="utf-8").replace("\nslots = 12", "\nslots = 20")
    tooth_coils.write_text(text, encoding="utf-8")
    result = CliRunner().invoke(main, ["winding", str(tooth_coils)])
    assert result.exit_code == 2
    line = next(k for k, one in enumerate(text.splitlines(), 1) if one.startswith("slots"))
    expected = f"{tooth_coils}:{line}: stator.slots = 20: 10 poles give no three like phases"
    assert result.stderr.startswith(expected)
    assert "accepted 18 or 21" in result.stderr
