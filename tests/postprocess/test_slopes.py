"""The table of slopes: what a step of a key changes, ranked, in CSV, JSON and as a tornado."""

import csv
import io
import json

import matplotlib
import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from lamwright.postprocess.figures_slopes import draw_tornado, key_label, shown_rows, write_slopes
from lamwright.postprocess.figures_style import Style
from lamwright.postprocess.files import json_text
from lamwright.postprocess.slopes import (
    SlopeTable,
    key_slope,
    ranked,
    shape_figures,
    slopes_csv,
    slopes_record,
    step_of,
)

POLE_PAIRS, CURRENTS = 2, (6.0, 9.0)  # A
PSI = {"psi_d": 0.5, "psi_q": 0.1}  # V s
PEAK = 2e8  # Pa
AT = shape_figures(POLE_PAIRS, *CURRENTS, **PSI, rib_peak=PEAK)
# Invented slopes, SI per mm or degree.
SLOPES = {
    "rotor.barrier[2].thickness_mm": {"psi_d": -0.01, "psi_q": -0.004, "rib_peak": 1e6},
    "rotor.gap_mm": {"psi_d": -0.3, "psi_q": 0.001, "rib_peak": -4e6},
    "stator.wedge_angle_deg": {"psi_d": 1e-4, "psi_q": 2e-4, "rib_peak": 0.0},
    "rotor.sheet_thickness_mm": {"psi_d": 0.0, "psi_q": 0.0, "rib_peak": 0.0},
}


def row(key):
    return key_slope(key, 1.25, POLE_PAIRS, CURRENTS, AT, SLOPES[key])


def table():
    rows = ranked([row(key) for key in SLOPES])
    return SlopeTable("invented", *CURRENTS, AT, 0.01, rows, ("stator.x_mm = 0: none",))


def test_saliency_of_magnets_changes_without_their_linkage():
    """psi_q less its no-load value, both of which a key moves: first order, 1e-5."""
    bare, by_key = -0.05, {"psi_d": -0.3, "psi_q": 0.02, "rib_peak": 0.0, "bare_psi_q": 0.03}
    at = shape_figures(POLE_PAIRS, *CURRENTS, **PSI, rib_peak=PEAK, bare_psi_q=bare)
    change = key_slope("rotor.gap_mm", 0.4, POLE_PAIRS, CURRENTS, at, by_key, bare).change
    small = 1e-6 * step_of("rotor.gap_mm")[0]
    moved = {name: PSI[name] + small * by_key[name] for name in PSI}
    after = shape_figures(
        POLE_PAIRS, *CURRENTS, **moved, rib_peak=PEAK, bare_psi_q=bare + small * 0.03
    )
    assert change.saliency == pytest.approx((after.saliency - at.saliency) / 1e-6, rel=1e-5)


@pytest.mark.parametrize("key", SLOPES)
def test_changes_are_those_of_the_figures_themselves(key):
    """A small share of the step put through the figures' own formulas: first order, 1e-5."""
    step, small = step_of(key)[0], 1e-6
    moved = {name: PSI[name] + small * step * SLOPES[key][name] for name in PSI}
    after = shape_figures(
        POLE_PAIRS, *CURRENTS, **moved, rib_peak=PEAK + small * step * SLOPES[key]["rib_peak"]
    )
    change = row(key).change
    for name in ("torque", "saliency", "rib_peak", "psi_d", "psi_q"):
        difference = (getattr(after, name) - getattr(AT, name)) / small
        scale = abs(getattr(AT, name))
        assert getattr(change, name) == pytest.approx(difference, rel=1e-5, abs=1e-8 * scale)


def test_steps_are_a_tenth_of_a_millimetre_and_a_degree():
    """What changes are stated for."""
    assert step_of("rotor.gap_mm") == (0.1, "mm")
    assert step_of("rotor.barrier[1].end_angle_deg") == (1.0, "deg")


def test_rows_are_ranked_by_torque():
    """The gap first, the sheet's thickness, which changes nothing, last."""
    keys = [row.key for row in table().rows]
    assert keys[0] == "rotor.gap_mm"
    assert keys[-1] == "rotor.sheet_thickness_mm"
    changes = [abs(row.change.torque) for row in table().rows]
    assert changes == sorted(changes, reverse=True)


def test_csv_holds_every_key_with_its_changes():
    """One row a key; numbers as in the table, to the seven digits written."""
    read = list(csv.DictReader(io.StringIO(slopes_csv(table()))))
    assert [line["key"] for line in read] == [row.key for row in table().rows]
    first = table().rows[0]
    assert float(read[0]["change_torque_nm"]) == pytest.approx(first.change.torque, rel=1e-6)
    assert float(read[0]["change_rib_stress_peak_mpa"]) == pytest.approx(-0.4)
    percent = first.percent("torque", AT)
    assert float(read[0]["change_torque_percent"]) == pytest.approx(percent, rel=1e-6)
    assert read[0]["unit"] == "mm"


def test_json_holds_the_same():
    """Keys carry units; the record passes through JSON unchanged."""
    record = json.loads(json_text(slopes_record(table())))
    assert record["torque_nm"] == pytest.approx(1.5 * 2 * (0.5 * 9.0 - 0.1 * 6.0))
    assert record["rib_stress_peak_mpa"] == pytest.approx(200.0)
    assert record["keys"][0]["step_mm"] == 0.1
    angle = next(one for one in record["keys"] if one["key"] == "stator.wedge_angle_deg")
    assert angle["value_deg"] == 1.25
    assert angle["change_saliency_ratio"] < 0.0
    assert record["left_out"] == ["stator.x_mm = 0: none"]


def test_tornado_draws_a_bar_each_way_for_every_key_that_acts():
    """Bars as long as the change in percent, the strongest on top, nothing outside the axes."""
    figure = Figure(figsize=(6.0, 4.0))
    FigureCanvasAgg(figure)
    ax = figure.add_axes((0.4, 0.1, 0.55, 0.8))
    draw_tornado(ax, table(), "torque", Style())
    rows = shown_rows(table())
    assert [row.key for row in rows] == [row.key for row in table().rows][:-1]
    widths = [patch.get_width() for patch in ax.patches]
    up, down = widths[: len(rows)], widths[len(rows) :]
    assert up == pytest.approx([row.percent("torque", AT) for row in rows])
    assert down == pytest.approx([-width for width in up])
    heights = [patch.get_y() for patch in ax.patches[: len(rows)]]
    assert heights == sorted(heights, reverse=True)
    low, high = ax.get_xlim()
    assert low < min(widths) < max(widths) < high
    assert key_label(rows[0]) == "rotor gap = 1.25 mm"
    assert key_label(rows[1]).startswith("barrier 2 thickness")


def test_files_are_the_same_each_time_and_settings_stay(tmp_path):
    """PNG and SVG without date or chance; the user's own matplotlib settings are untouched."""
    # The backend is looked up when it is first asked for.
    before = {name: matplotlib.rcParams[name] for name in matplotlib.rcParams if name != "backend"}
    contents = []
    for name in ("one", "two"):
        folder = tmp_path / name
        folder.mkdir()
        files = write_slopes(folder, table())
        assert [file.name for file in files] == ["slopes.png", "slopes.svg"]
        contents.append([file.read_bytes() for file in files])
    assert contents[0] == contents[1]
    assert {name: matplotlib.rcParams[name] for name in before} == before
