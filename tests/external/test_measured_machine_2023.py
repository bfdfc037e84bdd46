"""A machine that was built and measured, read from its two published drawings as they are.

Source: public repository Toroid-project/SynRM, 2023 (MIT), shipped in
`designs/measured/`: drawings in R12 without a unit, of loose lines and arcs; slots split into two
coil sides; B-H points; inductance between two terminals at 50 Hz, half its extremes L_d 8.1665 and
L_q 2.2505 mH per phase, end winding included, the current not stated. The other 2D solution quoted,
without end winding, has L_q 2.22 mH and L_d 9.11 mH at 7.5 A, and L_d 7.01 mH at 25 A.
"""

import math
from pathlib import Path

import numpy as np
import pytest

from lamwright.app.locked import locked_curves
from lamwright.app.point import model_of
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.winding import end_winding_inductance
from lamwright.postprocess.locked import feed_of, locked_angles
from lamwright.postprocess.locked_measured import NO_CURRENT, compared, read_measured
from lamwright.solver.field import solve_point
from lamwright.solver.mesh import mesh_section

DESIGN = Path(__file__).parent.parent.parent / "designs" / "measured" / "synrm_48s4p.toml"
SLOT_PITCH = math.radians(7.5)
POSITIONS = 4
MEASURED_D, MEASURED_Q = 8.1665e-3, 2.2505e-3  # H


@pytest.fixture(scope="module")
def machine():
    return read_machine(DESIGN)


def test_both_drawings_are_read_as_they_are(machine):
    """What the source states of the sheets: 240/170 mm, 48 slots, 2.3 mm mouths, R 84 mm.

    To the 0.05 mm of the drawing's own general tolerance where a digit is missing, else 1 um.
    """
    stator, rotor = machine.design.stator, machine.design.rotor
    assert (stator.slots, rotor.poles) == (48, 4)
    assert stator.outer_diameter_mm == pytest.approx(240.0, abs=1e-3)
    assert stator.bore_diameter_mm == pytest.approx(170.0, abs=1e-3)
    assert stator.slot_opening_mm == pytest.approx(2.3, abs=1e-3)
    assert stator.slot_depth_mm == pytest.approx(22.5, abs=0.05)
    assert rotor.gap_mm == pytest.approx(1.0, abs=1e-3)
    assert stator.outline is not None
    assert len(stator.outline.drawing.slot.copper) == 2
    assert rotor.outline is not None
    # Stated: d axes at 45 + 90 k degrees, so q axes at 90 k.
    assert math.degrees(rotor.outline.drawing.q_axis) == pytest.approx(0.0, abs=1e-6)
    assert rotor.outline.drawing.poles[0].air[0].name == "barrier_1"
    # The cut at the rim on the q axis is a notch, no barrier.
    assert {rib.barrier for rib in rotor.outline.drawing.poles[0].ribs} == {1, 2}


@pytest.fixture(scope="module")
def inductances(machine):
    """L_d at 7.5 A and 25 A, L_q at 7.5 A, without end winding: means over a slot pitch, H."""
    section = cross_section(machine.design)
    model = model_of(machine, section, mesh_section(section))
    means = []
    for i_d, i_q in ((7.5, 0.0), (25.0, 0.0), (0.0, 7.5)):
        found = []
        for k in range(POSITIONS):
            solution = solve_point(model, i_d, i_q, (k + 0.5) / POSITIONS * SLOT_PITCH)
            found.append(solution.psi_d / i_d if i_d else solution.psi_q / i_q)
        means.append(float(np.mean(found)))
    return means


@pytest.mark.slow
def test_inductances_are_those_measured(machine, inductances):
    """Tolerances as issued: L_q 8 %, L_d between its values at 7.5 and at 25 A.

    Found: L_q 2.32 mH (3 % high), of which 0.31 mH are the end winding by formula, whose length is
    assumed; L_d 9.23 and 7.21 mH.
    """
    low, high, q_axis = inductances
    end = end_winding_inductance(machine.design)
    assert q_axis + end == pytest.approx(MEASURED_Q, rel=0.08)
    assert high + end < MEASURED_D < low + end


@pytest.mark.slow
def test_l_d_is_that_of_another_2d_solution(inductances):
    """3 %: stack, stacking and extrapolation of the steel of that solution are not told.

    Found -2.0 and -1.5 %. Its L_q of 2.22 mH is 10 % over the 2.01 mH found here: not asserted, as
    the ribs then carry their flux beyond the last B-H point, 1.40 T, where every law goes its way.
    """
    low, high, _ = inductances
    assert low == pytest.approx(9.11e-3, rel=0.03)
    assert high == pytest.approx(7.01e-3, rel=0.03)


@pytest.mark.slow
def test_locked_rotor_reads_the_measured_inductance(machine, tmp_path):
    """All 72 measured positions against `locked`, two phases in series, as between two terminals.

    The current is not stated; the curve without current, that of a bridge, lies nearest: found
    L_d 3.4 % high, L_q 0.2 % low, 3.9 % of the greatest inductance rms. Held to 8 % as issued, and
    to 5 % rms: the end winding's length is assumed, and initial permeability is a card's first
    point. With 7.5 A the apparent L_d is 14 % high: the measured one is not that of rated flux.
    """
    section = cross_section(machine.design)
    feed, angles = feed_of("two-in-series"), locked_angles(2, 2, 5.0)
    curves = locked_curves(machine, section, feed, angles, (7.5,), tolerance="coarse")
    lines = (DESIGN.parent / "inductance_50hz.csv").read_text().split()[1:]
    table = tmp_path / "bench.csv"
    rows = [f",{position},{value}" for position, value in (line.split(",") for line in lines)]
    header = f"current_a,angle_mech_deg,{NO_CURRENT}"
    table.write_text("\n".join([header, *rows]))
    (measured,) = read_measured(table, (7.5,), zero_deg=-45.0)
    found = compared(curves, measured)
    assert len(found.measured.value) == 72
    assert 0.5 * found.computed.max() == pytest.approx(MEASURED_D, rel=0.08)
    assert 0.5 * found.computed.min() == pytest.approx(MEASURED_Q, rel=0.08)
    assert found.rms < 0.05 * found.measured.value.max()
    # Loaded, L_d lies to both sides of the measured one: as issued.
    end = end_winding_inductance(machine.design)
    assert 0.5 * curves.apparent.max() + end > MEASURED_D
