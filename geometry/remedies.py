"""What would fit: the range of one key that mends a fault, found on the exact geometry.

A fault says by how much something is missing and which keys may mend it, the most natural first.
For each key in turn its whole domain is tried at a grid of values, finer where little is missing;
next to the value as it stands, the run of values that mend the fault without making a new one is
closed in by bisection and rounded inward. A range is only stated after its rounded ends have been
tried. A run of values narrower than the finest grid (1/2000 of the domain) may be missed; then
the next key is tried.

Cost: some 90 to 150 checks of one barrier or of the slot per key, about 1 ms each.
"""

import math
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from .design import BarrierDesign, MachineDesign
from .design_keys import key_name, replaced, stated
from .errors import Finding
from .mid_lines import MM, arm_angle, bend_radius, end_fillet_mm, end_thickness_mm

GRID = 40  # values tried over a key's whole domain
REFINED = 20  # values tried between the neighbours of the one that lacks least
REFINEMENTS = 2
HALVINGS = 24  # of a grid step: to a part in 1e7 of it, beyond the digits shown
MOST_DECIMALS = 9
NOT_ENOUGH = ", then other values must change too"
ROUNDING = 1e-4  # of the last decimal: an end found by halving is let reach its round number


_BARRIER = r"rotor\.(?:alternate_)?barrier\[(\d+)\]"
Identity = tuple[str, str]  # code and first key of a fault

# Key: least and most, mm. Outside, a number is a slip of the pen: beyond any machine built, and
# beyond what double precision could draw to a nanometre. Common practice, no source.
SCALES = {
    "stator.outer_diameter_mm": (5.0, 20_000.0),
    "stator.bore_diameter_mm": (2.0, 20_000.0),
    "rotor.sheet_thickness_mm": (0.02, 5.0),
    "rotor.gap_mm": (0.02, 100.0),
}


@dataclass(frozen=True, slots=True)
class Fault:
    """Something that does not fit, before the search for what would."""

    code: str
    keys: tuple[str, ...]  # keys that may mend it, the most natural first
    text: str
    lack: float  # how much is missing, in m or rad, positive
    remedy: str | None = None  # where the range is known in closed form

    @property
    def identity(self) -> Identity:
        """What makes it the same fault when some value is changed."""
        return self.code, self.keys[0]


@dataclass(frozen=True, slots=True)
class Domain:
    """The values of a key that may be tried, in the key's own unit."""

    low: float
    high: float
    is_low_accepted: bool = False  # otherwise the value must be above it
    has_limit: bool = False  # whether `high` is a limit, not just where the search ends


Faults = Callable[[MachineDesign, str], Sequence[Fault]]  # those that a key has a share in


def findings(design: MachineDesign, found: Sequence[Fault], faults: Faults | None) -> list[Finding]:
    """The faults, each with the key that mends it and the range that fits.

    Args:
        design: the design with the faults.
        found: some of its faults.
        faults: design and key -> all faults in which the key has a share; None looks for no range.
    """
    searches: dict[str, _Search] = {}  # faults that look to the same key share its trials
    result = []
    for fault in found:
        key, remedy = fault.keys[0], fault.remedy
        if remedy is None and faults is not None:
            key, remedy = _mended(design, fault, faults, searches)
        result.append(Finding(fault.code, key, value_of(design, key), fault.text, remedy or ""))
    return result


def value_of(design: MachineDesign, key: str) -> float:
    """The value at `key`; what a barrier takes by default where there is none."""
    value = stated(design, key)
    if isinstance(value, int | float):
        return float(value)
    table = re.match(_BARRIER, key)
    barrier = stated(design, table[0]) if table else None
    if not isinstance(barrier, BarrierDesign):
        return 0.0
    own = getattr(barrier, key_name(key), None)  # what an unlike half does not state
    if isinstance(own, int | float):
        return float(own)
    return _default(barrier, key_name(key), design.pole_pairs)


def with_value(design: MachineDesign, key: str, value: float) -> MachineDesign:
    """The design with another value at `key`, not validated again."""
    return replaced(design, key, value)


def may_be_negative(key: str) -> bool:
    """Whether a key has a sign: what lies on either side of the q axis, or leans either way."""
    return "radial_rib_places_mm[" in key or key.endswith("radial_rib_tilt_deg")


