"""What stands on the terminal: numbers as a designer reads them, every outcome named."""

import dataclasses

import invented_verdict as invented
import pytest

from lamwright.app.lines import number
from lamwright.app.screen import print_verdict
from lamwright.postprocess.glance import glance_rows, limit_rows
from lamwright.postprocess.magnet_figures import MagnetFigures
from lamwright.postprocess.verdict import all_figures


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (11.4708, "11.47"),
        (9.0, "9.000"),
        (9.9996, "10.00"),
        (7200.0, "7200"),
        (123456.7, "123457"),
        (0.46934, "0.4693"),
        (0.00012, "0.0001200"),
        (-2.5, "-2.500"),
        (0.0, "0"),
        (6.9e-12, "6.9e-12"),
        (2.5e9, "2.5e+09"),
    ],
)
def test_numbers_have_four_digits(value, text):
    """Four significant digits; an exponent only where a plain number cannot be read."""
    assert number(value) == text


def test_verdict_at_a_glance(capsys):
    """Value, limit and outcome of each limit on its line; estimates marked; both ends told."""
    magnetic = dataclasses.replace(invented.MAGNETIC, ripple=0.3)
    print_verdict(invented.verdict(magnetic), "out/demo")
    told = capsys.readouterr().out
    rows = {line.split("  ")[0].strip(" │|"): line for line in told.splitlines()}
    assert ">= 9.000 N m" in rows["torque, mean"]
    assert "holds" in rows["torque, mean"]
    assert "missed" in rows["torque ripple"]
    assert "~ 0.6200" in rows["power factor"]
    assert "fails: torque ripple" in told
    assert "- invented figures" in told
    assert "mesh 0.5, total 4.0" in told
    assert "files in out/demo" in told


def test_voltage_over_the_supply_is_seen(capsys):
    """No limit of the design file, but a rated point that the supply cannot drive."""
    terminal = dataclasses.replace(invented.TERMINAL, line_voltage=431.0)
    print_verdict(invented.verdict(terminal=terminal), "out")
    assert "exceeded" in capsys.readouterr().out


def test_no_label_takes_two_lines_on_a_plain_terminal(capsys, monkeypatch):
    """80 columns, the longest labels (magnets), every figure with an error bar."""
    monkeypatch.setenv("COLUMNS", "80")
    magnets = MagnetFigures(**{item.name: 0.0123456 for item in dataclasses.fields(MagnetFigures)})
    terminal = dataclasses.replace(invented.TERMINAL, line_voltage=431.0)
    verdict = invented.verdict(terminal=terminal, magnets=(magnets,))
    shown = {figure.label for figure in all_figures(verdict).values()}
    verdict = dataclasses.replace(verdict, errors=dict.fromkeys(all_figures(verdict), 0.000123))
    print_verdict(verdict, "out")
    lines = capsys.readouterr().out.splitlines()
    assert max(len(line) for line in lines) <= 80
    table = lines[3 : lines.index(next(line for line in lines if line.startswith("passes")))]
    rows = [line.split("  ")[0] for line in table if not line.startswith("\u2500")]
    assert len(rows) == len(limit_rows(verdict)) + len(glance_rows(verdict))
    assert set(rows) <= shown
