"""The pictures of designs/gallery and its README: `python -m tests.gallery_pictures [NAME ...]`.

To be run from the project's root. Each design's cross-section as `lamwright assess` draws it, and
one line on what it shows, which is the design's note.
"""

import sys
from collections.abc import Callable, Iterable
from pathlib import Path

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from PIL import Image

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design import BarrierDesign, MachineDesign
from lamwright.geometry.design_file import read_machine
from lamwright.postprocess.figures import section_figure
from lamwright.postprocess.figures_style import Style

GALLERY = Path(__file__).parents[1] / "designs" / "gallery"
DESIGNS = sorted(GALLERY.glob("*.toml"))
WIDTH = 900  # pixels
INCHES = 11.0  # of a section figure
COLOURS = 64  # of the palette: a third of the bytes, letters as clear
INVENTED = "invented: "  # how every note begins

INTRODUCTION = """# Gallery

Rotors of every kind that Lamwright draws, on stators of every kind. All data are invented, but for
the stator of `retrofit_48s4p`, which is the measured one of `designs/measured`. Each passes
`lamwright assess`: its limits lie about a tenth from the figures found, and every rib keeps a yield
margin of at least 1.2 at overspeed. Files are called by their slots (s) and poles (p).

"""
HEAD = "| design | bore, mm | poles | slots | slot | barriers | ends | radial ribs | besides |"


def main(names: Iterable[str]) -> None:
    """Write the pictures of the designs called `names`, or of all, and the README."""
    wanted = set(names)
    for path in DESIGNS:
        if not wanted or path.stem in wanted:
            _write_picture(path)
    (GALLERY / "README.md").write_text(readme(), encoding="utf-8")


def readme() -> str:
    """The text of the README, from the design files."""
    machines = [(path.stem, read_machine(path).design) for path in DESIGNS]
    rows = [HEAD, "|" + "---|" * (HEAD.count("|") - 1)]
    rows += [_row(stem, design) for stem, design in machines]
    return INTRODUCTION + "\n".join(rows) + "\n\n" + "\n".join(_entry(*one) for one in machines)


def _entry(stem: str, design: MachineDesign) -> str:
    line = design.note.removeprefix(INVENTED)
    line = line[0].upper() + line[1:]
    return f"## {design.name}\n\n`{stem}.toml`: {line}.\n\n![{design.name}](pictures/{stem}.png)\n"


def _row(stem: str, design: MachineDesign) -> str:
    stator, rotor = design.stator, design.rotor
    barriers = (*rotor.barrier, *rotor.alternate_barrier)
    sides = f"{stator.slot_mouth}, {stator.slot_sides}, {stator.slot_bottom}".replace("_", " ")
    ribs = sorted({barrier.radial_ribs for barrier in barriers})
    cells = (
        f"`{stem}`",
        f"{stator.bore_diameter_mm:g}",
        f"{rotor.poles}",
        f"{stator.slots}",
        "from a DXF" if stator.outline_dxf else sides,
        _kinds(barriers, lambda barrier: barrier.shape),
        _kinds(barriers, lambda barrier: barrier.end_shape),
        ", ".join("none" if count == 0 else str(count) for count in ribs),
        ", ".join(specials(design)),
    )
    return f"| {' | '.join(cells)} |"


def _kinds(barriers: Iterable[BarrierDesign], of: Callable[[BarrierDesign], str]) -> str:
    return ", ".join(sorted({of(barrier) for barrier in barriers}))


def specials(design: MachineDesign) -> list[str]:
    """What a design has beyond barriers, ends and radial ribs, in words."""
    rotor, barriers = design.rotor, (*design.rotor.barrier, *design.rotor.alternate_barrier)
    holes = rotor.hole
    found = {
        "thinning barriers": any(
            b.end_thickness_mm not in (None, b.thickness_mm) for b in barriers
        ),
        "ribs thicker inward": any(b.tangential_rib_inner_mm is not None for b in barriers),
        "inclined ribs": any(b.radial_rib_tilt_deg != 0.0 for b in barriers),
        "unlike halves": any(b.other_half is not None for b in barriers),
        "unlike poles": bool(rotor.alternate_barrier),
        "skew": rotor.skew_steps > 1,
        "notches": bool(rotor.notch),
        "holes": any(hole.material == "air" and hole.span_deg is None for hole in holes),
        "slotted holes": any(hole.span_deg is not None for hole in holes),
        "rivets": any(hole.material == "rivet" for hole in holes),
        "keyways": rotor.keyway is not None and rotor.keyway.kind == "keyway",
        "dog-bone keys": rotor.keyway is not None and rotor.keyway.kind == "dog_bone",
        "eccentric rim": rotor.contour is not None and rotor.contour.kind == "eccentric",
        "stepped rim": rotor.contour is not None and rotor.contour.kind == "step",
        "tooth coils": design.winding.coil_span_slots == 1,
        "fractional slots": design.stator.slots % (3 * rotor.poles) != 0,
    }
    if design.magnet is not None:
        card = Path(design.magnet.card).stem.removeprefix("demo_").replace("_", "-")
        found[f"{card} magnets"] = True
    return [words for words, is_so in found.items() if is_so]


def _write_picture(path: Path) -> None:
    design = read_machine(path).design
    figure = section_figure(design.name, cross_section(design), Style(dpi=WIDTH / INCHES))
    target = GALLERY / "pictures" / f"{path.stem}.png"
    target.parent.mkdir(exist_ok=True)
    _pixels(figure).save(target, optimize=True)


def _pixels(figure: Figure) -> Image.Image:
    canvas = FigureCanvasAgg(figure)
    canvas.draw()
    image = Image.fromarray(np.asarray(canvas.buffer_rgba()))
    return image.convert("RGB").quantize(COLOURS, dither=Image.Dither.NONE)


if __name__ == "__main__":
    main(sys.argv[1:])
