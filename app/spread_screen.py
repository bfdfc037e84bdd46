"""What `spread` shows on the terminal: figures, sources, share, check, cautions."""

import textwrap
from collections.abc import Sequence

import click
import numpy as np

from lamwright.postprocess.spread import holds, moments, variance_shares, worst_case
from lamwright.postprocess.spread_tables import NOT_GIVEN, SpreadReport, cautions_of

WIDTH = 100
HEADS = ("torque", "ripple", "saliency", "margin", "growth")  # of the figures in their order


def print_spread(report: SpreadReport, folder: str) -> None:
    """The report as plain text."""
    click.echo(report.design_name)
    _print_figures(report)
    _print_sources(report)
    share, worse = report.share, report.share_worsened
    click.echo(
        f"{100.0 * share.value:.2f} % of {share.samples} random machines hold all limits"
        f" ({100.0 * share.low:.2f} to {100.0 * share.high:.2f} %, 95 % confidence);"
        f" {100.0 * worse.value:.2f} % with the model's own miss"
    )
    if report.pull is not None:
        click.echo(f"magnetic pull at the limit of the eccentricity: {report.pull:.3g} N")
    if report.edge_effect is not None:
        click.echo(f"spoilt edge at its depth: torque {report.edge_effect[0]:+.3g} N m")
    for line in cautions_of(report):
        click.echo(_wrapped(f"- {line}"))
    for line in NOT_GIVEN:
        click.echo(_wrapped(f"not given: {line}"))
    click.echo(f"seed {report.seed}; files in {folder}")


def _print_figures(report: SpreadReport) -> None:
    model = report.model
    least, most = worst_case(model)
    _, deviation = moments(model)
    _row("", ("as drawn", "sigma", "worst low", "worst high", "limit", "hold, %"))
    ends_hold = np.all(holds(model.figures, np.stack([least, most])), axis=0).tolist()
    missing: list[str] = []
    for k, figure in enumerate(model.figures):
        name = f"{figure.label}, {figure.unit}" if figure.unit else figure.label
        numbers = (model.nominal[k], deviation[k], least[k], most[k])
        limit = share = "none"
        if figure.limit is not None:
            limit = f"{'>=' if figure.is_least else '<='} {figure.limit:g}"
            share = f"{100.0 * report.shares[k].value:.2f}"
            if not ends_hold[k]:
                missing.append(figure.label)
        _row(name, (*(f"{number:.4g}" for number in numbers), limit, share))
    told = f"misses {', '.join(missing)}" if missing else "holds every limit"
    click.echo(f"  the worst case, every source at the worse of its limits, {told}")
    _row(
        f"model against {len(report.solved)} full solutions", ("rms miss", "largest", "correlated")
    )
    for figure, own in zip(model.figures, report.checks, strict=True):
        told = "none" if own.correlation is None else f"{own.correlation:.4f}"
        name = f"{figure.label}, {figure.unit}" if figure.unit else figure.label
        _row(name, (f"{own.rms:.2g}", f"{own.largest:.2g}", told))


def _print_sources(report: SpreadReport) -> None:
    model = report.model
    _row("share of variance, %", HEADS)
    for effect, row in zip(model.effects, 100.0 * variance_shares(model), strict=True):
        source = effect.source
        name = f"{source.label} +-{source.limit:g} {source.unit}".rstrip()
        _row(name, [f"{share:.1f}" for share in row])


def _row(name: str, cells: Sequence[str]) -> None:
    click.echo(f"  {name:<44}" + "".join(f"{cell:>11}" for cell in cells))


def _wrapped(text: str) -> str:
    return "\n".join(textwrap.wrap(text, WIDTH, subsequent_indent="  ", break_on_hyphens=False))
