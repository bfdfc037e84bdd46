"""Tasks and evaluations of a study without any physics, for tests of what keeps and shows them."""

from pathlib import Path

from lamwright.app.evaluation import Evaluation
from lamwright.app.study import Sampling, Study, StudyGoal, StudyKey, StudyLimit
from lamwright.app.study_task import Task

BASE = "# a base design\n" + "\n".join(f"key_{k} = {k * k}  # mm" for k in range(100)) + "\n"
CARDS = {"cards/steel.toml": "# a steel, invented\n"}
ANGLE, GAP = "rotor.barrier[1].end_angle_deg", "rotor.gap_mm"


def plain_study(**changes):
    """A study of two keys with a limit and two goals."""
    fields = {
        "name": "angle by gap",
        "note": "",
        "path": Path("study.toml"),
        "base_name": "base.toml",
        "base_text": BASE,
        "cards": CARDS,
        "drawings": {"slot.dxf": b"\x00\xff drawn"},
        "keys": (StudyKey(ANGLE, low=4.0, high=20.0), StudyKey(GAP, choices=(0.3, 0.4))),
        "effort": "quick",
        "tolerance": "coarse",
        "limits": (StudyLimit("yield_margin", least=1.5),),
        "goals": (StudyGoal("torque_nm", "most"), StudyGoal("torque_ripple_percent", "least")),
        "sampling": Sampling(),
        "most_designs": 1000,
        "seconds": 60.0,
    }
    return Study(**(fields | changes))


def plain_task(k, study=None):
    """Design k: angle k / 4, gap by whether k is odd."""
    study = study or plain_study()
    return Task(
        hash=f"{k:064x}",
        values={ANGLE: k / 4, GAP: 0.4 if k % 2 else 0.3},
        design_name=f"design {k}",
        design_text=BASE.replace("key_7 = 49", f"key_7 = {k}"),
        cards=CARDS,
        drawings=study.drawings,
        limits=study.limits,
    )


def plain_evaluation(k):
    """Every fifth is rejected; of the others torque k, ripple 40 - k, margin 1 + k / 10."""
    if k % 5 == 0:
        return Evaluation("rejected", f"rib {k} is thinner than the sheet", "outline", seconds=0.01)
    figures = {"torque_nm": float(k), "torque_ripple_percent": 40.0 - k, "yield_margin": 1 + k / 10}
    passes = figures["yield_margin"] >= 1.5
    return Evaluation("done", "", "field", figures, {"torque_nm": 0.01 * k}, passes, 0.5)
