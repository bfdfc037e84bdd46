"""The spread of a design as JSON and CSV, its cautions, and what it cannot tell."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from lamwright.solver.types import FloatArray

from .files import csv_text
from .spread import (
    CONFIDENCE,
    ModelCheck,
    Share,
    SpreadModel,
    holds,
    moments,
    share_of,
    variance_shares,
    whole,
    worsened,
    worst_case,
)

PERCENTILES = (0.1, 1.0, 50.0, 99.0, 99.9)
NOT_GIVEN = (
    "spread of ripple, margin and growth with the rotor's eccentricity: a sector cannot be solved"
    " with it",
    "unbalance and a shaft that bends, shaft fit, spread of the stator's own cut edges and of the"
    " winding",
    "edge that cutting has spoilt: its residual stress and its strength, only its permeability",
)
STANDING = (
    "rotors burst: these results support, and never replace, a qualified engineer's judgement, the"
    " supplier's material certificate, an overspeed test in containment, and local codes and"
    " standards",
    "sources are taken as independent and the currents as those of the drawn machine",
    "the share's interval is that of counting alone: it holds if tolerances, distributions and"
    " model do",
)
DEFAULTS = (
    "tolerances are defaults, common practice without a source: state those of your supplier in"
    " [tolerance]"
)


@dataclass(frozen=True, slots=True, eq=False)
class SpreadReport:
    """What `spread` has found. Axes as in `spread`."""

    design_name: str
    currents: tuple[float, float]  # i_d, i_q in A
    model: SpreadModel
    values: FloatArray  # (n_sample, n_figure), of the random machines by the model
    modelled: FloatArray  # (n_solved, n_figure), by the model, eccentricity left out
    solved: FloatArray  # (n_solved, n_figure), the same machines in full
    checks: tuple[ModelCheck, ...]  # (n_figure,)
    seed: int
    tolerance: str
    pull: float | None  # N, at the limit of the eccentricity
    edge_effect: FloatArray | None  # (n_figure,), of the spoilt edge at its own depth
    is_default: bool  # no tolerance was stated

    @property
    def share(self) -> Share:
        """Share of machines that hold all limits."""
        return share_of(whole(self.model.figures, self.values))

    @property
    def share_worsened(self) -> Share:
        """The same with every figure worse by what the model misses in rms."""
        values = worsened(self.model.figures, self.values, self.checks)
        return share_of(whole(self.model.figures, values))

    @property
    def shares(self) -> tuple[Share, ...]:
        """Share of machines that hold each limit; all where a figure is not judged."""
        return tuple(share_of(own) for own in holds(self.model.figures, self.values).T)


def cautions_of(report: SpreadReport) -> tuple[str, ...]:
    """Cautions of this spread, then those that always stand."""
    return (*_own_cautions(report), *STANDING)


def _own_cautions(report: SpreadReport) -> Iterator[str]:
    count = len(report.solved)
    for figure, check in zip(report.model.figures, report.checks, strict=True):
        if not check.is_good:
            yield (
                f"{figure.label}: the model misses {count} full solutions by {check.rms:.3g}"
                f" {figure.unit} rms, their own spread is {check.spread:.3g}: do not rely on its"
                " share"
            ).replace("  ", " ")
    share, worse = report.share, report.share_worsened
    if worse.value < share.low:
        yield (
            f"with all figures worse by the model's miss {100.0 * worse.value:.1f} % hold, which is"
            " outside of the interval"
        )
    if report.is_default:
        yield DEFAULTS


def spread_record(report: SpreadReport, version: str) -> dict[str, object]:
    """The report as it stands in JSON."""
    model, share, worse = report.model, report.share, report.share_worsened
    return {
        "design": report.design_name,
        "i_d_a": report.currents[0],
        "i_q_a": report.currents[1],
        "distribution": model.distribution,
        "limits_of_sources_are": "3 sigma" if model.distribution == "normal" else "the ends",
        "samples": share.samples,
        "seed": report.seed,
        "share_holding_percent": 100.0 * share.value,
        "share_low_percent": 100.0 * share.low,
        "share_high_percent": 100.0 * share.high,
        "confidence_percent": 100.0 * CONFIDENCE,
        "share_with_model_error_percent": 100.0 * worse.value,
        "machines_solved_in_full": len(report.solved),
        "figures": _figure_records(report),
        "sources": _source_records(report),
        "eccentric_pull_n": report.pull,
        "spoilt_edge": _edge_record(report),
        "not_given": list(NOT_GIVEN),
        "cautions": list(cautions_of(report)),
        "tolerance": report.tolerance,
        "version": version,
    }


def _figure_records(report: SpreadReport) -> list[dict[str, object]]:
    model = report.model
    least, most = worst_case(model)
    mean, deviation = moments(model)
    worst_holds = np.all(holds(model.figures, np.stack([least, most])), axis=0).tolist()
    return [
        {
            "key": figure.key,
            "unit": figure.unit,
            "nominal": float(model.nominal[k]),
            "limit": figure.limit,
            "worst_least": float(least[k]),
            "worst_most": float(most[k]),
            "worst_holds": None if figure.limit is None else worst_holds[k],
            "mean": float(mean[k]),
            "standard_deviation": float(deviation[k]),
            "share_holding_percent": (
                None if figure.limit is None else 100.0 * report.shares[k].value
            ),
            "percentiles": {
                f"{p:g}": float(value)
                for p, value in zip(
                    PERCENTILES, np.percentile(report.values[:, k], PERCENTILES), strict=True
                )
            },
            "check_rms": report.checks[k].rms,
            "check_largest": report.checks[k].largest,
            "check_spread": report.checks[k].spread,
            "check_correlation": report.checks[k].correlation,
        }
        for k, figure in enumerate(model.figures)
    ]


def _source_records(report: SpreadReport) -> list[dict[str, object]]:
    model, shares = report.model, variance_shares(report.model)
    return [
        {
            "key": effect.source.key,
            "label": effect.source.label,
            "limit": effect.source.limit,
            "unit": effect.source.unit,
            "change_at_minus_limit": _by_figure(report, effect.low),
            "change_at_plus_limit": _by_figure(report, effect.high),
            "variance_share_percent": _by_figure(report, 100.0 * row),
        }
        for effect, row in zip(model.effects, shares, strict=True)
    ]


def _edge_record(report: SpreadReport) -> dict[str, float] | None:
    return None if report.edge_effect is None else _by_figure(report, report.edge_effect)


def _by_figure(report: SpreadReport, row: FloatArray) -> dict[str, float]:
    return {
        figure.key: float(value) for figure, value in zip(report.model.figures, row, strict=True)
    }


def spread_csv(report: SpreadReport) -> str:
    """One row for each source: limit, change of each figure at both limits, share of variance."""
    keys = [figure.key for figure in report.model.figures]
    heads = ("at_minus_limit", "at_plus_limit", "variance_percent")
    header = ["source", "limit", "unit", *(f"{key}_{head}" for key in keys for head in heads)]
    rows = []
    shares = variance_shares(report.model)
    for effect, row in zip(report.model.effects, shares, strict=True):
        numbers = np.stack([effect.low, effect.high, 100.0 * row], axis=1).ravel()
        source = effect.source
        rows.append(
            [source.key, f"{source.limit:.7g}", source.unit, *(f"{x:.6g}" for x in numbers)]
        )
    return csv_text(header, rows)
