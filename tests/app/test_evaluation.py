"""One evaluation of a design: its figures, or the stage and the reason why there are none."""

from dataclasses import replace
from pathlib import Path

import pytest

from lamwright.app.evaluation import Evaluation, evaluate, passing
from lamwright.app.run import assess
from lamwright.app.study import Study, StudyLimit, Values
from lamwright.app.study_figures import known_figures, quick_figures
from lamwright.app.study_file import read_study
from lamwright.app.study_task import Task, task_of
from lamwright.postprocess.verdict import all_figures

ROOT = Path(__file__).parent.parent.parent
DEMO = ROOT / "designs" / "demo_24s4p_arc.toml"


@pytest.fixture(scope="module")
def study(tmp_path_factory: pytest.TempPathFactory) -> Study:
    """A study of the demo whose keys the tests set as they need."""
    path = tmp_path_factory.mktemp("study") / "try.toml"
    path.write_text(
        f'name = "try"\nbase = "{DEMO.as_posix()}"\n'
        '[[vary]]\nkey = "rotor.gap_mm"\nvalues = [0.4, 0.5]\n'
    )
    return read_study(path)


def task(study: Study, values: Values) -> Task:
    """The task of some values of any keys."""
    return task_of(study, values)


@pytest.fixture(scope="module")
def demo(study: Study) -> Evaluation:
    """The demo, quick, with error bars."""
    return evaluate(task(replace(study, errors=True), {"rotor.gap_mm": 0.4}))


def test_a_quick_evaluation_has_all_figures_it_promises(demo: Evaluation) -> None:
    """The names are those that goals and limits may use, no more and no fewer."""
    assert demo.outcome == "done"
    assert demo.reason == demo.stage == ""
    assert set(demo.figures) == set(quick_figures())


def test_quick_figures_of_the_demo(demo: Evaluation) -> None:
    """Against the full figures of README: within what designs/studies/README.md says of quick ones.

    Masses by hand: copper 4 coils a phase of 34 turns, 2 x 210 mm of 1.4 mm2, 8930 kg/m3.
    """
    figures = demo.figures
    assert figures["torque_nm"] == pytest.approx(11.61, rel=0.02)
    assert figures["saliency_ratio"] == pytest.approx(5.916, rel=0.03)
    assert figures["power_factor"] == pytest.approx(0.704, abs=0.01)
    assert figures["rib_stress_peak_mpa"] == pytest.approx(171.7, rel=0.04)
    assert figures["copper_mass_kg"] == pytest.approx(
        3 * 4 * 34 * 2 * 0.210 * 1.4e-6 * 8930, rel=1e-9
    )
    parts = ("rotor_iron_mass_kg", "stator_iron_mass_kg", "copper_mass_kg")
    assert figures["active_mass_kg"] == pytest.approx(sum(figures[key] for key in parts))


def test_quick_figures_have_error_bars_where_the_study_asks(study: Study, demo: Evaluation) -> None:
    """The full figures of README are within twice the bars, and these are of use: a few percent.

    A row with them is another than one without: else a ledger would serve the bare one.
    """
    full = {"torque_nm": 11.61, "saliency_ratio": 5.916, "rib_stress_peak_mpa": 171.7}
    for key, value in full.items():
        bar = demo.errors[key]
        assert abs(demo.figures[key] - value) < 2.0 * bar < 0.1 * value, key
    assert set(demo.errors) <= set(demo.figures)
    assert not {"copper_mass_kg", "copper_loss_w"} & set(demo.errors)  # exact
    values = {"rotor.gap_mm": 0.4}
    assert task(replace(study, errors=True), values).hash != task(study, values).hash
    assert replace(study, errors=True).hash != study.hash


def test_the_same_figures_whatever_was_computed_before(study: Study, demo: Evaluation) -> None:
    """To the last bit, after another design in the same process."""
    other = evaluate(task(study, {"layout.barriers": 2, "layout.end_angle_deg": 36.0}))
    assert other.outcome == "done"
    again = evaluate(task(study, {"rotor.gap_mm": 0.4}))
    assert again.figures == demo.figures
    assert not again.errors
    assert other.figures["torque_nm"] != demo.figures["torque_nm"]


