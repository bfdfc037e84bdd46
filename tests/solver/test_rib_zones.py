"""Which nodes belong to which rib."""

import math

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.section import CrossSection
from lamwright.solver.mesh import mesh_lamination
from lamwright.solver.rib_zones import distance_to, rib_reach, zone_of_node
from tests.outlines import b1_design, plain_design


@pytest.fixture(scope="module", params=["b1", "ribbed"])
def section(request: pytest.FixtureRequest) -> CrossSection:
    """B1, and B1 with a radial rib of 1 mm and fillets of 0.5 mm."""
    design = b1_design()
    if request.param == "ribbed":
        barrier = design.rotor.barrier[0].model_copy(
            update={"radial_ribs": 1, "radial_rib_mm": 1.0, "fillet_mm": 0.5}
        )
        rotor = design.rotor.model_copy(update={"barrier": (barrier,)})
        design = design.model_copy(update={"rotor": rotor})
    return cross_section(design)


def test_reach_covers_caps_and_fillets(section: CrossSection):
    """A tangential rib's zone takes the whole cap, a radial one's its sides and fillets.

    Cap of 2.5 mm: from its point by the rim to its ends, chords of at most 2 r. Rib 5 mm long:
    half of it, and round the fillet.
    """
    for rib in section.ribs:
        reach = rib_reach(section, rib)
        if rib.kind == "tangential":
            assert 2.5e-3 * math.sqrt(2.0) - 1e-6 <= reach <= 5e-3
        else:
            assert 2e-3 <= reach <= 3.6e-3


def test_zones_meet_their_ribs_and_leave_the_bore(section: CrossSection):
    """A rib's ends are in its own zone; the bore and the rim on the d axis in none."""
    mesh = mesh_lamination(section)
    zone = zone_of_node(section, mesh)
    z = mesh.nodes @ np.array([1.0, 1.0j])
    for k, rib in enumerate(section.ribs):
        for end in (rib.start, rib.end):
            assert zone[np.argmin(np.abs(z - end))] == k
        assert np.all(distance_to(rib, z[zone == k]) <= rib_reach(section, rib))
    rest = len(section.ribs)
    assert np.all(zone[np.abs(np.abs(z) - section.shaft_radius) < 1e-9] == rest)
    assert zone[np.argmin(np.abs(z - section.rotor_radius))] == rest
    assert set(np.unique(zone)) == set(range(rest + 1))


def test_distance_to_a_rib():
    """To the segment between its ends, not to the line: 3-4-5 beyond an end, exact."""
    rib = cross_section(plain_design()).ribs[0]
    along = (rib.end - rib.start) / rib.width
    beyond = np.array(
        [rib.end + 3e-3 * along + 4e-3j * along, rib.start + 0.25 * rib.width * along]
    )
    assert distance_to(rib, beyond) == pytest.approx([5e-3, 0.0], abs=1e-15)
