"""What a rotor skewed in steps gives: means over its steps, each with its own field.

The field is two-dimensional in each step; flux along the stack between steps is left out. All
steps carry the same phase currents. A step whose d axis lies an electrical angle a ahead of the
rotor's (the mean of the steps) sees the current vector turned back by a, and its linkages are
turned forth by a before they are averaged:

    i_step = i e^(-j a),   psi = mean of psi_step e^(j a),   i = i_d + j i_q

Torque and energies are plain means; T = 3/2 p (psi_d i_q - psi_q i_d) then holds in the mean of
the whole as in every step, as the product does not change when both vectors are turned.
Source: derived.
"""

import cmath
from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from lamwright.solver.chains import OperatingPoint
from lamwright.solver.estimate_step import Change
from lamwright.solver.types import FieldSolution


def skew_cautions(steps: int) -> tuple[str, ...]:
    """What a reader should be wary of where the rotor has several steps."""
    if steps == 1:
        return ()
    return (
        f"{steps} steps of skew, each with a two-dimensional field: flux between them is left out",
    )


def turned_back(d: float, q: float, angle_el: float) -> tuple[float, float]:
    """A dq vector as seen from a frame `angle_el` rad ahead."""
    seen = complex(d, q) * cmath.exp(-1j * angle_el) if angle_el else complex(d, q)
    return seen.real, seen.imag


def step_point(point: OperatingPoint, offset: float, pole_pairs: int) -> OperatingPoint:
    """The operating point of a step, `offset` mechanical rad ahead of the rotor's position."""
    i_d, i_q = turned_back(point.i_d, point.i_q, pole_pairs * offset)
    return OperatingPoint(i_d, i_q, point.position + offset)


def mean_solution(
    steps: Sequence[FieldSolution], offsets: Sequence[float], point: OperatingPoint, pole_pairs: int
) -> FieldSolution:
    """The whole machine's figures from the fields of its steps.

    Args:
        steps: one for each step, at its `step_point`.
        offsets: mechanical rad of the steps ahead of the rotor's position.
        point: currents and position of the rotor.
        pole_pairs: of the machine.

    Returns:
        Linkages, torque and energies of the whole; potentials and Newton's course are those of
        the middle step. A single step that is not turned is returned as it is.
    """
    if len(steps) == 1 and offsets[0] == 0.0:
        return steps[0]
    pairs = [
        turned_back(field.psi_d, field.psi_q, -pole_pairs * offset)
        for field, offset in zip(steps, offsets, strict=True)
    ]
    psi_d, psi_q = np.mean(pairs, axis=0).tolist()
    return replace(
        steps[len(steps) // 2],
        i_d=point.i_d,
        i_q=point.i_q,
        position=point.position,
        psi_abc=np.mean([field.psi_abc for field in steps], axis=0),
        psi_d=psi_d,
        psi_q=psi_q,
        torque=float(np.mean([field.torque for field in steps])),
        energy=float(np.mean([field.energy for field in steps])),
        coenergy=float(np.mean([field.coenergy for field in steps])),
    )


def mean_change(steps: Sequence[Change], offsets: Sequence[float], pole_pairs: int) -> Change:
    """What a finer mesh changes of the whole machine's figures, from its steps'."""
    pairs = [
        turned_back(change.psi_d, change.psi_q, -pole_pairs * offset)
        for change, offset in zip(steps, offsets, strict=True)
    ]
    psi_d, psi_q = np.mean(pairs, axis=0).tolist()
    torque = float(np.mean([change.torque for change in steps]))
    return Change(torque, psi_d, psi_q, max(change.steps for change in steps))
