"""The flux map as netCDF, CSV and MAT, with a unit in every name, and read back.

netCDF and MAT hold SI units under plain names; the CSV has one row for each pair of currents and
position, its means and inductances in a second file with one row for each pair.

Axes: n_d and n_q currents, n_pos positions.
"""

import csv
from collections.abc import Mapping
from pathlib import Path

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.whole_file import write_text
from lamwright.solver.types import FloatArray

from .coenergy_surface import CoenergySurface, incremental
from .files import csv_text
from .flux_map import (
    FluxMap,
    apparent_inductances,
    mean_coenergy,
    mean_linkages,
    mean_torque,
    ripple,
    torque_swing,
)
from .netcdf import Variable, read_netcdf, write_netcdf

NETCDF_FILE, MAT_FILE = "map.nc", "map.mat"
CSV_FILE, MEANS_FILE = "map.csv", "map_means.csv"
PLANE = ("i_d", "i_q")
SPACE = ("i_d", "i_q", "position")
DEGREE = np.pi / 180.0
_CSV_COLUMNS = ("i_d_a", "i_q_a", "angle_mech_deg", "psi_d_vs", "psi_q_vs", "torque_nm")
_CSV_LAST = ("coenergy_j", "pole_pairs")


def map_variables(flux_map: FluxMap, surface: CoenergySurface) -> tuple[Variable, ...]:
    """Everything of a map, axes first."""
    m = flux_map
    psi_d, psi_q = mean_linkages(m)
    l_d, l_q = apparent_inductances(m)
    l_dd, l_dq, l_qq = incremental(surface, m.i_d[:, None], m.i_q[None, :])
    note = "of the stored surface"
    return (
        Variable("i_d", ("i_d",), m.i_d, "A", "d-axis current, peak"),
        Variable("i_q", ("i_q",), m.i_q, "A", "q-axis current, peak"),
        Variable(
            "position",
            ("position",),
            m.position,
            "rad",
            "mechanical angle of the rotor's d axis ahead of phase A's axis",
        ),
        Variable("psi_d", SPACE, m.psi_d, "V s", "d-axis flux linkage, peak, no end winding"),
        Variable("psi_q", SPACE, m.psi_q, "V s", "q-axis flux linkage, peak, no end winding"),
        Variable("torque", SPACE, m.torque, "N m", "torque by Maxwell's stress"),
        Variable("coenergy", SPACE, m.coenergy, "J", "magnetic coenergy of the whole machine"),
        Variable("psi_d_mean", PLANE, psi_d, "V s", "d-axis flux linkage, mean over positions"),
        Variable("psi_q_mean", PLANE, psi_q, "V s", "q-axis flux linkage, mean over positions"),
        Variable("torque_mean", PLANE, mean_torque(m), "N m", "torque, mean over positions"),
        Variable("coenergy_mean", PLANE, mean_coenergy(m), "J", "coenergy, mean over positions"),
        Variable("torque_swing", PLANE, torque_swing(m), "N m", "greatest less least torque"),
        Variable("ripple", PLANE, ripple(m), "1", "torque swing over mean torque"),
        Variable("l_d", PLANE, l_d, "H", "apparent d-axis inductance psi_d / i_d"),
        Variable("l_q", PLANE, l_q, "H", "apparent q-axis inductance psi_q / i_q"),
        Variable("l_dd", PLANE, l_dd, "H", f"incremental d psi_d / d i_d {note}"),
        Variable("l_dq", PLANE, l_dq, "H", f"incremental d psi_d / d i_q = d psi_q / d i_d {note}"),
        Variable("l_qq", PLANE, l_qq, "H", f"incremental d psi_q / d i_q {note}"),
    )


def write_map(
    folder: Path,
    flux_map: FluxMap,
    surface: CoenergySurface,
    attributes: Mapping[str, str | float],
) -> None:
    """Write a map in all its forms into the folder.

    Args:
        folder: of the results.
        flux_map: to be written.
        surface: through it.
        attributes: of the netCDF and MAT files, a unit in the name of every number.
    """
    from scipy.io import savemat

    variables = map_variables(flux_map, surface)
    stated = {"pole_pairs": flux_map.pole_pairs, **attributes}
    write_netcdf(folder / NETCDF_FILE, variables, stated)
    table = {v.name: v.values for v in variables}
    units = {v.name: v.unit for v in variables}
    savemat(folder / MAT_FILE, {**table, "units": units, "about": stated}, oned_as="column")
    write_text(folder / CSV_FILE, map_csv(flux_map))
    write_text(folder / MEANS_FILE, means_csv(variables))


