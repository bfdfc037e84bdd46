"""Slopes of the ribs' reported peak by the adjoint against laminations drawn and refined anew.

Outline, mesh and adaptive refinement are done again for each value of a key. Between two values
the mesher may change its mind, and the peak, the largest of nodal values, then jumps by 1e-4 to
2e-4 of itself (measured). So a slope is that of the straight line nearest to four values, as far
apart as the peak's curvature allows. What is left of the jumps does not shrink with the slope:
it is up to 0.06 MPa per 0.1 mm or degree. Of the largest change of all keys, that of the weakest
rib, this is 0.2 %, so slopes below a tenth of that change are held to the tenth's tolerance.
"""

import math

import numpy as np
import pytest
from shipped import shipped

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.remedies import value_of, with_value
from lamwright.postprocess.slopes import step_of
from lamwright.solver.adjoint_stress import peak_slope, spinning_pole
from lamwright.solver.design_motion import draw_lamination, part_motion, shape_keys
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.rotor_stress import StressSettings, elastic_material, rotor_stress

TWO = ("demo_24s4p_arc", "demo_36s4p_straight")  # tangential ribs alone, and all kinds of ribs
# A quarter of a verdict's tolerance: on the default's mesh slopes err by 1 to 3 %.
SETTINGS = StressSettings(tolerance=0.005, mesh=MeshSettings(scale=1.0))
# mm or degrees to either side; of a rib's width no more than a share, whose curvature adds 1 %.
REACH, MOST_OF_RIB = {"mm": 0.15, "deg": 1.0}, 0.1
# Of the reach; values nearer to the middle would hardly make the line's slope any surer.
PLACES = (-1.0, -0.8, 0.8, 1.0)
FLOOR = 0.1  # of the largest change
MOST = 0.02


class Spun:
    """A lamination whose reported peak can be differentiated and computed anew."""

    def __init__(self, name: str) -> None:
        """The shipped design `name` at its overspeed."""
        machine = shipped(name, 1.6).machine
        self.design, self.card = machine.design, machine.rotor_steel
        duty = self.design.duty
        self.speed = duty.overspeed_factor * duty.maximum_speed_rpm * math.pi / 30.0

    def keys(self) -> list[str]:
        """All that shape the lamination."""
        keys = [key for key in shape_keys(self.design) if not key.startswith("stator.")]
        keys.remove("rotor.sheet_thickness_mm")
        return ["stator.bore_diameter_mm", *keys]

    def by_difference(self, key: str) -> float:
        """Slope of the reported peak in Pa per unit of the key."""
        reach, value = REACH[step_of(key)[1]], value_of(self.design, key)
        if key.endswith("rib_mm"):
            reach = min(reach, MOST_OF_RIB * value)
        peaks = []
        for place in PLACES:
            section = cross_section(with_value(self.design, key, value + reach * place))
            peaks.append(rotor_stress(section, self.card, self.speed, SETTINGS).peak)
        return float(np.polyfit(PLACES, peaks, 1)[0]) / reach

    def by_adjoint(self) -> dict[str, float]:
        """Slopes of all keys, scaled from the smoothed peak to the reported one."""
        section = cross_section(self.design)
        solution = rotor_stress(section, self.card, self.speed, SETTINGS)
        pole = spinning_pole(section, solution.mesh, elastic_material(self.card), self.speed)
        found = peak_slope(pole, solution.displacement)
        part = part_motion(solution.mesh, self.design, draw_lamination)
        slope = part.extension.gathered(found.slope) / (1.0 + found.bias)
        return {k: float(np.sum(slope * part.velocity(self.design, k))) for k in self.keys()}


@pytest.mark.slow
@pytest.mark.parametrize("name", TWO)
def test_peak_slopes_are_those_of_the_remeshed_lamination(name):
    """Every key that shapes the lamination: 2 %; measured 1.3 and 1.4 %."""
    spun = Spun(name)
    exact = spun.by_adjoint()
    measured = {key: spun.by_difference(key) for key in exact}
    largest = max(step_of(key)[0] * abs(slope) for key, slope in measured.items())
    missed = {}
    for key, slope in measured.items():
        size = max(abs(slope), FLOOR * largest / step_of(key)[0])
        error = abs(exact[key] - slope) / size
        if error > MOST:
            missed[key] = error
    assert not missed