def barrier_key(number: int, name: str) -> str:
    """The key of barrier `number` (from 1 at the rim) as written in a message."""
    return f"rotor.barrier[{number}].{name}"


def barrier_number(key: str) -> int | None:
    """Which barrier a key belongs to, from 1; None for keys of other tables."""
    match = re.match(_BARRIER, key)
    return int(match[1]) if match else None


def _default(barrier: BarrierDesign, name: str, pole_pairs: int) -> float:
    if name == "arm_angle_deg":
        return math.degrees(arm_angle(barrier, pole_pairs))
    if name == "bend_radius_mm":
        return bend_radius(barrier) / MM
    if name == "end_thickness_mm":
        return end_thickness_mm(barrier)
    if name == "end_fillet_mm":
        return end_fillet_mm(barrier)
    if name == "tangential_rib_inner_mm":
        return barrier.tangential_rib_mm
    return 0.0


def domain_of(design: MachineDesign, key: str) -> Domain:
    """The values of a key that may be tried at all."""
    if key in SCALES:
        low, high = SCALES[key]
        return Domain(low, high, is_low_accepted=True, has_limit=True)
    name = key_name(key)
    if name == "radial_rib_tilt_deg":
        return Domain(-90.0 + 1e-6, 90.0 - 1e-6, is_low_accepted=True)
    if "radial_rib_places_mm[" in key:
        half = 0.5 * design.stator.bore_diameter_mm
        return Domain(-half, half)
    outer, sheet = design.stator.outer_diameter_mm, design.rotor.sheet_thickness_mm
    if name == "end_angle_deg":
        return Domain(0.0, 90.0 / design.pole_pairs)
    if name == "arm_angle_deg":
        return Domain(0.0, 90.0 - 1e-6, is_low_accepted=True)
    if name == "wedge_angle_deg":
        return Domain(0.0, 60.0, is_low_accepted=True, has_limit=True)
    if name == "slot_corner_radius_mm":
        return Domain(0.1 * sheet, outer, is_low_accepted=True)  # 0 stands apart from the range
    if name == "wedge_depth_mm":
        # Under a flat tooth tip 0 stands apart from the range too.
        is_tipped = design.stator.slot_mouth == "semi_closed" and design.stator.wedge_angle_deg
        low = 0.0 if is_tipped else 0.1 * sheet
        return Domain(low, outer, is_low_accepted=True)
    if name == "angle_deg":
        return Domain(0.0, 90.0 / design.pole_pairs, is_low_accepted=True, has_limit=True)
    if name == "span_deg":
        return Domain(0.0, 180.0 / design.pole_pairs)
    is_local = re.match(r"rotor\.(\w+(\[|\.))", key) is not None  # of a barrier or a detail
    return Domain(0.0, 0.5 * design.stator.bore_diameter_mm if is_local else 2.0 * outer)


class _Search:
    """Trials of one key: what is missing of a fault, and of every fault not known before."""

    def __init__(self, design: MachineDesign, key: str, faults: Faults) -> None:
        self.domain = domain_of(design, key)
        self.value = value_of(design, key)
        self.key = key
        self._design, self._faults = design, faults
        self._left: dict[float, Sequence[Fault]] = {}

    def accepted(self, known: frozenset[Identity], only: Identity | None = None) -> str | None:
        """The range that fits, nearest to the value as it stands.

        Args:
            known: faults that may remain.
            only: the one fault that must go, whatever else appears.
        """

        def lack(value: float) -> float:
            if value not in self._left:
                changed = with_value(self._design, self.key, value)
                self._left[value] = self._faults(changed, self.key)
            return sum(
                fault.lack
                for fault in self._left[value]
                if fault.identity not in known and only in (None, fault.identity)
            )

        values = sorted({*_grid(self.domain), self._value_within()})
        for _ in range(REFINEMENTS):
            lacks = [lack(value) for value in values]
            if min(lacks) == 0.0:
                break
            values = _refined(values, lacks)
        fits = [lack(value) == 0.0 for value in values]
        run = _run(values, fits, self.value)
        if run is None:
            return None
        first, last = run
        low = high = None
        if first > 0:
            low = _end(values[first - 1], values[first], lack)
        if last < len(values) - 1:
            high = _end(values[last + 1], values[last], lack)
        return _range_text(self.domain, low, high, lack)

    def _value_within(self) -> float:
        """The value as it stands: known not to fit, whatever the grid beside it says."""
        return min(max(self.value, self.domain.low), self.domain.high)


