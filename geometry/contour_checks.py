"""Checks of a rim that is no circle: that it can be drawn, and that barriers stay below it.

Least sizes are common practice, no source: iron no narrower than the sheet is thick, radii no
smaller than half of it, edges no shorter than a tenth.
"""

import math

from .cut_outs import turned_edges
from .design import MachineDesign
from .design_details import ContourDesign
from .detail_sizes import MM, SLACK, Sizes, detail_pole, left
from .distances import distance
from .half_barrier import half_barrier
from .remedies import Fault, barrier_key
from .rotor import following, rim_of
from .rotor_contour import eccentric_half, step_turn
from .rotor_frame import rotor_frame
from .unlike_poles import of_both_halves

LEAST_TURN = 0.02  # of half the pole pitch, of each arc of an eccentric rim: below it has a corner
NEEDED = {
    "eccentric": ("q_axis_gap_mm",),
    "step": ("step_mm", "end_angle_deg", "step_radius_mm"),
}


def contour_faults(design: MachineDesign) -> list[Fault]:
    """Faults of the rim by itself; none for a round one."""
    contour = design.rotor.contour
    if contour is None:
        return []
    table = Sizes("rotor.contour", detail_pole(design))
    for name in sorted({*NEEDED["eccentric"], *NEEDED["step"]}):
        value = getattr(contour, name)
        if name in NEEDED[contour.kind] and value is None:
            text = f"{contour.kind} needs {name}"
            table.short(f"{name}_missing", ("kind",), text, 1.0, f"add {name}")
        elif name not in NEEDED[contour.kind]:
            other = "step" if contour.kind == "eccentric" else "eccentric"
            table.unwanted(value, name, "kind", other)
    if table.faults:
        return table.faults
    if contour.kind == "eccentric":
        _eccentric(table, contour, MM * design.rotor.gap_mm)
    else:
        _step(table, contour)
    return table.faults


def _eccentric(table: Sizes, contour: ContourDesign, gap: float) -> None:
    pole = table.pole
    assert contour.q_axis_gap_mm is not None
    lack = gap - MM * contour.q_axis_gap_mm
    text = f"less than the gap on the d axis ({gap / MM:g} mm)"
    table.short("q_gap_small", ("q_axis_gap_mm",), text, lack)
    if lack > SLACK:
        return
    q_radius = pole.rotor_radius + gap - MM * contour.q_axis_gap_mm
    flat = pole.rotor_radius * math.cos(pole.half_pitch)  # there the rim is a straight line
    text = "the rim would turn hollow or have a corner on the d axis"
    if q_radius - flat <= SLACK:
        table.short("rim_hollow", ("q_axis_gap_mm",), text, flat - q_radius + 2.0 * SLACK)
        return
    sweeps = [edge.sweep for edge in eccentric_half(pole.rotor_radius, q_radius, pole.half_pitch)]
    lack = LEAST_TURN * pole.half_pitch - min(sweeps)
    table.short("rim_hollow", ("q_axis_gap_mm",), text, lack)


def _step(table: Sizes, contour: ContourDesign) -> None:
    pole = table.pole
    assert contour.step_mm is not None
    assert contour.end_angle_deg is not None
    assert contour.step_radius_mm is not None
    step, radius = MM * contour.step_mm, MM * contour.step_radius_mm
    table.least("step_tight", "step_radius_mm", radius, pole.least_radius, "too tight to punch")
    text = "the transition's two arcs would turn back under themselves"
    table.short("step_high", ("step_radius_mm", "step_mm"), text, 0.5 * step - radius)
    inner = pole.rotor_radius - step
    web = inner - pole.shaft_radius
    table.short("step_deep", ("step_mm",), f"{left(web)} to the bore", pole.sheet - web)
    if radius > 0.25 * pole.rotor_radius:
        text = "wider than a quarter of the rotor's radius"
        table.short("step_wide", ("step_radius_mm",), text, radius - 0.25 * pole.rotor_radius)
    if table.faults:
        return
    turn, end = step_turn(pole.rotor_radius, inner, radius), math.radians(contour.end_angle_deg)
    least = pole.least_edge / pole.rotor_radius
    keys = ("end_angle_deg", "step_radius_mm")
    text = "the step's transition reaches the d axis"
    table.short("step_side", keys, text, end + 0.5 * turn + least - pole.half_pitch)
    text = "the step's transition reaches the q axis"
    table.short("step_axis", keys, text, least + 0.5 * turn - end)
    text = "the step is too low for arcs that a mesh could follow"
    table.short("step_low", ("step_mm", "step_radius_mm"), text, pole.least_edge - turn * inner)


def rim_faults(design: MachineDesign) -> list[Fault]:
    """Barriers that come closer to the rim than their tangential rib states."""
    return [] if design.rotor.contour is None else of_both_halves(design, _half_rim_faults)


def _half_rim_faults(design: MachineDesign) -> list[Fault]:
    rim = rim_of(design)
    if rim is None:
        return []
    frame, pole = rotor_frame(design), detail_pole(design)
    below = turned_edges(rim, -frame.q_axis)
    moved = following(design)
    faults = []
    for number, stated in enumerate(design.rotor.barrier, start=1):
        rib = MM * stated.tangential_rib_mm
        key = barrier_key(number, "tangential_rib_mm")
        if pole.sheet - rib > SLACK:
            text = f"thinner than the sheet ({pole.sheet / MM:g} mm)"
            faults.append(Fault("tangential_rib_thin", (key,), text, pole.sheet - rib))
            continue
        try:
            half = half_barrier(
                moved.rotor.barrier[number - 1], frame.rotor_radius, frame.pole_pairs
            )
        except ValueError:
            continue  # its own checks say why
        web = distance((*half.to_rim, *half.end), below)
        if rib - web > SLACK:
            text = f"{left(web)} between barrier and rim"
            keys = (*_rim_keys(design), barrier_key(number, "depth_mm"), key)
            faults.append(Fault("rim_close", keys, text, rib - web))
    return faults


def _rim_keys(design: MachineDesign) -> tuple[str, ...]:
    contour = design.rotor.contour
    name = "step_mm" if contour is not None and contour.kind == "step" else "q_axis_gap_mm"
    return (f"rotor.contour.{name}",)
