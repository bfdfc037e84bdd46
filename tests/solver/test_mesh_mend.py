"""Bad elements cut another way: ears on an arc, one upon another, and one that must stay."""

from pathlib import Path

import numpy as np
import pytest

from lamwright.app.lamination import section_of
from lamwright.app.point import read_machine
from lamwright.app.study_quick import FIELD_MESH
from lamwright.solver import mesh as meshing
from lamwright.solver.mesh_checks import element_areas, least_jacobian_share
from lamwright.solver.mesh_mend import mended
from lamwright.solver.mesh_steps import second_order
from lamwright.solver.types import IntArray

DESIGNS = Path(__file__).parents[2] / "designs"
LEAST = 0.1


def _on_arc(turn_deg: float, count: int) -> tuple[np.ndarray, tuple[IntArray, np.ndarray]]:
    """Nodes on an arc of radius 1 about 0 and the point -1, and the steps with their middles."""
    angles = np.radians(turn_deg) * np.linspace(-0.5, 0.5, count + 1)
    ends = np.column_stack([np.arange(count), np.arange(1, count + 1)])
    middles = np.exp(0.5j * (angles[1:] + angles[:-1]))
    return np.append(np.exp(1j * angles), -1.0), (ends, middles)


@pytest.mark.parametrize("count", [2, 3, 4, 5])
def test_ears_upon_ears_are_cut_from_the_point_beyond(count: int):
    """A fan from the arc's first node to its last one, with one triangle more, has ears.

    In a first-order picture all are good. Curved, the last of them has two tangent sides; cut from
    the far point instead, no triangle has. The area is that of the parabolas through the arc's
    steps and their middles: per step two thirds of chord times rise more than the polygon's.
    """
    nodes, sides = _on_arc(60.0, count)
    far = count + 1
    fan = np.array([[0, k, k + 1] for k in range(1, count)] + [[0, count, far]])
    region = np.zeros(len(fan), dtype=np.int64)
    before = second_order(nodes, fan, sides, region, ("one",))
    bad = least_jacobian_share(before.nodes[before.elements]) < LEAST
    assert bad.any()
    after = mended(nodes, fan, region, sides, bad, LEAST)
    mesh = second_order(nodes, after, sides, region, ("one",))
    assert least_jacobian_share(mesh.nodes[mesh.elements]).min() > LEAST
    assert {frozenset(one) for one in after.tolist()} == {
        frozenset((k, k + 1, far)) for k in range(count)
    }
    step = np.radians(60.0) / count
    caps = count * 2.0 / 3.0 * 2.0 * np.sin(step / 2) * (1.0 - np.cos(step / 2))
    around = nodes[[*range(count + 1), far]]
    polygon = 0.5 * np.sum(around.conj() * np.roll(around, -1)).imag
    assert element_areas(mesh).sum() == pytest.approx(polygon + caps, rel=1e-12)


def test_what_has_no_other_cut_stays():
    """An ear alone in its region: beyond its third side lies another region."""
    nodes, sides = _on_arc(60.0, 2)
    ear = np.array([[0, 1, 2], [0, 2, 3]])
    regions = np.array([0, 1])
    after = mended(nodes, ear, regions, sides, np.array([True, False]), LEAST)
    assert np.array_equal(np.sort(after, axis=1), np.sort(ear, axis=1))


def test_a_way_round_a_node_is_left_where_it_meets_itself():
    """Found among random meshes: three triangles about an inner node, beside an ear of two steps.

    Sides turned on the way round that node leave one with more than two triangles (that ended the
    whole mesh). No other way mends the ear either: it stays for finer steps.
    """
    arc, (ends, middles) = _on_arc(164.75704782343738, 2)
    nodes = np.array([*arc[:3], -1 + 0.8j, -1 - 0.8j, -0.008 - 0.094j, 0.774 - 0.235j])
    straight = np.array([[2, 3], [3, 4], [4, 0]])
    sides = (np.vstack([ends, straight]), np.append(middles, nodes[straight].mean(axis=1)))
    around = [[3, 5, 6], [6, 2, 3], [6, 0, 1], [6, 1, 2], [6, 5, 0], [0, 3, 4], [0, 5, 3]]
    triangles = np.array(around)
    region = np.zeros(len(triangles), dtype=np.int64)
    before = second_order(nodes, triangles, sides, region, ("one",))
    bad = least_jacobian_share(before.nodes[before.elements]) < LEAST
    assert bad.any()
    after = mended(nodes, triangles, region, sides, bad, LEAST)
    assert [set(one) for one in after.tolist()] == [set(one) for one in around]


@pytest.mark.parametrize("name", ["demo_24s4p_arc", "gallery/mill_48s4p", "gallery/pump_36s4p"])
def test_slots_of_a_coarse_mesh_need_no_finer_steps(name: str, monkeypatch: pytest.MonkeyPatch):
    """Each half is meshed once; finer steps at the slots' corners took up to twice the nodes."""
    calls = []
    fill = meshing._fill
    monkeypatch.setattr(meshing, "_fill", lambda *given: calls.append(1) or fill(*given))
    section = section_of(read_machine(DESIGNS / f"{name}.toml"))
    mesh = meshing.mesh_section(section, FIELD_MESH)
    assert len(calls) == 2
    for part in (mesh.rotor, mesh.stator):
        assert least_jacobian_share(part.nodes[part.elements]).min() > LEAST
