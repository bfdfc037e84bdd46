"""The figures: letters apart, axes equal, scales that cover the data, numbers as reported."""

import math
from itertools import combinations
from pathlib import Path

import matplotlib
import numpy as np
import pytest
from matplotlib.colors import to_rgb
from matplotlib.text import Text

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import Edge
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.palette import FILLS
from lamwright.geometry.winding import winding_table
from lamwright.postprocess import figures
from lamwright.postprocess.figures import FIGURES, Pictured, write_figures
from lamwright.postprocess.figures_field import PolePart, contour_triangles, lattice, pole_parts
from lamwright.postprocess.figures_stress import close_ups, mpa, stress_limit
from lamwright.postprocess.figures_style import (
    Style,
    flux_colours,
    inked,
    stress_colours,
)
from lamwright.postprocess.figures_torque import torque_text
from lamwright.postprocess.ribs import rib_report
from lamwright.postprocess.torque import TorqueWaveform, interpolant, ripple, spectrum
from lamwright.solver.field import magnetic_model, solve_point
from lamwright.solver.gap import rotor_place, sheared
from lamwright.solver.kernel import flux_state, quadrature
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.rotor_stress import StressSettings, rotor_stress
from lamwright.solver.steel import linear_law, reluctivity_law
from tests.random_designs import random_design

DESIGNS = Path(__file__).parents[2] / "designs"
STYLE = Style()
POSITION = math.radians(5.3)  # between two vertices of the circle: the gap is sheared


def waveform(pole_pairs):
    """An invented torque: mean 10.4 N m, 8 % of order 12, 3 % of order 24."""
    theta_e = np.linspace(0.0, math.pi / 3.0, 30, endpoint=False)
    torque = 10.4 + 0.8 * np.cos(12 * theta_e) + 0.3 * np.cos(24 * theta_e + 1.0)
    psi_d = np.full(30, 10.4 / (1.5 * pole_pairs * 9.0))
    zero = np.zeros(30)
    return TorqueWaveform(pole_pairs, 6.0, 9.0, theta_e, torque, psi_d, zero, zero)


def pictured(name):
    machine = read_machine(DESIGNS / name)
    design, section = machine.design, cross_section(machine.design)
    winding = winding_table(design)
    coarse = MeshSettings(scale=2.0)
    sector = mesh_section(section, coarse)
    factor = design.rotor.stacking_factor
    laws = [reluctivity_law(card, factor) for card in (machine.rotor_steel, machine.stator_steel)]
    model = magnetic_model(sector, section, winding, *laws)
    current = design.duty.rated_current_a
    solution = solve_point(model, 0.6 * current, 0.8 * current, POSITION)
    speed = design.duty.maximum_speed_rpm * 1.2 * math.pi / 30.0
    stress = rotor_stress(section, machine.rotor_steel, speed, StressSettings(tolerance=0.1))
    report = rib_report(stress, section, 1e6 * machine.rotor_steel.yield_strength_mpa.value)
    return Pictured(
        design.name,
        section,
        winding,
        sector,
        solution,
        waveform(design.pole_pairs),
        stress,
        report,
    )


@pytest.fixture(scope="module")
def results():
    """A design each: arc barriers with no radial rib, and straight ones with radial ribs."""
    return [pictured("demo_24s4p_arc.toml"), pictured("demo_36s4p_straight.toml")]


@pytest.fixture(scope="module")
def sheets(results):
    """All figures of each design, drawn once."""
    return [{name: composed(make, result) for name, make in FIGURES.items()} for result in results]


def composed(compose, result):
    figure = compose(result, STYLE)
    figure.canvas.draw()
    return figure


def words(figure):
    """Visible texts with their boxes in pixels."""
    found = [t for t in figure.findobj(Text) if t.get_visible() and t.get_text().strip()]
    return [(text.get_text(), text.get_window_extent()) for text in found]


def drawings(figure):
    """Axes that show a shape, told from charts and colour scales by their equal aspect."""
    return [ax for ax in figure.axes if ax.get_aspect() == 1.0]


def clashes(figure):
    """Pairs of texts that share pixels, and texts that leave the sheet."""
    width, height = figure.canvas.get_width_height()
    found = words(figure)
    out = [text for text, b in found if b.x0 < 0 or b.y0 < 0 or b.x1 > width or b.y1 > height]
    return out + [
        (one, other)
        for (one, a), (other, b) in combinations(found, 2)
        if a.x0 < b.x1 and b.x0 < a.x1 and a.y0 < b.y1 and b.y0 < a.y1
    ]