def map_csv(flux_map: FluxMap) -> str:
    """One row for each i_d, i_q and position."""
    m = flux_map
    d, q, at = np.meshgrid(m.i_d, m.i_q, m.position / DEGREE, indexing="ij")
    columns = (d, q, at, m.psi_d, m.psi_q, m.torque, m.coenergy)
    table = np.stack([column.ravel() for column in columns], axis=-1)
    last = str(m.pole_pairs)
    rows = [[*(f"{value:.17g}" for value in row), last] for row in table]
    return csv_text([*_CSV_COLUMNS, *_CSV_LAST], rows)


def means_csv(variables: tuple[Variable, ...]) -> str:
    """One row for each i_d and i_q; empty where a figure has no meaning, as psi_d / 0 A."""
    suffix = {"V s": "vs", "N m": "nm", "J": "j", "H": "h", "1": "1"}
    plane = [v for v in variables if v.axes == PLANE]
    i_d, i_q = (next(v.values for v in variables if v.name == name) for name in PLANE)
    d, q = np.meshgrid(i_d, i_q, indexing="ij")
    columns = [d, q, *(v.values for v in plane)]
    table = np.stack([column.ravel() for column in columns], axis=-1)
    header = ["i_d_a", "i_q_a", *(f"{v.name}_{suffix[v.unit]}" for v in plane)]
    return csv_text(
        header, [["" if np.isnan(value) else f"{value:.9g}" for value in row] for row in table]
    )


def read_flux_map(path: str | Path) -> FluxMap:
    """The map in `map.nc` or `map.csv`.

    Raises:
        LamwrightError: it cannot be read, or is no flux map.
    """
    path = Path(path)
    return _from_csv(path) if path.suffix == ".csv" else _from_netcdf(path)


def _from_netcdf(path: Path) -> FluxMap:
    variables, attributes = read_netcdf(path)
    lacking = [
        name for name in (*SPACE, "psi_d", "psi_q", "torque", "coenergy") if name not in variables
    ]
    if lacking or "pole_pairs" not in attributes:
        raise LamwrightError(f"{path}: no flux map: lacks {', '.join(lacking or ['pole_pairs'])}")
    values = {name: variable.values for name, variable in variables.items()}
    return FluxMap(
        pole_pairs=int(np.asarray(attributes["pole_pairs"]).item()),
        i_d=values["i_d"],
        i_q=values["i_q"],
        position=values["position"],
        psi_d=values["psi_d"],
        psi_q=values["psi_q"],
        torque=values["torque"],
        coenergy=values["coenergy"],
    )


def _from_csv(path: Path) -> FluxMap:
    try:
        with path.open(encoding="utf-8", newline="") as stream:
            rows = list(csv.reader(stream))
        header, table = rows[0], np.array(rows[1:], dtype=float)
    except (OSError, UnicodeDecodeError) as error:
        reason = getattr(error, "strerror", None) or "no text"
        raise LamwrightError(f"{path}: cannot be read: {str(reason).lower()}") from None
    except (ValueError, IndexError):
        raise LamwrightError(f"{path}: no flux map: not a table of numbers") from None
    lacking = [name for name in (*_CSV_COLUMNS, *_CSV_LAST) if name not in header]
    if lacking or table.ndim != 2:
        raise LamwrightError(f"{path}: no flux map: lacks {', '.join(lacking or ['rows'])}")
    column = {name: table[:, header.index(name)] for name in header}
    axes = [np.unique(column[name]) for name in _CSV_COLUMNS[:3]]
    shape = tuple(axis.size for axis in axes)
    if table.shape[0] != axes[0].size * axes[1].size * axes[2].size:
        raise LamwrightError(f"{path}: no flux map: {table.shape[0]} rows are no whole grid")
    order = np.lexsort([column[name] for name in reversed(_CSV_COLUMNS[:3])])

    def wave(name: str) -> FloatArray:
        values: FloatArray = column[name][order].reshape(shape)
        return values

    return FluxMap(
        pole_pairs=int(column["pole_pairs"][0]),
        i_d=axes[0],
        i_q=axes[1],
        position=axes[2] * DEGREE,
        psi_d=wave("psi_d_vs"),
        psi_q=wave("psi_q_vs"),
        torque=wave("torque_nm"),
        coenergy=wave("coenergy_j"),
    )
