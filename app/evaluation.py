"""The evaluation of one design of a study: its figures, or why there are none."""

import time
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Literal

from lamwright.geometry.errors import LamwrightError, MeshError, NotConverged

from .study import StudyLimit
from .study_task import Task

if TYPE_CHECKING:
    from lamwright.geometry.design_file import Machine
    from lamwright.geometry.section import CrossSection

OutcomeName = Literal["done", "rejected", "failed"]
DIGITS = 9  # significant, of every figure kept


@dataclass(frozen=True, slots=True)
class Evaluation:
    """What is known of a design after it was looked at.

    Rejected is a design that cannot be built or run; failed one whose computation did not come to
    an end.
    """

    outcome: OutcomeName
    reason: str = ""  # one line; empty where done
    stage: str = ""  # in which it ended, see `study_screening`
    figures: Mapping[str, float] = field(default_factory=dict)  # in the unit of their keys
    errors: Mapping[str, float] = field(default_factory=dict)  # of some figures, in their units
    passes: bool | None = None  # all limits of design and study; None where one is not known
    seconds: float = 0.0


def evaluate(task: Task) -> Evaluation:
    """Figures of one design, or the reason why there are none.

    Every fault of a design ends in an evaluation, none is raised. The same task gives the same
    figures in any process: nothing is kept from one to the next.
    """
    began = time.perf_counter()
    stages = ["values"]
    try:
        done = _evaluated(task, stages)
    except (NotConverged, MeshError) as error:
        done = _ended("failed", stages[-1], error)
    except LamwrightError as error:
        done = _ended("rejected", getattr(error, "stage", stages[-1]), error)
    except Exception as error:  # of one design in a thousand; the others must go on
        done = _ended("failed", stages[-1], error)
    return replace(done, seconds=time.perf_counter() - began)


def imported() -> None:
    """Import what an evaluation needs: 1 s that a worker spends while its study is read."""
    from . import study_machine, study_quick, study_screening  # noqa: F401


def _ended(outcome: OutcomeName, stage: str, error: Exception) -> Evaluation:
    told = str(error) if isinstance(error, LamwrightError) else f"{type(error).__name__}: {error}"
    return Evaluation(outcome, reason=" ".join(told.split()), stage=stage)


def _evaluated(task: Task, stages: list[str]) -> Evaluation:
    """The figures; `stages` gets the name of each stage as it begins."""
    from .study_machine import machine_of
    from .study_screening import Rejected, drawn, screen_figures, screen_ribs

    if task.fault:
        raise Rejected("values", task.fault)
    stages.append("design")
    machine = machine_of(task.design_name, task.design_text, task.cards, task.drawings)
    stages.append("geometry")
    section = drawn(machine)
    limits = limits_of(machine, task.limits)
    stages.append("ribs")
    margin = next((one.least for one in limits if one.figure == "yield_margin"), None)
    if margin is not None:
        screen_ribs(machine, margin)
    stages.append("quick")
    if task.effort == "full":
        if task.limits:
            screen_figures(_quick(machine, section)[0], task.limits)
        stages.append("full")
        figures, errors = _full(task, machine, section)
    else:
        figures, errors = _quick(machine, section, errors=task.errors)
    return Evaluation(
        "done", figures=_kept(figures), errors=_kept(errors), passes=passing(limits, figures)
    )


def limits_of(machine: "Machine", own: tuple[StudyLimit, ...]) -> tuple[StudyLimit, ...]:
    """The limits of the study, and those of the design on other figures."""
    stated = machine.design.limits
    of_design = (
        StudyLimit("torque_nm", least=stated.least_torque_nm),
        StudyLimit("torque_ripple_percent", most=stated.most_ripple_percent),
        StudyLimit("saliency_ratio", least=stated.least_saliency_ratio),
        StudyLimit("yield_margin", least=stated.least_yield_margin),
    )
    named = {limit.figure for limit in own}
    return (*own, *(limit for limit in of_design if limit.figure not in named))


def passing(limits: tuple[StudyLimit, ...], figures: Mapping[str, float]) -> bool | None:
    """Whether all limits hold; None where one is on a figure that is not known."""
    known = [limit for limit in limits if limit.figure in figures]
    if not all(limit.holds(figures[limit.figure]) for limit in known):
        return False
    return True if len(known) == len(limits) else None


def _quick(
    machine: "Machine", section: "CrossSection", *, errors: bool = False
) -> tuple[dict[str, float], dict[str, float]]:
    from .study_quick import quick_figures, quick_work

    work = quick_work(machine, section)
    figures = quick_figures(section, work)
    if not errors:
        return figures, {}
    from .study_quick_errors import quick_errors_of

    bars = quick_errors_of(machine, section, work)
    return figures, {key: bar for key, bar in bars.items() if key in figures}


def _full(
    task: Task, machine: "Machine", section: "CrossSection"
) -> tuple[dict[str, float], dict[str, float]]:
    from .study_full import full_figures_of

    return full_figures_of(machine, section, task.tolerance)


def _kept(figures: Mapping[str, float]) -> dict[str, float]:
    return {key: float(f"{value:.{DIGITS}g}") for key, value in figures.items()}
