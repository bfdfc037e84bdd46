"""All benchmarks by name."""

from collections.abc import Callable

from .chains import growth_exponent_points, growth_exponent_unknowns, map_point_ms
from .clusters import cluster_rate
from .ledgers import ledger_cost
from .maps import map_seconds
from .processes import core_efficiency, design_seconds, peak_memory_mib
from .steps import newton_step_ratio, operating_point_ratio, step_over_factorisation
from .sweeps import sweep_efficiency
from .timing import Notes
from .workload import Workload

Benchmark = Callable[[Workload, Notes], dict[str, float]]

BENCHMARKS: dict[str, Benchmark] = {
    work.__name__: work
    for work in (
        newton_step_ratio,
        operating_point_ratio,
        step_over_factorisation,
        design_seconds,
        map_point_ms,
        map_seconds,
        ledger_cost,
        sweep_efficiency,
        cluster_rate,
        growth_exponent_unknowns,
        growth_exponent_points,
        core_efficiency,
        peak_memory_mib,
    )
}