@pytest.mark.parametrize("name", FIGURES)
def test_no_two_texts_overlap_and_none_leaves_the_sheet(sheets, name):
    """Boxes of ink, no tolerance: letters that touch cannot be read."""
    for sheet in sheets:
        assert clashes(sheet[name]) == []


@pytest.mark.parametrize("seed", range(4))
def test_names_of_any_machine_stand_apart(results, seed):
    """4 to 8 poles, 1 to 6 barriers with 0 to 2 radial ribs, up to 96 slots (40 were looked at)."""
    section = cross_section(random_design(np.random.default_rng(seed)))
    result = Pictured("random", section, *[getattr(results[0], f) for f in LATER_FIELDS])
    assert clashes(composed(FIGURES["section"], result)) == []


LATER_FIELDS = ("winding", "sector", "solution", "waveform", "stress", "ribs")


@pytest.mark.parametrize("name", ["section", "flux", "stress"])
def test_a_mm_is_as_long_across_as_upright(sheets, name):
    """Pixels per mm both ways, to rounding: a round bore must be round on paper."""
    found = drawings(sheets[0][name])
    assert len(found) == {"section": 2, "flux": 1, "stress": 3}[name]
    for ax in found:
        box = ax.get_window_extent()
        across = box.width / np.ptp(ax.get_xlim())
        assert across == pytest.approx(box.height / np.ptp(ax.get_ylim()), rel=1e-9)


def test_colour_scales_carry_their_unit_and_cover_the_data(results, sheets):
    """The largest |B| at quadrature points, found by the kernel, and the largest nodal stress."""
    for result, sheet in zip(results, sheets, strict=True):
        flux = sheet["flux"].axes[1]
        assert flux.get_ylabel() == "flux density |B| in T"
        assert flux.get_ylim()[0] == 0.0
        sector, section, solution = result.sector, result.section, result.solution
        place = rotor_place(sector, result.winding.axis_a + solution.position)
        radii = section.rotor_radius, section.circle_radius
        rotor_nodes = sheared(sector.rotor.nodes, place.rest, *radii)
        for nodes, mesh, a in (
            (rotor_nodes, sector.rotor, solution.a_rotor),
            (sector.stator.nodes, sector.stator, solution.a_stator),
        ):
            quad = quadrature(nodes, mesh.elements, 6)
            grad = flux_state(quad, a[mesh.elements], linear_law(1.0)).grad_a
            assert np.hypot(grad[..., 0], grad[..., 1]).max() <= flux.get_ylim()[1]
        stress = sheet["stress"].axes[1]
        assert stress.get_ylabel() == "von Mises stress in MPa"
        assert stress.get_ylim()[0] == 0.0
        assert 1e-6 * result.stress.von_mises.max() <= stress.get_ylim()[1]


def test_fields_span_no_more_than_their_scale(sheets):
    """Every coloured mesh of a figure uses the limits of the figure's scale."""
    for name in ("flux", "stress"):
        figure = sheets[0][name]
        scale = figure.axes[1].get_ylim()
        meshes = [
            mesh
            for ax in drawings(figure)
            for mesh in ax.collections
            if type(mesh).__name__ == "TriMesh"
        ]
        assert len(meshes) >= 2
        for mesh in meshes:
            assert mesh.get_clim() == pytest.approx(scale)
            assert mesh.get_array().max() <= scale[1]


def test_labels_tell_the_numbers_of_the_reports(results, sheets):
    """Rib widths in mm, rib peaks in MPa, torque in N m and ripple in percent."""
    for result, sheet in zip(results, sheets, strict=True):
        section = [text for text, _ in words(sheet["section"])]
        stress = [text for text, _ in words(sheet["stress"])]
        names = [row.rib.name for row in result.ribs.ribs]
        for row in result.ribs.ribs:
            name = f"{row.rib.kind} rib {row.rib.barrier}"
            assert f"{name}, {1e3 * row.rib.width:.2f} mm" in section
            # Radial ribs of one barrier are told apart by their letters.
            many = f"radial_{row.rib.barrier}_b" in names and row.rib.kind == "radial"
            letter = row.rib.name[-1] if many else ""
            assert f"{name}{letter}: {mpa(row.peak)}" in stress
            assert float(mpa(row.peak).removesuffix(" MPa")) == pytest.approx(
                1e-6 * row.peak, rel=5e-3
            )
        for row in close_ups(result.ribs):
            assert any(f"peak {mpa(row.peak)}" in text for text in stress)
        curve = interpolant(result.waveform.torque)
        torque = "\n".join(text for text, _ in words(sheet["torque"]))
        for name, value in (("max", curve.max()), ("min", curve.min()), ("mean", 10.4)):
            assert f"{name} {torque_text(value, curve.max())}" in torque
        assert f"ripple {100.0 * ripple(result.waveform):.1f} %" in torque
        for amplitude in spectrum(result.waveform).amplitude:
            assert f"{amplitude:.3f}" in torque


