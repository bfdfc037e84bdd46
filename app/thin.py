"""The thinnest ribs of `ribs --thin`: the search, what it does to torque, and its files.

Torque is the mean at rated current and the angle of most torque, found anew for the thinned design;
the price of a rib is its adjoint slope there, so it holds for small changes of the found widths.
"""

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.first_source import relative_name
from lamwright.geometry.remedies import value_of
from lamwright.geometry.restated import restated
from lamwright.geometry.rib_groups import RibGroup
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.operating import mean_linkage_torque
from lamwright.postprocess.thin_ribs import ThinFigures, ThinRib, ThinTorque, thin_csv, thin_rows
from lamwright.solver.adjoint_field import OutlineSlope
from lamwright.solver.design_motion import draw_rotor, draw_stator, part_motion, size_motion
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.tolerance import ToleranceName, tolerance_settings

from .lamination import section_of
from .point import model_of
from .ribbed import Ribbed, RibChapter
from .slopes import loaded_fields, mean_of_fields, mean_slopes
from .thin_screen import THIN_TABLE
from .thin_search import Thinned, thinnest

CSV_FILE, DESIGN_FILE = "thin.csv", "thin.toml"

PRICE_STEP_MM = 0.1
USUAL_STEPS = 5  # of the search, for the share done
LEAST_FACTOR, MOST_FACTOR = 1.0, 5.0
CAUTION = (
    "the thinnest ribs hold the margin asked for and no more: what punch, burr or a worn tool take "
    "off a rib comes off the margin, so ask for a margin that has room for it"
)


def thinned_ribs(ribbed: Ribbed, rib_factor: float) -> Thinned:
    """The thinnest ribs that hold the margin asked for, within the phase that runs.

    Raises:
        DesignError: no widths hold; one line that names the rib.
        LamwrightError: ribs of this kind of rotor are not thinned.
    """
    machine = ribbed.machine
    if not LEAST_FACTOR <= rib_factor <= MOST_FACTOR:
        accepted = f"accepted {LEAST_FACTOR:g} to {MOST_FACTOR:g}"
        raise LamwrightError(f"--rib-factor = {rib_factor:g}: out of range; {accepted}")
    if machine.design.rotor.outline is not None:
        raise LamwrightError("--thin: a drawn rotor states no widths; accepted tables of barriers")
    if machine.magnet is not None:
        text = "the pull of magnets is not in this search yet; remove [magnet] and the magnets"
        raise LamwrightError(f"--thin: {text}")

    def told(count: int, misfit: float) -> None:
        ribbed.watch.within(min(1.0, count / USUAL_STEPS))

    return thinnest(machine, rib_factor, ribbed.settings, told)


def thin_chapter(
    thinned: Thinned, tolerance: ToleranceName, ribbed: Ribbed, stage: Path
) -> RibChapter:
    """Table, file of the thinned design, and what torque gains; for `ribs.json`."""
    machine = ribbed.machine
    found = replace(machine, design=thinned.after.design)
    mesh, _, _ = tolerance_settings(tolerance)
    before, _ = priced(machine, (), mesh)
    after, prices = priced(found, thinned.groups, mesh)
    lost = [group.label for group in thinned.groups if group.label not in prices]
    not_given = tuple(
        f"price of {label}: the outline is another one on both sides of it" for label in lost
    )
    ribs = thin_table(thinned, prices)
    write_text(stage / CSV_FILE, thin_csv(ribs))
    write_text(stage / DESIGN_FILE, thinned_text(machine, thinned, stage.parent))
    if ribbed.pictures:
        from lamwright.postprocess.figures_thin import write_thin_figure

        asked = machine.design.limits.least_yield_margin
        write_thin_figure(stage, machine.design.name, ribs, asked)
    figures = ThinFigures(steps=thinned.steps, yield_margin=min(rib.margin for rib in ribs))
    return RibChapter(
        (figures, ThinTorque(torque_before=before, torque=after)),
        cautions_of(machine.design),
        not_given,
        tables={THIN_TABLE: tuple(thin_rows(ribs))},
    )


