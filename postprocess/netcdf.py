"""NetCDF files of labelled arrays: the owner of xarray.

Units are written as CF asks for them; files hold no date, so equal results give equal arrays.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import numpy.typing as npt


@dataclass(frozen=True, slots=True, eq=False)
class Labelled:
    """An array with the names of its axes, its unit in CF's spelling and what it is."""

    axes: tuple[str, ...]
    values: npt.NDArray[np.generic]
    unit: str
    name: str


def write_netcdf(
    path: Path, variables: Mapping[str, Labelled], attributes: Mapping[str, str | float]
) -> None:
    """Write arrays to `path`; those named like an axis become its coordinates."""
    import xarray

    arrays = {
        key: (item.axes, item.values, {"units": item.unit, "long_name": item.name})
        for key, item in variables.items()
    }
    data = xarray.Dataset(arrays, attrs=dict(attributes))
    data.to_netcdf(path, engine="h5netcdf")


def read_netcdf(path: Path) -> tuple[dict[str, npt.NDArray[np.generic]], dict[str, object]]:
    """The arrays of a file by name, and its attributes."""
    import xarray

    with xarray.open_dataset(path, engine="h5netcdf") as data:
        arrays = {str(key): np.asarray(data[key].values) for key in data.variables}
        return arrays, {str(key): value for key, value in data.attrs.items()}
