"""Tables over named axes as netCDF-4, with the attributes of the CF conventions.

The one owner of xarray; `units` are written as UDUNITS reads them.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from lamwright.geometry.errors import LamwrightError
from lamwright.solver.types import FloatArray

CONVENTIONS = "CF-1.11"


@dataclass(frozen=True, slots=True, eq=False)
class Variable:
    """Values over axes; a variable over the axis of its own name says where that axis has them."""

    name: str
    axes: tuple[str, ...]
    values: FloatArray
    unit: str  # "1" for a ratio
    long_name: str


def write_netcdf(
    path: Path, variables: Sequence[Variable], attributes: Mapping[str, str | float]
) -> None:
    """Write variables and the file's attributes."""
    import xarray

    def of(chosen: Sequence[Variable]) -> dict[str, tuple[object, ...]]:
        return {
            v.name: (v.axes, np.asarray(v.values), {"units": v.unit, "long_name": v.long_name})
            for v in chosen
        }

    data = xarray.Dataset(
        of([v for v in variables if v.axes != (v.name,)]),
        of([v for v in variables if v.axes == (v.name,)]),
        {"Conventions": CONVENTIONS, **attributes},
    )
    # Axes have no gaps; without this CF's mark of a missing value is added to them too.
    plain = {name: {"_FillValue": None} for name in data.coords}
    data.to_netcdf(path, engine="h5netcdf", encoding=plain)


def read_netcdf(path: Path) -> tuple[dict[str, Variable], dict[str, object]]:
    """The variables by name, and the file's attributes.

    Raises:
        LamwrightError: there is no such file, or it is no netCDF-4.
    """
    import xarray

    try:
        with xarray.open_dataset(path, engine="h5netcdf", decode_cf=False) as data:
            found = {
                str(name): Variable(
                    str(name),
                    tuple(str(axis) for axis in item.dims),
                    np.array(item.values, dtype=float),
                    str(item.attrs.get("units", "1")),
                    str(item.attrs.get("long_name", "")),
                )
                for name, item in data.variables.items()
            }
            return found, dict(data.attrs)
    except (OSError, ValueError, KeyError):
        fault = "no netCDF file" if path.is_file() else "no such file"
        raise LamwrightError(f"{path}: cannot be read: {fault}") from None
