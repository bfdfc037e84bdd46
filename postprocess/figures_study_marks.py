"""What the pictures of a study share: labels, ticks, limits, colours of designs.

Designs that hold every limit are blue, others grey and drawn otherwise too; the best stand out in
red with their number. All three tell apart in grey print and for the colour-blind: by lightness,
size and form.
"""

from __future__ import annotations

import textwrap
from typing import TYPE_CHECKING

import numpy as np

from .figures_style import Style
from .studied import StudyAxis

if TYPE_CHECKING:
    from matplotlib.axes import Axes

FAILED = "#b3bcc4"  # designs that miss a limit
DASHES = ("-", "--", ":", "-.")  # of the best by the first, second, ... goal


def frame(ax: Axes, style: Style) -> None:
    """Thin frame and ticks."""
    ax.tick_params(labelsize=style.small, colors=style.ink, width=style.hair, length=2.5)
    for spine in ax.spines.values():
        spine.set(color=style.quiet, linewidth=style.hair)


def tick_texts(ax: Axes, axis: StudyAxis, which: str) -> None:
    """Ticks of a key: at its own values where they are few or texts, and their texts."""
    target = ax.xaxis if which == "x" else ax.yaxis
    if axis.texts:
        target.set_ticks(range(len(axis.texts)), list(axis.texts))
        return
    values = np.unique(axis.values[np.isfinite(axis.values)])
    if axis.is_key and 0 < values.size <= 8:
        target.set_ticks(list(values), [shown(value) for value in values])


def shown(value: float) -> str:
    """A number for a tick or label."""
    return f"{value:.4g}"


def measured(axis: StudyAxis, k: int) -> str:
    """The value of design k with its unit."""
    value = axis.values[k]
    if axis.texts:
        return axis.texts[int(value)]
    space = "" if axis.unit == "%" else " "
    return f"{value:.4g}{space}{axis.unit}".strip()


def wrapped(text: str, width: int) -> str:
    """A label in lines of about so many letters; long keys break behind dots and underscores."""
    soft = text.replace(".", ".\u200b").replace("_", "_\u200b")
    lines = textwrap.wrap(soft.replace("\u200b", " \u200b"), width)
    return "\n".join(line.replace(" \u200b", "").replace("\u200b", "") for line in lines)


def limit_text(axis: StudyAxis) -> str:
    """The limits in words, empty where there are none."""
    low = "" if axis.least is None else f"at least {axis.least:g}"
    high = "" if axis.most is None else f"at most {axis.most:g}"
    return " and ".join(part for part in (low, high) if part)
