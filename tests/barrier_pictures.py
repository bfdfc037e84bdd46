"""The pictures of geometry/README.md: `python -m tests.barrier_pictures` from the project's root.

One invented rotor a panel, checked and drawn like any design: half a pole for families and
thicknesses, one end much enlarged for the shapes of ends.
"""

import dataclasses
import math
from pathlib import Path

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import BarrierDesign, MachineDesign
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.figures_section import bare, draw_materials
from lamwright.postprocess.figures_style import Style, upright
from tests.outlines import plain_design

PICTURES = Path(__file__).parents[1] / "designs" / "pictures"
MM = 1e3  # mm per m
# Family: depths, thicknesses and end angles of three barriers.
SIZES = {
    "arc": ((3.4, 10.0, 18.0), (2.6, 3.2, 3.4), (16.0, 27.0, 38.5)),
    "straight": ((2.6, 8.6, 16.0), (2.6, 3.0, 3.2), (14.5, 25.5, 37.5)),
    "vee": ((4.0, 10.4, 18.2), (2.4, 2.8, 3.0), (12.0, 23.0, 35.0)),
    # About where asymptotes are the d axes, and where flux runs round the shaft of 13 mm radius.
    "hyperbolic": ((3.9, 9.6, 20.0), (2.6, 3.2, 3.4), (16.0, 27.0, 38.5)),
    "streamline": ((3.8, 9.3, 18.9), (2.6, 3.2, 3.4), (16.0, 27.0, 38.5)),
}
FIELDS = ("hyperbolic", "streamline")  # whose lines close up towards the rim
ARMS = (62.0, 54.0, 45.0)  # of the straight barriers
ENDS: dict[str, dict[str, object]] = {
    'end_shape = "round"': {},
    'end_shape = "flat"': {"end_shape": "flat", "end_fillet_mm": 0.6},
    '"flat", tangential_rib_inner_mm': {
        "end_shape": "flat",
        "end_fillet_mm": 0.6,
        "tangential_rib_inner_mm": 1.1,
    },
    'end_shape = "square"': {"end_shape": "square", "end_fillet_mm": 0.6},
}


def main() -> None:
    """Write both pictures."""
    PICTURES.mkdir(exist_ok=True)
    _write(families(), PICTURES / "barrier_families.png")
    _write(ends(), PICTURES / "barrier_ends.png")


def families() -> Figure:
    """Each family with one thickness, and thinning and thickening toward its ends."""
    figure = Figure(figsize=(11.0, 3.7))
    style = Style()
    rows = {"one thickness": 1.0, "end_thickness_mm": None}
    panels = figure.subplots(len(rows), len(SIZES))
    for axes, (name, share) in zip(panels, rows.items(), strict=True):
        for ax, family in zip(axes, SIZES, strict=True):
            shares = (share,) * 3 if share else (0.6, 0.7, 0.8 if family in FIELDS else 1.3)
            section = cross_section(_design(_barriers(family, shares)))
            _draw_rotor(ax, section, style)
            ax.set_title(f'"{family}", {name}' if share else name, fontsize=9)
    figure.subplots_adjust(0.01, 0.01, 0.99, 0.94, 0.04, 0.16)
    return figure


def ends() -> Figure:
    """One barrier's end in every shape, with the thinnest place of its rib."""
    figure = Figure(figsize=(11.0, 3.3))
    style = Style()
    for ax, (name, changes) in zip(figure.subplots(1, len(ENDS)), ENDS.items(), strict=True):
        base = _barriers("arc", (1.0,) * 3)[1].model_dump()
        barrier = BarrierDesign(
            **(base | {"thickness_mm": 4.0, "tangential_rib_mm": 0.7} | changes)
        )
        section = cross_section(_design((barrier,)))
        _draw_rotor(ax, section, style)
        rib = next(rib for rib in section.ribs if rib.name.endswith("left"))
        turn = upright(section)
        start, end = (MM * point * turn for point in (rib.start, rib.end))
        ax.plot([start.real, end.real], [start.imag, end.imag], color="crimson", lw=2.5, zorder=6)
        ax.set_xlim(start.real - 3.6, start.real + 4.2)
        ax.set_ylim(start.imag - 5.6, start.imag + 1.8)
        ax.set_title(name, fontsize=9)
    figure.subplots_adjust(0.01, 0.02, 0.99, 0.91, 0.04)
    return figure


def _barriers(family: str, shares: tuple[float, ...]) -> tuple[BarrierDesign, ...]:
    bend = {"bend_radius_mm": 1.6} if family in ("straight", "vee") else {}
    arms = ARMS if family == "straight" else (None,) * 3
    return tuple(
        BarrierDesign(
            shape=family,
            depth_mm=depth,
            thickness_mm=thickness,
            end_thickness_mm=None if share == 1.0 else thickness * share,
            end_angle_deg=angle,
            tangential_rib_mm=0.6,
            arm_angle_deg=arm,
            **bend,
        )
        for depth, thickness, angle, share, arm in zip(*SIZES[family], shares, arms, strict=True)
    )


def _design(barriers: tuple[BarrierDesign, ...]) -> MachineDesign:
    plain = plain_design()
    return plain.model_copy(update={"rotor": plain.rotor.model_copy(update={"barrier": barriers})})


def _draw_rotor(ax: Axes, section: CrossSection, style: Style) -> None:
    rotor = tuple(region for region in section.rotor if region.name != "gap_rotor")
    bare_rotor = dataclasses.replace(section, rotor=rotor, stator=())
    draw_materials(ax, bare_rotor, [upright(section)], style)
    radius = MM * section.rotor_radius
    wide = radius * math.sin(0.5 * math.pi / section.pole_pairs)
    ax.set_xlim(-1.02 * wide, 1.02 * wide)
    ax.set_ylim(0.2 * radius, 1.01 * radius)
    ax.set_aspect("equal")
    bare(ax)


def _write(figure: Figure, path: Path) -> None:
    figure.savefig(path, dpi=110, metadata={"Software": None}, pil_kwargs={"optimize": True})


if __name__ == "__main__":
    main()
