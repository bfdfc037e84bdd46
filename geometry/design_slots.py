"""Which keys a slot has: those that its sides, its bottom and its mouth need or may have.

A key that a shape needs must be there, and one that would do nothing must not.
"""

from collections.abc import Collection

KEYS_OF_SHAPE = "keys_of_shape"  # kind of a validation error that lists faults of several keys

# Key: choices (any of them) that need it, choices that may have it.
_KEYS: dict[str, tuple[tuple[str, ...], tuple[str, ...]]] = {
    "tooth_width_mm": (("parallel_tooth",), ()),
    "slot_width_mm": (("parallel_slot",), ()),
    "slot_opening_mm": (("semi_closed",), ()),
    "opening_depth_mm": (("semi_closed",), ()),
    "bridge_mm": (("closed",), ()),
    "wedge_angle_deg": ((), ("semi_closed",)),
    "slot_corner_radius_mm": ((), ("concentric", "flat")),
}
_CHOSEN_BY = {
    "parallel_tooth": "slot_sides",
    "parallel_slot": "slot_sides",
    "concentric": "slot_bottom",
    "flat": "slot_bottom",
    "round": "slot_bottom",
    "semi_closed": "slot_mouth",
    "open": "slot_mouth",
    "closed": "slot_mouth",
}


def slot_key_faults(
    choices: tuple[str, str, str], stated: Collection[str]
) -> tuple[tuple[str, str], ...]:
    """Keys that are missing, or that do nothing, each with the fault and what is accepted.

    Args:
        choices: sides, bottom and mouth of the slots.
        stated: keys that the design file gives another value than their default.
    """
    found = []
    for key, (needing, allowing) in _KEYS.items():
        if key in stated:
            if not {*needing, *allowing} & set(choices):
                own = " or ".join(f'"{choice}"' for choice in (*needing, *allowing))
                chooser = _CHOSEN_BY[(*needing, *allowing)[0]]
                found.append((key, f"does nothing; accepted only with {chooser} = {own}"))
        elif set(needing) & set(choices):
            found.append((key, "missing; accepted a number above 0"))
    return tuple(found)


def idle_slot_keys(choices: tuple[str, str, str]) -> frozenset[str]:
    """Keys that slots of this shape do not have."""
    return frozenset(
        key
        for key, (needing, allowing) in _KEYS.items()
        if not {*needing, *allowing} & set(choices)
    )
