"""Values of a design by their keys as messages write them: `rotor.barrier[2].depth_mm`.

A key is the way through the tables of the design file; tables of an array are counted from 1.
"""

import re

from pydantic import BaseModel

from .design import MachineDesign

KeySteps = tuple[str | int, ...]  # names of tables and places in arrays, from 0

_STEP = re.compile(r"([^.\[\]]+)|\[(\d+)\]")


def key_steps(key: str) -> KeySteps:
    """`rotor.barrier[2].depth_mm` as ("rotor", "barrier", 1, "depth_mm")."""
    return tuple(int(place) - 1 if place else name for name, place in _STEP.findall(key))


def key_name(key: str) -> str:
    """The last name of a key."""
    return str(key_steps(key)[-1])


def stated(design: MachineDesign, key: str) -> object:
    """What the design holds at `key`, None where a key is left out."""
    part: object = design
    for step in key_steps(key):
        if isinstance(step, int):
            assert isinstance(part, tuple), key
            part = part[step]
        else:
            part = None if part is None else getattr(part, step)
    return part


def replaced(design: MachineDesign, key: str, value: float) -> MachineDesign:
    """The design with another value at `key`, not validated again."""
    changed = _replaced(design, key_steps(key), value)
    assert isinstance(changed, MachineDesign)
    return changed


def _replaced(part: object, steps: KeySteps, value: float) -> object:
    if not steps:
        return value
    step, rest = steps[0], steps[1:]
    if isinstance(step, int):
        assert isinstance(part, tuple)
        return (*part[:step], _replaced(part[step], rest, value), *part[step + 1 :])
    assert isinstance(part, BaseModel)
    return part.model_copy(update={step: _replaced(getattr(part, step), rest, value)})
