"""Each number that a report prints is the one in the JSON file beside it, to the printed digits."""

import json
import re
import tomllib
from pathlib import Path

import pytest
from report_reading import check_numbers, check_pdf, is_printed, outcome_of

from lamwright.app.map_grid import GridWishes
from lamwright.app.map_run import map_design
from lamwright.app.rib_run import ribs_design
from lamwright.app.run import assess

DESIGNS = Path(__file__).parents[2] / "designs"
# What may be in the JSON files as a number and is in no table.
NOT_SHOWN = {"least_yield_margin", "winding_temperature_c", "magnet_temperature_c"}


def failing(folder: Path) -> Path:
    """The demo turned faster than its ribs bear, asked for more saliency than it has."""
    text = (DESIGNS / "demo_24s4p_arc.toml").read_text()
    for old, new in (
        ('_card = "', f'_card = "{DESIGNS.as_posix()}/'),
        ("maximum_speed_rpm = 6000.0", "maximum_speed_rpm = 9500.0"),
        ("least_saliency_ratio = 3.0", "least_saliency_ratio = 6.5"),
    ):
        assert old in text
        text = text.replace(old, new)
    path = folder / "failing.toml"
    path.write_text(text)
    return path


def plain_figures(record: dict) -> set[str]:
    """Places of the figures that stand flat in a JSON file, error bars among them."""
    return {k for k, v in record.items() if isinstance(v, float | int) and not isinstance(v, bool)}


@pytest.mark.parametrize(
    ("printed", "value", "same"),
    [
        ("11.61", 11.6107, True),
        ("11.61", 11.6152, False),
        ("9.06e+08", 9.0597e8, True),
        ("9.06e+08", 9.09e8, False),
        ("0", 1e-9, False),
        ("0", 0.0, True),
        ("0.00", 0.004, True),
        ("110", 108.4, False),
        ("-52.34", -52.336, True),
        ("52.34", -52.336, False),
    ],
)
def test_the_digits_are_compared(printed, value, same):
    """The rule of this file itself: the last printed digit counts."""
    assert is_printed(printed, value) == same


@pytest.mark.slow
@pytest.mark.parametrize("kind", ["passing", "failing", "magnet"])
def test_an_assessment_prints_its_files(kind, tmp_path):
    """`assess --ribs`: figures, error bars, limits, orders, magnets, ribs, times; HTML and PDF.

    No figure of `verdict.json` or `ribs.json` is left out, and none lacks its error bar.
    """
    design = {
        "passing": DESIGNS / "demo_24s4p_arc.toml",
        "failing": failing(tmp_path),
        "magnet": DESIGNS / "demo_36s4p_magnet.toml",
    }[kind]
    ribs = []
    verdict = assess(design, tmp_path / "out", tolerance="coarse", on_ribs=ribs.append)
    folder = tmp_path / "out"
    page = (folder / "report.html").read_text()
    record, of_ribs = (
        json.loads((folder / name).read_text()) for name in ("verdict.json", "ribs.json")
    )
    seen = check_numbers(page, record, of_ribs)
    assert plain_figures(record) <= seen
    assert plain_figures(of_ribs) - NOT_SHOWN <= seen
    for k, rib in enumerate(of_ribs["ribs"]):
        assert {f"ribs/{k}/peak_mpa", f"ribs/{k}/yield_margin"} <= seen, rib["rib"]
    assert {f"torque_harmonics/{k}/amplitude_nm" for k in range(10)} <= seen
    assert {f"magnets/{k}/area_mm2" for k in range(len(record.get("magnets", [])))} <= seen
    assert ("magnets" in record) == (kind == "magnet")
    assert check_pdf(folder / "report.pdf", page) > 100
    _check_words(page, record, of_ribs)
    assert verdict.passes == (kind != "failing")
    assert outcome_of(page).startswith("FAILS" if kind == "failing" else "PASSES")


def _check_words(page: str, record: dict, of_ribs: dict) -> None:
    """Outcomes, cautions and what is missing stand there in full."""
    shown = re.findall(r">(holds|MISSED)<", page)
    asked = [outcome["holds"] for outcome in record["outcomes"].values()]
    if "yield_margin_pressed" in of_ribs:
        asked.append(of_ribs["passes"])
    assert [word == "holds" for word in shown] == asked
    told = page.replace("&#39;", "'").replace("&#34;", '"').replace("&lt;", "<")
    for line in (*record["cautions"], *of_ribs["cautions"], *of_ribs["not_given"]):
        assert line.replace("&", "&amp;") in told.replace("&gt;", ">"), line
    assert record["design_hash"] in page


@pytest.mark.slow
def test_thinnest_ribs_are_printed_as_filed(tmp_path):
    """`ribs --thin`: widths, floors, margins and prices too."""
    design = DESIGNS / "demo_24s4p_arc.toml"
    ribs_design(design, tmp_path / "out", tolerance="coarse", rib_factor=1.0)
    page = (tmp_path / "out" / "report.html").read_text()
    record = json.loads((tmp_path / "out" / "ribs.json").read_text())
    seen = check_numbers(page, record)
    assert plain_figures(record) <= seen
    for k in range(len(record["thin_ribs"])):
        assert {f"thin_ribs/{k}/width_mm", f"thin_ribs/{k}/floor_mm"} <= seen
    assert check_pdf(tmp_path / "out" / "report.pdf", page) > 50
    told = re.findall(r"-?\d[\d.]*", outcome_of(page))
    assert [is_printed(a, b) for a, b in zip(told, _margins(record), strict=True)] == [True] * 2


def _margins(record: dict) -> tuple[float, float]:
    return record["yield_margin"], record["least_yield_margin"]


@pytest.mark.slow
def test_a_map_prints_its_file(tmp_path):
    """`map` of a rotor with magnets: every figure with its error bar, limits as designed."""
    name = "demo_36s4p_magnet.toml"
    wishes = GridWishes(points=(3, 4), i_d=None, i_q=None, positions=None)
    map_design(DESIGNS / name, tmp_path / "out", wishes, tolerance="coarse")
    page = (tmp_path / "out" / "report.html").read_text()
    record = json.loads((tmp_path / "out" / "map.json").read_text())
    stated = tomllib.loads((DESIGNS / name).read_text())
    seen = check_numbers(page, record, stated)
    assert plain_figures(record) - NOT_SHOWN <= seen
    assert check_pdf(tmp_path / "out" / "report.pdf", page) > 100
