"""What stands on the terminal: numbers as a designer reads them, every outcome named."""

import dataclasses

import invented_verdict as invented
import pytest

from lamwright.app.lines import number
from lamwright.app.screen import print_verdict


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
    assert "over supply" in capsys.readouterr().out