def cautions_of(design: MachineDesign) -> tuple[str, ...]:
    """What a reader of the thinnest ribs should be wary of."""
    stated = [key for key, part in (("rotor.fit", design.rotor.fit), ("hot", design.hot)) if part]
    if not stated:
        return (CAUTION,)
    text = f"the thinnest ribs hold spin alone, with a free, cold bore: what {' and '.join(stated)}"
    return (CAUTION, f"{text} add is not in their margin; run ribs on {DESIGN_FILE} and see")


def thin_table(thinned: Thinned, prices: dict[str, float]) -> tuple[ThinRib, ...]:
    """The groups of ribs with their prices in N m by label."""
    return tuple(
        ThinRib(
            group=group,
            width_before=float(thinned.before.width[k]),
            width=float(thinned.after.width[k]),
            floor=thinned.floor,
            margin_before=float(thinned.before.margin[k]),
            margin=float(thinned.after.margin[k]),
            price=prices.get(group.label),
        )
        for k, group in enumerate(thinned.groups)
    )


def priced(
    machine: Machine, groups: Sequence[RibGroup], mesh: MeshSettings
) -> tuple[float, dict[str, float]]:
    """Mean torque in N m at rated current, and its change for 0.1 mm more of each group's ribs.

    Prices are by the groups' labels; one whose outline is another on both sides has none.
    """
    design, section = machine.design, section_of(machine)
    sector = mesh_section(section, mesh)
    model = model_of(machine, section, sector)
    (i_d, i_q), fields = loaded_fields(model, design)
    pole_pairs = design.pole_pairs
    psi_d, psi_q = mean_of_fields(design, fields)
    torque = mean_linkage_torque(pole_pairs, i_d, i_q, [psi_d], [psi_q])
    if not groups:
        return torque, {}
    rotor = part_motion(sector.rotor, design, draw_rotor)
    stator = part_motion(sector.stator, design, draw_stator)
    axes = mean_slopes(model, section, design, fields, (rotor, stator))

    def slope_by(key: str, axis: OutlineSlope) -> float:
        moves = [part.velocity(design, key) for part in (rotor, stator)]
        return axis.by_key(moves[0], moves[1], size_motion(design, key))

    prices = {}
    for group in groups:
        least = group.least_mm(design)
        steps = {key: PRICE_STEP_MM * value_of(design, key) / least for key in group.keys}
        try:
            d, q = (sum(step * slope_by(key, axis) for key, step in steps.items()) for axis in axes)
        except ValueError:
            continue
        prices[group.label] = mean_linkage_torque(pole_pairs, i_d, i_q, [d], [q])  # linear in both
    return torque, prices


def thinned_text(machine: Machine, thinned: Thinned, folder: Path) -> str:
    """The design file with the found widths; its comments stay, names count from `folder`."""
    design, path = thinned.after.design, machine.path
    values: dict[str, float | str] = {
        key: value_of(design, key) for group in thinned.groups for key in group.keys
    }
    for key, name in _names(machine.design).items():
        if not Path(name).is_absolute():
            values[key] = relative_name(path.parent / name, folder)
    duty = design.duty
    head = (
        f"# Ribs as thin as a yield margin of {design.limits.least_yield_margin:g} at "
        f"{duty.overspeed_factor * duty.maximum_speed_rpm:.0f} rpm allows, none below "
        f"{1e3 * thinned.floor:.3g} mm.\n"
        "# Rotors burst: nothing here replaces a qualified engineer's judgement and an overspeed "
        "test.\n"
    )
    return head + restated(path.read_text(encoding="utf-8"), values)


def _names(design: MachineDesign) -> dict[str, str]:
    """The files that a design names, by key."""
    names = {"steel.rotor_card": design.steel.rotor_card}
    names["steel.stator_card"] = design.steel.stator_card
    if design.magnet is not None:
        names["magnet.card"] = design.magnet.card
    drawing = getattr(design.stator, "outline_dxf", None)
    if drawing is not None:
        names["stator.outline_dxf"] = str(drawing)
    return names
