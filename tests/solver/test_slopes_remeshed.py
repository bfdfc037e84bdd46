"""Slopes by the adjoint against differences of the whole computation: other design, other mesh.

Everything is done again for each value of a key: outline, sizes, mesh, solution. Between two
designs the mesher may change its mind, and then a figure jumps: psi_d by 1e-6 and psi_q by 1e-5
(measured), which puts a difference off by the jump over its step. Steps are therefore as wide as
the figures' curvature allows, and the field's mesh is finer than usual. A step may cross a limit
of the checks, which say what can be punched: outlines are drawn without them.
What is left of the jumps does not shrink with the slope, so where a figure hardly depends on a key
the error is measured by a share of the largest change among all keys per 0.1 mm or degree.
"""

import math
from collections.abc import Sequence
from unittest.mock import patch

import numpy as np
import pytest
from shipped import Shipped, shipped, shipped_model

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.remedies import value_of, with_value
from lamwright.postprocess.operating import search_positions
from lamwright.postprocess.slopes import key_slope, shape_figures, step_of
from lamwright.solver.adjoint_field import linkage_slopes, mean_of, on_outline
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.design_motion import (
    draw_rotor,
    draw_stator,
    part_motion,
    shape_keys,
    size_motion,
)
from lamwright.solver.field import MagneticModel, magnetic_model
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.types import FieldSolution

# Design: current angle in degrees near that of most torque, and which of a verdict's positions are
# taken, every one or every second: the slope of a mean is exact over any of them.
TWO = {"demo_24s4p_arc": (58.0, 1), "demo_36s4p_straight": (60.0, 2)}
SCALE = 0.5  # at 0.7 the corner radius of the slots is off by 1.3 %, at 0.5 by 0.4 %
FIELD_STEP = 0.05  # mm; four times as many degrees
FIELD_FLOOR = 0.02  # of the largest change


def error(
    exact: np.ndarray, measured: np.ndarray, keys: Sequence[str], floor: float
) -> dict[str, float]:
    """Error of each key's slopes (n_key, n) of one figure, or of one with several components.

    Relative to the slope, or to the share `floor` of the largest change of all keys.
    """
    steps = np.array([step_of(key)[0] for key in keys])
    size = np.linalg.norm(measured, axis=1)
    least = floor * (steps * size).max() / steps
    found = np.linalg.norm(exact - measured, axis=1) / np.maximum(size, least)
    return dict(zip(keys, found.tolist(), strict=True))


class Loaded:
    """A machine at rated current whose mean linkages can be differentiated and remeshed."""

    def __init__(self, name: str, gamma_deg: float, every: int) -> None:
        """The shipped design `name` at every so many positions."""
        self.one: Shipped = shipped(name, SCALE)
        self.model = shipped_model(name, SCALE, 1e-8)
        self.design = self.one.machine.design
        slots = self.design.stator.slots
        self.positions = search_positions(self.design.pole_pairs, slots)[::every]
        gamma = math.radians(gamma_deg)
        self.currents = self.one.rated * math.cos(gamma), self.one.rated * math.sin(gamma)

    def linkages(self, model: MagneticModel) -> np.ndarray:
        """Mean psi_d and psi_q over the positions."""
        fields = self.fields(model)
        return np.mean([(field.psi_d, field.psi_q) for field in fields], axis=0)

    def fields(self, model: MagneticModel) -> tuple[FieldSolution, ...]:
        """The solutions at the positions."""
        points = [OperatingPoint(*self.currents, float(p)) for p in self.positions]
        return solve_chain(model, points)

    def remeshed(self, key: str, change: float) -> np.ndarray:
        """The same of the design with another value at a key, from its outline on."""
        changed = with_value(self.design, key, value_of(self.design, key) + change)
        with patch("lamwright.geometry.cross_section.check_design", return_value=()):
            section = cross_section(changed)
        sector = mesh_section(section, MeshSettings(scale=SCALE))
        laws = self.model.iron.rotor_law, self.model.iron.stator_law
        settings = self.model.settings
        return self.linkages(magnetic_model(sector, section, self.one.winding, *laws, settings))

    def by_difference(self, key: str) -> np.ndarray:
        """Slopes (2,) of the mean linkages."""
        step = FIELD_STEP * (1.0 if key.endswith("_mm") else 4.0)
        return (self.remeshed(key, step) - self.remeshed(key, -step)) / (2.0 * step)

    def by_adjoint(self, keys: Sequence[str]) -> np.ndarray:
        """Slopes (n_key, 2) of the mean linkages."""
        fields = self.fields(self.model)
        winding, section = self.one.winding, self.one.section
        pairs = [linkage_slopes(self.model, section, winding, field) for field in fields]
        parts = (
            part_motion(self.one.sector.rotor, self.design, draw_rotor),
            part_motion(self.one.sector.stator, self.design, draw_stator),
        )
        slopes = [on_outline(mean_of([pair[k] for pair in pairs]), *parts) for k in (0, 1)]
        moves = [[part.velocity(self.design, key) for part in parts] for key in keys]
        sizes = [size_motion(self.design, key) for key in keys]
        return np.array(
            [[s.by_key(*m, size) for s in slopes] for m, size in zip(moves, sizes, strict=True)]
        )

    def figures(self, keys: Sequence[str], linkages: np.ndarray) -> np.ndarray:
        """Slopes (n_key, 4) of psi_d, psi_q, mean torque and saliency from those of linkages."""
        psi = dict(zip(("psi_d", "psi_q"), self.linkages(self.model), strict=True))
        pole_pairs = self.design.pole_pairs
        at = shape_figures(pole_pairs, *self.currents, **psi, rib_peak=1.0)
        rows = []
        for key, (psi_d, psi_q) in zip(keys, linkages, strict=True):
            slopes = {"psi_d": float(psi_d), "psi_q": float(psi_q), "rib_peak": 0.0}
            row = key_slope(key, 0.0, pole_pairs, self.currents, at, slopes)
            change = row.change
            by_step = (change.psi_d, change.psi_q, change.torque, change.saliency)
            rows.append([value / row.step for value in by_step])
        return np.array(rows)


@pytest.mark.slow
@pytest.mark.parametrize("name", TWO)
def test_field_slopes_are_those_of_the_remeshed_machine(name):
    """Every key; the linkages as one vector (psi_d, psi_q), mean torque, saliency: 1 %.

    psi_q alone hardly depends on many keys; the saliency, its ratio to psi_d, holds it.
    """
    loaded = Loaded(name, *TWO[name])
    keys = shape_keys(loaded.design)
    by_difference = np.array([loaded.by_difference(key) for key in keys])
    exact = loaded.figures(keys, loaded.by_adjoint(keys))
    measured = loaded.figures(keys, by_difference)
    for figure in (slice(0, 2), slice(2, 3), slice(3, 4)):
        found = error(exact[:, figure], measured[:, figure], keys, FIELD_FLOOR)
        assert max(found.values()) < 0.01, found
