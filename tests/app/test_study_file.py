"""Study files: what is read, and one clear line for everything that cannot be."""

import re
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from lamwright.app.study import Sampling
from lamwright.app.study_file import read_study
from lamwright.app.study_keys import LAYOUT_KINDS
from lamwright.app.study_points import points_of
from lamwright.app.study_tables import (
    GoalTable,
    LimitTable,
    SampleTable,
    StudyTables,
    VaryTable,
)
from lamwright.app.study_task import task_of
from lamwright.geometry.errors import DesignError

ROOT = Path(__file__).parent.parent.parent
DESIGNS = ROOT / "designs"
SHIPPED = sorted((DESIGNS / "studies").glob("*.toml"))

HEAD = f'name = "try"\nbase = "{(DESIGNS / "demo_24s4p_arc.toml").as_posix()}"\n'
GAP = '[[vary]]\nkey = "rotor.gap_mm"\nleast = 0.3\nmost = 0.5\nstep = 0.1\n'

Written = Callable[[str], Path]


@pytest.fixture
def written(tmp_path: Path) -> Written:
    """Writes a study and gives its path."""

    def write(text: str) -> Path:
        path = tmp_path / "try.toml"
        path.write_text(text)
        return path

    return write


def vary(key: str, rest: str) -> str:
    """A table of a key that varies."""
    return f'{HEAD}[[vary]]\nkey = "{key}"\n{rest}\n'


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: path.stem)
def test_shipped_studies_can_be_read_and_laid_out(path: Path) -> None:
    """Every study that is shipped reads, and most of its points give a design."""
    study = read_study(path, is_searched=True)
    if any(key.values is None for key in study.keys) and study.sampling.kind == "grid":
        study = replace(study, sampling=Sampling("sobol", 32))  # one for the search alone
    tasks = [task_of(study, values) for values in points_of(study)]
    assert len({task.hash for task in tasks}) == len(tasks)
    assert sum(not task.fault for task in tasks) > 0.6 * len(tasks)


BROKEN = {
    "no base": (f'name = "x"\nbase = "nowhere.toml"\n{GAP}', 'base = "nowhere.toml": no such file'),
    "unknown table key": (
        HEAD + 'effrt = "full"\n' + GAP,
        "effrt: unknown key; did you mean effort",
    ),
    "no key": (
        vary("rotor.gap", "values = [0.4]"),
        'vary[1].key = "rotor.gap": no such key; did you mean "rotor.gap_mm"?',
    ),
    "no layout key": (vary("layout.barrier", "values = [2]"), 'did you mean "layout.barriers"?'),
    "no such barrier": (
        vary("rotor.barrier[4].depth_mm", "values = [9.0]"),
        "the base has 3 of rotor.barrier; accepted 1 to 3",
    ),
    "a table": (vary("rotor.fit", "values = [1.0]"), "a table; accepted one of its keys"),
    "empty range": (
        vary("rotor.gap_mm", "least = 0.5\nmost = 0.4\nstep = 0.1"),
        "vary[1].most = 0.4: empty range, least is 0.5; accepted above 0.5",
    ),
    "no values": (vary("rotor.gap_mm", "values = []"), "vary[1].values has 0: too few"),
    "no range": (vary("rotor.gap_mm", "least = 0.4"), "vary[1].most: missing; accepted values"),
    "step too large": (
        vary("rotor.gap_mm", "least = 0.4\nmost = 0.5\nstep = 0.2"),
        "vary[1].step = 0.2: too large; accepted up to 0.1",
    ),
    "not whole": (
        vary("stator.slots", "values = [24.5]"),
        "vary[1].values = 24.5: not a whole number; accepted whole numbers",
    ),
    "out of range": (
        vary("layout.barriers", "values = [2, 9]"),
        "vary[1].values = 9: out of range; accepted 1 to 6",
    ),
    "text for a number": (
        vary("rotor.gap_mm", 'values = ["wide"]'),
        'vary[1].values = "wide": not what the key takes; accepted numbers',
    ),
    "no such choice": (
        vary("rotor.barrier[1].shape", 'values = ["bow"]'),
        'vary[1].values = "bow": not one of the choices; accepted "arc" or "straight"',
    ),
    "twice": (HEAD + GAP + GAP, 'vary[2].key = "rotor.gap_mm": stands twice'),
    "layout beside a barrier": (
        vary("layout.barriers", "values = [2]")
        + '[[vary]]\nkey = "rotor.barrier[1].depth_mm"\nvalues = [3.0]\n',
        'vary[2].key = "rotor.barrier[1].depth_mm": barriers are laid out anew',
    ),
    "limit on an unknown figure": (
        HEAD + GAP + '[[limit]]\nfigure = "torque"\nleast = 9.0\n',
        'limit[1].figure = "torque": no such figure; did you mean "torque_nm"?',
    ),
    "limit without ends": (
        HEAD + GAP + '[[limit]]\nfigure = "torque_nm"\n',
        "limit[1]: neither least nor most; accepted one or both",
    ),
    "goal on an unknown figure": (
        HEAD + GAP + '[[goal]]\nfigure = "saliency"\nsense = "most"\n',
        'goal[1].figure = "saliency": no such figure; did you mean "saliency_ratio"?',
    ),
    "goal that quick has not": (
        HEAD + GAP + '[[goal]]\nfigure = "newton_steps"\nsense = "least"\n',
        'goal[1].figure = "newton_steps": not computed by effort = "quick"; accepted effort',
    ),
    "grid without a step": (
        vary("rotor.gap_mm", "least = 0.4\nmost = 0.5"),
        "vary[1].step: missing, a full grid needs it; accepted with a step, or sample.kind",
    ),
    "grid too large": (
        vary("rotor.gap_mm", "least = 0.3\nmost = 0.5\nstep = 0.0001"),
        "most_designs = 2000: the grid has 2001 designs; accepted fewer values",
    ),
}