def test_every_named_part_is_on_the_section(results, sheets):
    """The trade's names, each barrier and rib with its own."""
    for result, sheet in zip(results, sheets, strict=True):
        found = {text.split(",")[0] for text, _ in words(sheet["section"])}
        names = {"stator yoke", "tooth", "slot", "slot opening", "air gap", "shaft bore"}
        names |= {"flux carrier", "d axis", "q axis"}
        names |= {f"flux barrier {rib.barrier}" for rib in result.section.ribs}
        names |= {f"{rib.kind} rib {rib.barrier}" for rib in result.section.ribs}
        assert names <= found


def test_the_most_stressed_rib_is_shown_close_up(results, sheets):
    """The rib is at least a tenth of its picture wide: 0.6 mm are then 45 pixels, not 8."""
    for result, sheet in zip(results, sheets, strict=True):
        rows = close_ups(result.ribs)
        assert rows[0].peak == max(row.peak for row in result.ribs.ribs)
        for ax, row in zip(drawings(sheet["stress"])[1:], rows, strict=True):
            assert 1e3 * row.rib.width > 0.1 * np.ptp(ax.get_xlim())


def test_flux_lines_run_through_the_turning_circle(results):
    """A_z and places agree on both sides of the circle: continuity and antiperiodicity.

    Places to 1 pm of rounding; potentials to 1e-9 of the largest, as both sides are one unknown.
    """
    for result in results:
        section, winding = result.section, result.winding
        angle = winding.axis_a + result.solution.position
        stator, *rotor = pole_parts(section, result.sector, result.solution, angle)
        radius = 1e3 * section.circle_radius
        met = 0
        for part in rotor:
            used = np.unique(part.elements)
            z = part.nodes[used] @ [1.0, 1.0j]
            s = stator.nodes @ [1.0, 1.0j]
            on_rotor = used[np.abs(np.abs(z) - radius) < 1e-6]
            on_stator = np.flatnonzero(np.abs(np.abs(s) - radius) < 1e-6)
            away = np.abs((part.nodes[on_rotor] @ [1.0, 1.0j])[:, None] - s[on_stator])
            pair, same = np.nonzero(away < 1e-9)
            most = np.abs(stator.potential).max()
            difference = part.potential[on_rotor[pair]] - stator.potential[on_stator[same]]
            assert np.abs(difference).max() < 1e-9 * most
            met += len(pair)
        # Every node of the sector's arc, one node of each seam twice.
        assert met >= 2 * result.sector.n_circle + 1


def test_flux_lines_are_drawn_in_all_of_the_potential():
    """Pieces tile the element, finer in a large one, and carry its potential x^2 + y exactly."""
    places, pieces = lattice(4)
    corners = places[pieces]
    a, b = corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]
    assert 0.5 * (a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0]) == pytest.approx(np.full(16, 1.0 / 32.0))
    nodes = np.array([[0.0, 0.0], [2.0, 0.0], [0.0, 1.0], [1.0, 0.0], [1.0, 0.5], [0.0, 0.5]])
    potential = nodes[:, 0] ** 2 + nodes[:, 1]
    part = PolePart(nodes, np.arange(6)[None], potential, np.zeros((1, 3)))
    for coarse, count in ((10.0, 4), (0.1, 16)):
        at, values, triangles = contour_triangles(part, coarse)
        assert len(triangles) == count
        assert values == pytest.approx(at[:, 0] ** 2 + at[:, 1])


