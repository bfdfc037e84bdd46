"""The rotor beyond yield as a record for JSON and as CSV, with its cautions."""

import math

from lamwright.geometry.section import CrossSection

from .cautions import MOST_GROWTH
from .files import csv_text
from .plastic_ribs import PlasticReport, PlasticRib
from .verdict import RPM

MM, UM, MPA, PERCENT = 1e3, 1e6, 1e-6, 100.0
LEAST_RESERVE = 1.05  # of burst over test: less than the sum of what is not in the model
MOST_STRAIN = 0.05  # plastic; punched sheet may tear beyond (common practice, no source)

PLASTIC_STANDING = (
    "burst by limit load is an estimate in plane stress, small displacements, a free bore: it"
    " supports, and never replaces, a qualified engineer's judgement, the supplier's material"
    " certificate, an overspeed test in containment, and local codes and standards",
    "the tensile strength in place of yield takes ductility for granted: sheet that is brittle,"
    " cold or cracked at a cut edge bursts earlier",
    "start and stop are judged for a steel that does not harden; cracks and fatigue are not judged",
)


def plastic_record(report: PlasticReport, section: CrossSection) -> dict[str, object]:
    """The report as it stands in JSON; what has no finite value is null."""
    speeds = {
        "speed_test_rpm": report.test_speed,
        "speed_maximum_rpm": report.running_speed,
        "speed_first_yield_rpm": report.first_yield_speed,
        "speed_burst_low_rpm": report.burst_low,
        "speed_burst_high_rpm": report.burst_high,
        "speed_burst_tensile_rpm": report.burst_tensile,
        "speed_mean_hoop_rpm": report.mean_hoop_speed,
        "speed_mean_rib_rpm": report.mean_rib_speed,
    }
    return {
        "survives_test": report.survives,
        **{key: _finite(RPM * value) for key, value in speeds.items()},
        "yield_strength_mpa": MPA * report.yield_strength,
        "hardens": report.hardens,
        "growth_left_d_um": _finite(UM * report.growth_d),
        "growth_left_q_um": _finite(UM * report.growth_q),
        "growth_left_most_um": _finite(UM * report.growth_max),
        "plastic_strain_most_percent": _finite(PERCENT * report.largest_strain),
        "yielded_iron_percent": PERCENT * report.yielded_share,
        "start_stop": report.regime,
        "start_stop_cycles": report.cycles,
        "ribs": [{"rib": row.rib.name, **_rib_figures(row)} for row in report.ribs],
        "cautions": list(plastic_cautions(report, section)),
    }


def plastic_csv(report: PlasticReport) -> str:
    """One row for each rib of the rotor's own period; empty where there is no finite value."""
    header = ["rib", "kind", "barrier", *_rib_figures(report.ribs[0])]
    rows = []
    for row in report.ribs:
        values = _rib_figures(row).values()
        texts = ["" if value is None else f"{value:.6g}" for value in values]
        rows.append([row.rib.name, row.rib.kind, str(row.rib.barrier), *texts])
    return csv_text(header, rows)


def plastic_cautions(report: PlasticReport, section: CrossSection) -> tuple[str, ...]:
    """What to be wary of, this rotor's own first, one line each."""
    found = []
    if not report.survives:
        found.append(
            f"the overspeed test at {RPM * report.test_speed:.0f} rpm is at or beyond the burst"
            f" speed of {RPM * report.burst_low:.0f} rpm by limit load: do not run it"
        )
    elif report.burst_low < LEAST_RESERVE * report.test_speed:
        reserve = PERCENT * (report.burst_low / report.test_speed - 1.0)
        found.append(
            f"burst by limit load is only {reserve:.1f} % above the test speed: less than"
            " mesh, sheet and strength may scatter"
        )
    if math.isfinite(report.growth_max) and report.growth_max > MOST_GROWTH * section.gap:
        taken = PERCENT * report.growth_max / section.gap
        found.append(f"the growth left takes {taken:.0f} % of the air gap")
    if math.isfinite(report.largest_strain) and report.largest_strain > MOST_STRAIN:
        found.append(
            f"plastic strain of {PERCENT * report.largest_strain:.2g} %: the sheet may tear, and"
            " small displacements no longer describe it"
        )
    if report.regime in ("alternating", "ratcheting", "unsettled"):
        words = {
            "alternating": "points flow up and down in every start and stop: low-cycle fatigue",
            "ratcheting": "the rotor grows with every start and stop",
            "unsettled": f"start and stop did not settle in {report.cycles} cycles",
        }
        found.append(words[report.regime])
    if any(region.material == "magnet" for region in section.rotor):
        found.append(
            "the magnets' own pull is not in yielding and burst: these speeds are too high"
        )
    return (*found, *PLASTIC_STANDING)


def _rib_figures(row: PlasticRib) -> dict[str, float | None]:
    return {
        "width_mm": MM * row.rib.width,
        "yielded_section_percent": PERCENT * row.section_share,
        "yielded_area_mm2": MM**2 * row.zone_area,
        "yielded_zone_percent": PERCENT * row.zone_share,
        "plastic_strain_most_percent": _finite(PERCENT * row.largest_strain),
    }


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None