@pytest.mark.parametrize(
    ("values", "stage", "told"),
    [
        (
            {"layout.barriers": 6, "layout.end_angle_deg": 32.0},
            "values",
            "barrier would be thinner",
        ),
        ({"rotor.gap_mm": -0.4}, "design", "rotor.gap_mm = -0.4: too small"),
        ({"rotor.barrier[2].depth_mm": 4.0}, "geometry", "rotor.barrier["),
        ({"stator.slots": 26}, "geometry", "stator.slots = 26"),
        ({"duty.maximum_speed_rpm": 90000.0}, "ribs", "by the closed form of the ribs"),
    ],
)
def test_a_rejected_design_says_where_and_why(
    study: Study, values: Values, stage: str, told: str
) -> None:
    """One line and the stage of the screening."""
    ended = evaluate(task(study, values))
    assert (ended.outcome, ended.stage) == ("rejected", stage)
    assert told in ended.reason
    assert "\n" not in ended.reason
    assert not ended.figures
    assert ended.passes is None


def test_a_full_evaluation_is_not_begun_far_from_a_limit(study: Study) -> None:
    """The quick figures say so first."""
    wanted = replace(
        task(study, {"rotor.gap_mm": 0.4}),
        effort="full",
        limits=(StudyLimit("torque_nm", least=20.0),),
    )
    ended = evaluate(wanted)
    assert (ended.outcome, ended.stage) == ("rejected", "quick")
    assert "by quick figures; accepted at least 20" in ended.reason


def test_limits_of_design_and_study() -> None:
    """All must hold; one on a figure that is not known leaves it open, unless another fails."""
    limits = (StudyLimit("a", least=1.0, most=2.0), StudyLimit("b", most=5.0))
    assert passing(limits, {"a": 1.0, "b": 5.0}) is True
    assert passing(limits, {"a": 2.5, "b": 5.0}) is False
    assert passing(limits, {"a": 2.5}) is False
    assert passing(limits, {"a": 1.5}) is None


def test_task_hash_is_that_of_the_design(study: Study) -> None:
    """The same values in another form are the same design; another effort is not."""
    first = task(study, {"rotor.gap_mm": 0.4})
    assert task(study, {"rotor.gap_mm": 0.40}).hash == first.hash
    assert task(study, {"stator.stack_length_mm": 100}).hash == first.hash
    assert task(study, {"rotor.gap_mm": 0.41}).hash != first.hash
    full = replace(study, effort="full")
    assert task_of(full, {"rotor.gap_mm": 0.4}).hash != first.hash
    fine = replace(full, tolerance="fine")
    assert task_of(fine, {"rotor.gap_mm": 0.4}).hash != task_of(full, {"rotor.gap_mm": 0.4}).hash


def test_a_task_of_values_that_the_base_does_not_state(study: Study) -> None:
    """A key with a default is put into its table; all barriers take a value together."""
    text = task(study, {"duty.overspeed_factor": 1.3, "losses.air_temperature_c": 50.0}).design_text
    assert "[duty]\noverspeed_factor = 1.3\n" in text
    assert "[losses]\nair_temperature_c = 50\n" in text
    text = task(study, {"rotor.barrier[*].tangential_rib_mm": 0.8}).design_text
    assert text.count("tangential_rib_mm = 0.8") == 3


@pytest.mark.slow
def test_a_full_evaluation_has_the_figures_of_assess(study: Study, tmp_path: Path) -> None:
    """To nine digits, which is all that is kept of them; error bars too."""
    full = replace(task(study, {"rotor.gap_mm": 0.4}), effort="full", tolerance="coarse")
    ended = evaluate(full)
    assert ended.outcome == "done", ended.reason
    verdict = assess(DEMO, tmp_path / "out", tolerance="coarse", pictures=False)
    wanted = all_figures(verdict)
    masses = {key for key in known_figures() if key.endswith("_mass_kg")}
    assert set(ended.figures) - masses == set(wanted)
    for key, figure in wanted.items():
        assert ended.figures[key] == float(f"{figure.value:.9g}"), key
    assert set(ended.errors) == set(verdict.errors)