def _run(values: list[float], fits: list[bool], value: float) -> tuple[int, int] | None:
    """First and last index of the values that fit and lie together nearest to `value`."""
    fitting = [k for k, one in enumerate(fits) if one]
    if not fitting:
        return None
    first = last = min(fitting, key=lambda k: abs(values[k] - value))
    while first > 0 and fits[first - 1]:
        first -= 1
    while last < len(fits) - 1 and fits[last + 1]:
        last += 1
    return first, last


def _end(outside: float, inside: float, lack: Callable[[float], float]) -> float:
    """The last fitting value between one that does not fit and one that does."""
    for _ in range(HALVINGS):
        middle = 0.5 * (outside + inside)
        if lack(middle) == 0.0:
            inside = middle
        else:
            outside = middle
    return inside


def _mended(
    design: MachineDesign, fault: Fault, faults: Faults, searches: dict[str, _Search]
) -> tuple[str, str]:
    """The first key that mends the fault, and what it may be: best without making a new one."""
    for key in fault.keys:
        if key not in searches:
            searches[key] = _Search(design, key, faults)
        now = faults(design, key)
        others = [one for one in now if one.identity != fault.identity]
        # Best a range that mends all faults that look to this key first, so that all findings on
        # a key state the same range.
        elsewhere = frozenset(one.identity for one in others if one.keys[0] != key)
        known = frozenset(one.identity for one in others)
        accepted = searches[key].accepted(elsewhere)
        if accepted is not None:
            return key, f"accepted {accepted}"
        accepted = searches[key].accepted(known) if elsewhere != known else None
        if accepted is not None:
            return key, f"accepted {accepted}{NOT_ENOUGH}"
    for key in fault.keys:
        accepted = searches[key].accepted(frozenset(), only=fault.identity)
        if accepted is not None:
            return key, f"accepted {accepted}{NOT_ENOUGH}"
    names = list(dict.fromkeys(key_name(key) for key in fault.keys))
    return fault.keys[0], f"no single value mends it, change several of {', '.join(names)}"


def _grid(domain: Domain) -> list[float]:
    # Quadratic: small values, as ribs and fillets have, lie closer. The first point stands for
    # the lower end of the domain.
    least = 0.0 if domain.is_low_accepted else (1e-3 / GRID) ** 2
    shares = [least] + [(k / GRID) ** 2 for k in range(1, GRID + 1)]
    return [domain.low + share * (domain.high - domain.low) for share in shares]


def _refined(values: list[float], lacks: list[float]) -> list[float]:
    """The values with more of them about the one that lacks least."""
    best = min(range(len(values)), key=lambda k: lacks[k])
    first, last = max(best - 1, 0), min(best + 1, len(values) - 1)
    step = (values[last] - values[first]) / REFINED
    between = [values[first] + step * k for k in range(1, REFINED)]
    return [*values[: first + 1], *between, *values[last:]]


def _range_text(
    domain: Domain, low: float | None, high: float | None, lack: Callable[[float], float]
) -> str | None:
    """The range in as few decimals as keep nine tenths of it; None if rounding leaves nothing."""
    if low is None and domain.is_low_accepted:
        low = domain.low
    if high is None and domain.has_limit:
        high = domain.high
    for decimals in range(2, MOST_DECIMALS + 1):
        scale = 10.0**decimals
        first = None if low is None else math.ceil(low * scale - ROUNDING) / scale
        last = None if high is None else math.floor(high * scale + ROUNDING) / scale
        if _width(first, last) < 0.9 * _width(low, high) < math.inf:
            continue
        if all(end is None or lack(end) == 0.0 for end in (first, last)):
            return _text(first, last, decimals)
    return None


def _width(low: float | None, high: float | None) -> float:
    return math.inf if low is None or high is None else high - low


def _text(first: float | None, last: float | None, decimals: int) -> str:
    low, high = (
        None if end is None else f"{end:.{decimals}f}".rstrip("0").rstrip(".")
        for end in (first, last)
    )
    if low is None:
        return "any positive value" if high is None else f"up to {high}"
    return f"{low} or more" if high is None else f"{low} to {high}"
