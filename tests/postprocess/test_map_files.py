"""The files of a flux map: what is written is read back, with units."""

import csv

import numpy as np
import pytest
from flux_laws import f1_map
from scipy.io import loadmat

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.coenergy_surface import coenergy_surface
from lamwright.postprocess.map_files import (
    CSV_FILE,
    MAT_FILE,
    MEANS_FILE,
    NETCDF_FILE,
    read_flux_map,
    write_map,
)
from lamwright.postprocess.netcdf import read_netcdf

CURRENTS = np.linspace(0.0, 20.0, 5)
ARRAYS = ("i_d", "i_q", "psi_d", "psi_q", "torque", "coenergy")


@pytest.fixture(scope="module")
def written(tmp_path_factory):
    """A map of the law F1, and the folder with its files."""
    folder = tmp_path_factory.mktemp("map")
    flux_map = f1_map(CURRENTS, CURRENTS[1:], swing=0.3)
    write_map(folder, flux_map, coenergy_surface(flux_map), {"winding_temperature_c": 100.0})
    return flux_map, folder


@pytest.mark.parametrize("name", [NETCDF_FILE, CSV_FILE])
def test_map_is_read_back(written, name):
    """Every number of 64 bits comes back to the last; degrees of the CSV to rounding."""
    flux_map, folder = written
    read = read_flux_map(folder / name)
    assert read.pole_pairs == flux_map.pole_pairs
    for array in ARRAYS:
        assert np.array_equal(getattr(read, array), getattr(flux_map, array)), array
    assert read.position == pytest.approx(flux_map.position, rel=1e-15)


def test_netcdf_tells_units(written):
    """CF: every variable has units and a long name; the temperature is an attribute."""
    variables, attributes = read_netcdf(written[1] / NETCDF_FILE)
    assert variables["psi_d"].unit == "V s"
    assert variables["psi_d"].axes == ("i_d", "i_q", "position")
    assert all(v.unit and v.long_name for v in variables.values())
    assert attributes["winding_temperature_c"] == 100.0
    assert str(attributes["Conventions"]).startswith("CF-")


def test_mat_holds_the_same(written):
    """The MAT file has the arrays under the same names, and a structure of units."""
    flux_map, folder = written
    read = loadmat(folder / MAT_FILE, simplify_cells=True)
    assert np.array_equal(read["psi_q"], flux_map.psi_q)
    assert read["units"]["l_dq"] == "H"
    assert read["about"]["pole_pairs"] == 2


def test_means_leave_out_what_has_no_meaning(written):
    """psi_d / i_d at 0 A is empty, not a number that looks like one."""
    with (written[1] / MEANS_FILE).open() as stream:
        rows = list(csv.DictReader(stream))
    assert rows[0]["i_d_a"] == "0"
    assert rows[0]["l_d_h"] == ""
    assert float(rows[-1]["l_d_h"]) == pytest.approx(written[0].psi_d[-1, -1, 0] / 20.0, rel=1e-8)


def test_what_is_no_map_is_refused(tmp_path):
    """One line each: no file, another table, a grid with a hole."""
    with pytest.raises(LamwrightError, match=r"gone\.csv: cannot be read: no such file"):
        read_flux_map(tmp_path / "gone.csv")
    with pytest.raises(LamwrightError, match=r"gone\.nc: cannot be read: no such file"):
        read_flux_map(tmp_path / "gone.nc")
    (tmp_path / "text.nc").write_text("no netCDF")
    with pytest.raises(LamwrightError, match=r"text\.nc: cannot be read: "):
        read_flux_map(tmp_path / "text.nc")
    (tmp_path / "other.csv").write_text("i_d_a\n1\n")
    with pytest.raises(LamwrightError, match=r"other\.csv: no flux map: lacks i_q_a, "):
        read_flux_map(tmp_path / "other.csv")
    (tmp_path / "words.csv").write_text("i_d_a\nmany\n")
    with pytest.raises(LamwrightError, match=r"words\.csv: no flux map: not a table of numbers"):
        read_flux_map(tmp_path / "words.csv")


def test_a_grid_with_a_hole_is_refused(written, tmp_path):
    """A row less than the grid has."""
    text = (written[1] / CSV_FILE).read_text().splitlines(keepends=True)
    (tmp_path / "hole.csv").write_text("".join(text[:-1]))
    with pytest.raises(LamwrightError, match="239 rows are no whole grid"):
        read_flux_map(tmp_path / "hole.csv")
