"""The field on a mesh with 16 times the elements: every triangle of a model's mesh cut twice.

Nested and on the true arcs (`solver.estimate_mesh`), so all sizes are a quarter, which a mesh of a
quarter of the scale is not: where growth and steps along arcs rule, it has fewer elements.
"""

from dataclasses import replace

import numpy as np

from lamwright.geometry.section import CrossSection
from lamwright.geometry.winding import WindingTable
from lamwright.solver.estimate_mesh import quartered_sector
from lamwright.solver.field import MagneticModel, magnetic_model, solve_point
from lamwright.solver.types import FieldSolution


class Sixteenfold:
    """A model with 16 times the elements of another one."""

    def __init__(self, model: MagneticModel, section: CrossSection, winding: WindingTable) -> None:
        """Cut the mesh of `model` twice."""
        sector, self._carries = model.sector, []
        for _ in range(2):
            sector, rotor, stator = quartered_sector(sector, section)
            self._carries.append((rotor.carry, stator.carry))
        laws = model.iron.rotor_law, model.iron.stator_law
        self.model = magnetic_model(sector, section, winding, *laws, model.settings)

    def solved(self, coarse: FieldSolution) -> FieldSolution:
        """The field at the point of a coarse solution, which is where the iteration begins."""
        a_rotor, a_stator = coarse.a_rotor, coarse.a_stator
        for rotor, stator in self._carries:
            a_rotor, a_stator = np.asarray(rotor @ a_rotor), np.asarray(stator @ a_stator)
        start = replace(coarse, a_rotor=a_rotor, a_stator=a_stator, corner_a=None)
        return solve_point(self.model, coarse.i_d, coarse.i_q, coarse.position, start)
