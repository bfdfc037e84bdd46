"""The command `spread`: files, refusals, results that nobody's number of workers changes."""

import json
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner

from lamwright.app.cli import main
from lamwright.app.spread import SpreadWishes, spread
from lamwright.app.spread_sources import key_told
from lamwright.geometry.errors import LamwrightError

DESIGNS = Path(__file__).parents[2] / "designs"
DEMO = (DESIGNS / "demo_24s4p_arc.toml").read_text()
TOLERANCE = """
[tolerance]
bore_eccentricity_mm = 0.0
edge_depth_mm = 0.1
edge_drop_percent = 30.0
[[tolerance.key]]
name = "rotor.barrier[1].tangential_rib_mm"
limit = 0.02
"""


def written(folder: Path, tolerance: str) -> Path:
    """The demo with a table of tolerances, with cards by their full names."""
    path = folder / "demo.toml"
    path.write_text(DEMO.replace('"steel/', f'"{DESIGNS.as_posix()}/steel/') + tolerance)
    return path


def quick(workers: int, seed: int = 1) -> SpreadWishes:
    """Coarse meshes, four positions: the ripple is not to be trusted, all else is."""
    return SpreadWishes(
        samples=400, solve=3, seed=seed, tolerance="coarse", workers=workers, positions=4
    )


@pytest.fixture(scope="module")
def run(tmp_path_factory):
    """Report and folder of a run in this process alone."""
    folder = tmp_path_factory.mktemp("spread")
    return spread(written(folder, TOLERANCE), folder / "out", quick(1)), folder


def test_files_hold_every_source(run):
    """JSON, CSV and picture; sources of table and single key, each with its own figures."""
    report, folder = run
    out = folder / "out"
    assert {file.name for file in out.iterdir()} == {
        "spread.csv",
        "spread.json",
        "spread.png",
        "spread.svg",
    }
    record = json.loads((out / "spread.json").read_text())
    keys = [row["key"] for row in record["sources"]]
    assert keys == [
        "cut_mm",
        "gap_mm",
        "rotor.barrier[1].tangential_rib_mm",
        "stacking_factor",
        "b_h_percent",
        "yield_percent",
        "edge_depth_scatter_percent",
    ]
    assert len((out / "spread.csv").read_text().splitlines()) == 1 + len(keys)
    assert record["share_low_percent"] <= record["share_holding_percent"]
    assert any("rotors burst" in line for line in record["cautions"])
    assert not any("defaults" in line for line in record["cautions"])
    assert len(report.solved) == record["machines_solved_in_full"] == 3


def test_signs_are_those_of_the_trade(run):
    """Wear thins ribs and widens the gap; strength moves the margin alone, in proportion."""
    report, _ = run
    by_key = {effect.source.key: effect for effect in report.model.effects}
    cut, gap = by_key["cut_mm"].line, by_key["gap_mm"].line
    assert cut[0] < 0.0 < cut[2]
    assert cut[3] < 0.0 < cut[4]
    assert gap[0] < 0.0
    assert gap[2] < 0.0
    assert np.all(gap[3:] == 0.0)
    assert by_key["b_h_percent"].line[0] > 0.0
    assert by_key["stacking_factor"].line[0] > 0.0
    strength = by_key["yield_percent"]
    assert strength.line[3] == pytest.approx(0.05 * report.model.nominal[3])
    assert np.all(strength.line[:3] == 0.0)
    rib = by_key["rotor.barrier[1].tangential_rib_mm"].line
    assert rib[0] < 0.0
    assert rib[2] < 0.0
    assert by_key["edge_depth_scatter_percent"].line[0] < 0.0
    assert report.edge_effect is not None
    assert report.edge_effect[0] < 0.0


def test_model_meets_full_solutions(run):
    """Three random machines: torque, saliency, margin, growth within a tenth of their spread."""
    report, _ = run
    for k in (0, 2, 3, 4):
        assert report.checks[k].rms < 0.1 * report.checks[k].spread


def test_workers_do_not_change_results(run, tmp_path):
    """Two processes: the same machines and the same numbers, to rounding.

    A process with a history may round its stress otherwise than a new worker: 6e-13 was seen in the
    whole suite, nothing in processes that are both new. Another start of Newton's makes 1e-6.
    """
    first, _ = run
    path = written(tmp_path, TOLERANCE)
    second = spread(path, tmp_path / "out", quick(2))
    assert second.values == pytest.approx(first.values, rel=1e-10)
    assert second.solved == pytest.approx(first.solved, rel=1e-10)


@pytest.mark.parametrize(
    ("tolerance", "options", "line"),
    [
        ("[tolerance]\ncutt_mm = 0.1\n", (), "tolerance.cutt_mm: unknown key; did you mean cut_mm"),
        (
            '[[tolerance.key]]\nname = "rotor.gap"\nlimit = 0.1\n',
            (),
            "tolerance.key[1].name = 'rotor.gap': no length or angle of this design; did you mean",
        ),
        (
            "[tolerance]\ncut_mm = 0\ngap_mm = 0\nbore_eccentricity_mm = 0\nstacking_factor = 0\n"
            "b_h_percent = 0\nyield_percent = 0\n",
            (),
            "spread: every tolerance is 0; state one above 0 in [tolerance]",
        ),
        ("", ("--samples", "3"), "--samples 3: accepted 100 to 1000000"),
        ("", ("--solve", "1"), "--solve 1: accepted 2 to 10000"),
    ],
)
def test_bad_input_is_one_line(tmp_path, tolerance, options, line):
    """Exit code 2 and one line that names key, value and what is accepted."""
    path = written(tmp_path, tolerance)
    result = CliRunner().invoke(main, ["spread", str(path), "--out", str(tmp_path / "o"), *options])
    assert result.exit_code == 2
    told = [row for row in result.stderr.splitlines() if not row.startswith("more: ")]
    told = [row for row in told if " %  " not in row]
    assert len(told) == 1
    assert line in told[0]


@pytest.mark.parametrize("kind", ["magnet", "skew"])
def test_what_has_no_spread_is_refused(tmp_path, kind):
    """Magnets and skew: one line, no files."""
    if kind == "magnet":
        path = DESIGNS / "demo_36s4p_magnet.toml"
    else:
        path = written(tmp_path, "")
        text = path.read_text().replace(
            "poles = 4", "poles = 4\nskew_steps = 2\nskew_angle_deg = 5"
        )
        path.write_text(text)
    with pytest.raises(LamwrightError, match="has none yet"):
        spread(path, tmp_path / "out", quick(1))
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(
    ("key", "told"),
    [
        ("rotor.alternate_barrier[2].end_thickness_mm", "alternate barrier 2 end thickness"),
        ("rotor.barrier[1].radial_rib_places_mm[2]", "barrier 1 radial rib places 2"),
        ("stator.wedge_angle_deg", "wedge angle"),
    ],
)
def test_keys_are_told_in_plain_words(key, told):
    """Table and number, then the name, without unit."""
    assert key_told(key) == told