@pytest.mark.parametrize(("text", "told"), BROKEN.values(), ids=BROKEN)
def test_one_clear_line_for_a_broken_study(written: Written, text: str, told: str) -> None:
    """Each fault is one line with file, line, key, fault and remedy."""
    path = written(text)
    with pytest.raises(DesignError) as caught:
        read_study(path)
    said = str(caught.value)
    assert told in said
    assert said.startswith(f"{path}:")
    assert "\n" not in said


def test_a_step_as_wide_as_its_range_is_taken(written: Written) -> None:
    """3.3 - 3.2 is a little less than 0.1 to the machine, not to a designer."""
    path = written(vary("rotor.barrier[1].depth_mm", "least = 3.2\nmost = 3.3\nstep = 0.1"))
    assert read_study(path).keys[0].values == (3.2, 3.3)


def test_a_broken_base_says_so_in_its_own_words(written: Written, tmp_path: Path) -> None:
    """The base's faults are told as `assess` tells them."""
    base = (DESIGNS / "demo_24s4p_arc.toml").read_text().replace("gap_mm = 0.4", "gap_mm = -0.4")
    (tmp_path / "bad.toml").write_text(base)
    with pytest.raises(DesignError, match=r"bad\.toml:\d+: rotor\.gap_mm = -0\.4: too small"):
        read_study(written(f'name = "x"\nbase = "bad.toml"\n{GAP}'))


def test_readme_lists_every_key_and_its_example_reads(written: Written) -> None:
    """designs/studies/README.md: keys of the tables and of the layout, and the study it shows."""
    readme = (DESIGNS / "studies" / "README.md").read_text(encoding="utf-8")
    tables = (StudyTables, VaryTable, LimitTable, GoalTable, SampleTable)
    names = {name for table in tables for name in table.model_fields}
    rows = " ".join(row for row in readme.splitlines() if row.startswith("| "))
    told = set(re.findall(r"`(?:\[+\w+\]+ )?([\w.]+)`", rows))
    assert names - {"vary", "limit", "goal", "sample"} <= told
    assert set(LAYOUT_KINDS) <= told
    assert {path.name for path in SHIPPED} <= told
    block = re.search(r"```toml\n(.*?)```", readme, re.DOTALL)
    assert block
    study = read_study(written(block[1].replace("..", DESIGNS.as_posix())))
    assert len(points_of(study)) == 48
