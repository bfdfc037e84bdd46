"""The sources of spread that a design states, and one made machine of their deviations."""

import difflib
import re
from collections.abc import Sequence

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.spread import SpreadFigure, SpreadSource
from lamwright.solver.design_motion import MM, shape_keys
from lamwright.solver.made_machine import Deviation

ECCENTRIC = "bore_eccentricity_mm"
# Of the meshes that move, in the order of their motions: keys of the table, then single keys.
_MOVING = {"cut_mm": "cut edges of the rotor", "gap_mm": "stator bore's radius"}


def spread_figures(design: MachineDesign) -> tuple[SpreadFigure, ...]:
    """Torque, ripple, saliency, margin and growth with the design's limits, in their order."""
    limits = design.limits
    return (
        SpreadFigure("torque_nm", "torque, mean", "N m", limits.least_torque_nm),
        SpreadFigure(
            "torque_ripple_percent", "torque ripple", "%", limits.most_ripple_percent, False
        ),
        SpreadFigure("saliency_ratio", "saliency ratio", "", limits.least_saliency_ratio),
        SpreadFigure("yield_margin", "yield margin at overspeed", "", limits.least_yield_margin),
        SpreadFigure("radial_growth_um", "radial growth at overspeed", "um", None, False),
    )


def moving_keys(design: MachineDesign) -> tuple[str, ...]:
    """Sources that move an outline: `cut_mm`, `gap_mm`, then the design's own single keys.

    Raises:
        LamwrightError: a single key is no length or angle of the design.
    """
    known = shape_keys(design)
    for number, one in enumerate(design.tolerance.key, start=1):
        if one.name not in known:
            near = difflib.get_close_matches(one.name, known, n=1)
            hint = f"did you mean {near[0]}?" if near else f"accepted such as {known[0]}"
            fault = "no length or angle of this design"
            raise LamwrightError(f"tolerance.key[{number}].name = {one.name!r}: {fault}; {hint}")
    own = tuple(key for key in _MOVING if getattr(design.tolerance, key) > 0.0)
    return (*own, *(one.name for one in design.tolerance.key))


def spread_sources(design: MachineDesign) -> tuple[SpreadSource, ...]:
    """All sources with a limit above 0; those that move an outline first, as `moving_keys`."""
    tolerance = design.tolerance
    found = [
        SpreadSource(key, told, getattr(tolerance, key), "mm") for key, told in _MOVING.items()
    ]
    for one in tolerance.key:
        unit = "deg" if one.name.endswith("_deg") else "mm"
        found.append(SpreadSource(one.name, key_told(one.name), one.limit, unit))
    others = (
        ("stacking_factor", "stacking factor", ""),
        ("b_h_percent", "flux density of the steel", "%"),
        ("yield_percent", "yield strength", "%"),
        (ECCENTRIC, "eccentricity in the bore", "mm"),
    )
    found += [SpreadSource(key, told, getattr(tolerance, key), unit) for key, told, unit in others]
    if tolerance.edge_depth_mm is not None:
        scatter = tolerance.edge_depth_scatter_percent
        key = "edge_depth_scatter_percent"
        found.append(SpreadSource(key, "depth of the spoilt edge", scatter, "%"))
    return tuple(source for source in found if source.limit > 0.0)


def key_told(key: str) -> str:
    """A key in plain words: `barrier 2 end thickness`."""
    plain = re.sub(r"^(rotor|stator)\.|_(mm|deg)(?=\[|$)", "", key)
    return re.sub(r"[\[\]._]+", " ", plain).strip()


def deviation_of(
    design: MachineDesign, sources: Sequence[SpreadSource], deviations: Sequence[float]
) -> Deviation:
    """One made machine from deviations (n_source,) in units of the limits.

    An eccentric rotor is not in it: a sector cannot be solved with one.
    """
    amount = {s.key: u * s.limit for s, u in zip(sources, deviations, strict=True)}
    moved = tuple(amount[key] * (MM if key in _MOVING else 1.0) for key in moving_keys(design))
    depth = design.tolerance.edge_depth_mm or 0.0
    return Deviation(
        moved=moved,
        flux_share=1.0 + 0.01 * amount.get("b_h_percent", 0.0),
        stacking=amount.get("stacking_factor", 0.0),
        edge_depth=MM
        * depth
        * max(0.0, 1.0 + 0.01 * amount.get("edge_depth_scatter_percent", 0.0)),
        yield_share=1.0 + 0.01 * amount.get("yield_percent", 0.0),
    )
