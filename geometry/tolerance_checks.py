"""Rules of the tolerances: what is stated together, and limits that leave something of the part."""

from collections import Counter
from collections.abc import Iterator

from .design import MachineDesign
from .errors import Finding

# Of the gap: beyond it a made machine is another one, and no line or parabola tells of it.
MOST_OF_GAP = 0.3
GAP_KEYS = ("cut_mm", "gap_mm", "bore_eccentricity_mm")


def tolerance_findings(design: MachineDesign) -> Iterator[Finding]:
    """What keeps the stated tolerances from being computed with."""
    tolerance, gap = design.tolerance, design.rotor.gap_mm
    for name in GAP_KEYS:
        # A default that is too wide is told by what uses it: other commands need none.
        value = getattr(tolerance, name)
        if name in tolerance.model_fields_set and value > MOST_OF_GAP * gap:
            fault = f"over {MOST_OF_GAP:g} of the gap of {gap:g} mm"
            remedy = f"accepted 0 to {MOST_OF_GAP * gap:.3g}"
            yield Finding("tolerance-gap", f"tolerance.{name}", value, fault, remedy)
    pair = {"edge_depth_mm": tolerance.edge_depth_mm}
    pair["edge_drop_percent"] = tolerance.edge_drop_percent
    missing = [name for name, value in pair.items() if value is None]
    if len(missing) == 1:
        (stated,) = pair.keys() - missing
        fault, remedy = "a spoilt edge needs depth and drop", f"accepted {missing[0]} beside it"
        yield Finding("tolerance-edge", f"tolerance.{stated}", pair[stated] or 0.0, fault, remedy)
    met = Counter(one.name for one in tolerance.key)
    for number, one in enumerate(tolerance.key, start=1):
        if met[one.name] > 1:
            key, fault = (
                f"tolerance.key[{number}].limit",
                f"{one.name} stands {met[one.name]} times",
            )
            yield Finding("tolerance-twice", key, one.limit, fault, "accepted once each")
