"""The picture of the thinnest ribs holds the numbers of its table."""

import pytest

from lamwright.geometry.rib_groups import RibGroup
from lamwright.postprocess.figures_style import Style
from lamwright.postprocess.figures_thin import thin_figure
from lamwright.postprocess.thin_ribs import ThinRib


def thin_rib(number: int, width: float, price: float | None) -> ThinRib:
    """A tangential rib that was 1.5 mm wide, floor 0.6 mm."""
    group = RibGroup((f"rotor.barrier[{number}].tangential_rib_mm",), "tangential", number)
    return ThinRib(group, 1.5e-3, width, 0.6e-3, 3.0, 1.21, price)


def test_bars_are_as_long_as_the_table_says():
    """Widths in mm, margins and prices, each with its limit; a price that lacks is told."""
    ribs = [thin_rib(1, 0.6e-3, -0.2), thin_rib(2, 0.8e-3, None)]
    figure = thin_figure("demo", ribs, 1.2, Style())
    widths, margins, prices = figure.axes
    lengths = [[bar.get_width() for bar in ax.patches] for ax in (widths, margins, prices)]
    assert lengths[0] == pytest.approx([1.5, 0.6, 1.5, 0.8])
    assert lengths[1] == pytest.approx([3.0, 1.21, 3.0, 1.21])
    assert lengths[2] == pytest.approx([-0.2])
    assert [text.get_text() for text in prices.texts] == ["-0.2", "not given"]
    assert widths.lines[0].get_xdata()[0] == pytest.approx(0.6)
    assert margins.lines[0].get_xdata()[0] == pytest.approx(1.2)


def test_without_prices_two_panels_remain():
    """A skewed rotor has no prices."""
    figure = thin_figure("demo", [thin_rib(1, 0.6e-3, None)], 1.2, Style())
    assert len(figure.axes) == 2
