"""How much each benchmark does: the full amount, and one that only shows that it runs."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Workload:
    """Amounts; a scale is `MeshSettings.scale`, smaller is finer."""

    rounds: int  # of interleaved pairs
    scale: float
    current_angles: tuple[float, ...]  # degrees from the d axis, at rated current
    growth_scales: tuple[float, ...]
    growth_rounds: int
    map_side: int  # currents a row
    map_rows: int
    map_positions: int
    chain_lengths: tuple[int, ...]
    core_points: int  # of each of the two chains
    core_rounds: int
    memory_scale: float
    design_rounds: int
    cluster_workers: tuple[int, ...]
    cluster_deeds: tuple[str, ...]  # sleep, compute
    cluster_designs: int  # at most
    sweep_designs: int  # of each of two processes
    sweep_rounds: int


FULL = Workload(
    rounds=11,
    scale=1.0,
    current_angles=(30.0, 50.0, 65.0),
    growth_scales=(1.35, 0.8, 0.45, 0.28, 0.19),
    growth_rounds=2,
    map_side=15,
    map_rows=2,
    map_positions=12,
    chain_lengths=(5, 10, 20, 40),
    core_points=20,
    core_rounds=5,
    memory_scale=0.19,
    design_rounds=3,
    cluster_workers=(1, 2, 4, 8, 16, 32, 64),
    cluster_deeds=("sleep", "compute"),
    cluster_designs=600,
    sweep_designs=40,
    sweep_rounds=3,
)

TINY = Workload(
    rounds=1,
    scale=4.0,
    current_angles=(50.0,),
    growth_scales=(4.0, 2.0),
    growth_rounds=1,
    map_side=2,
    map_rows=1,
    map_positions=1,
    chain_lengths=(1, 3),
    core_points=2,
    core_rounds=1,
    memory_scale=4.0,
    design_rounds=1,
    cluster_workers=(1,),
    cluster_deeds=("sleep",),
    cluster_designs=5,
    sweep_designs=1,
    sweep_rounds=1,
)