def test_written_twice_the_bytes_are_the_same(results, tmp_path):
    """No date, no random name, no path: what does not change is not a change."""
    first = write_figures(tmp_path, results[0])
    assert [path.name for path in first] == [f"{n}.{e}" for n in FIGURES for e in ("png", "svg")]
    before = [path.read_bytes() for path in first]
    (tmp_path / "again").mkdir()
    again = write_figures(tmp_path / "again", results[0])
    assert [path.read_bytes() for path in again] == before
    assert sorted(tmp_path.glob("*")) == sorted([*first, tmp_path / "again"])  # no left-overs
    for path in first:
        assert str(tmp_path).encode() not in path.read_bytes()
    svg = first[1].read_text()
    assert "tangential rib 1" in svg  # letters stay letters
    assert "<dc:date>" not in svg


def test_users_settings_neither_change_a_figure_nor_are_changed(results, tmp_path, monkeypatch):
    """The same bytes under a dark style and another font size, which are still set afterwards."""
    monkeypatch.setattr(figures, "FIGURES", {"torque": FIGURES["torque"]})
    plain = [path.read_bytes() for path in write_figures(tmp_path, results[0])]
    odd = {"axes.facecolor": "black", "font.size": 23.0, "text.color": "red"}
    with matplotlib.rc_context(odd):
        styled = [path.read_bytes() for path in write_figures(tmp_path, results[0])]
        assert matplotlib.rcParams["font.size"] == 23.0
    assert styled == plain


def test_a_figure_that_fails_leaves_the_old_file_whole(results, tmp_path, monkeypatch):
    """A rename is all or nothing; a temporary file does not stay behind."""
    (tmp_path / "torque.png").write_bytes(b"old")

    def half(figure, path, style):
        path.write_bytes(b"half a pict")
        raise OSError("disk full")

    monkeypatch.setattr(figures, "_write_png", half)
    monkeypatch.setattr(figures, "FIGURES", {"torque": FIGURES["torque"]})
    with pytest.raises(OSError, match="disk full"):
        write_figures(tmp_path, results[0])
    assert [path.name for path in tmp_path.iterdir()] == ["torque.png"]
    assert (tmp_path / "torque.png").read_bytes() == b"old"


def lightness(colour):
    """CIE L* of an sRGB colour, IEC 61966-2-1 and CIE 1976 (from memory)."""
    rgb = np.array(to_rgb(colour))
    linear = np.where(rgb <= 0.04045, rgb / 12.92, ((rgb + 0.055) / 1.055) ** 2.4)
    y = float(linear @ [0.2126, 0.7152, 0.0722])
    return 116.0 * y ** (1.0 / 3.0) - 16.0 if y > 0.008856 else 903.3 * y


def test_materials_and_scales_tell_apart_in_grey():
    """Neighbours differ by 10 of L* (a plainly visible step); scales darken all the way."""
    levels = sorted(lightness(colour) for colour in FILLS.values())
    assert np.diff(levels).min() > 10.0
    for colours in (flux_colours(), stress_colours()):
        steps = np.diff([lightness(colours(x)[:3]) for x in np.linspace(0.0, 1.0, 64)])
        assert steps.max() < 0.0


@pytest.mark.parametrize("bulge", [0.01, -0.4, 1.0, -2.0])
def test_inked_arcs_are_round(bulge):
    """Curves stay within 1e-6 of the radius: cubics of 30 degrees err by 4e-7 (derived)."""
    edge = Edge(0.01 + 0.002j, 0.03 - 0.01j, bulge)
    path = inked([[edge]], [1.0], closed=False)
    assert path.vertices[0] @ [1.0, 1.0j] == pytest.approx(1e3 * edge.start)
    assert path.vertices[-1] @ [1.0, 1.0j] == pytest.approx(1e3 * edge.end)
    for curve, code in path.iter_bezier():
        if code == path.MOVETO:
            continue
        at = np.array([curve(t) for t in np.linspace(0.0, 1.0, 21)]) @ [1.0, 1.0j]
        away = np.abs(np.abs(at - 1e3 * edge.centre) / (1e3 * edge.radius) - 1.0)
        assert away.max() < 1e-6


def test_stress_scale_ends_on_a_round_number(results):
    """The limit is the peak rounded up by less than a tenth of its leading decade."""
    for result in results:
        limit, peak = stress_limit(result.stress), 1e-6 * result.stress.peak
        step = 10.0 ** math.floor(math.log10(peak)) / 10.0
        assert peak <= limit < peak + step
        assert limit / step == pytest.approx(round(limit / step))
