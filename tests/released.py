"""The demo's package with an invented promise, so that no field need be solved; made once."""

import dataclasses
import functools
import json
import tempfile
from pathlib import Path

import invented_verdict as invented
import numpy as np

from lamwright.app.release import ReleaseWishes, release
from lamwright.app.release_record import Order
from lamwright.app.version import version
from lamwright.geometry.design_file import design_hash, read_machine
from lamwright.geometry.nesting import Strip
from lamwright.postprocess.files import json_text
from lamwright.postprocess.tables import verdict_record
from lamwright.postprocess.torque import TorqueSpectrum

DESIGNS = Path(__file__).parents[1] / "designs"
DEMO = DESIGNS / "demo_24s4p_arc.toml"
MAGNETIC = dataclasses.replace(invented.MAGNETIC, ripple=0.13)  # within the demo's 15 %
STRIP = Strip(0.3, 2e-3, 3e-3)


def write_verdict(design, path, magnetic=MAGNETIC):
    """A verdict.json of a design with invented figures."""
    machine = read_machine(design)
    verdict = invented.verdict(
        magnetic,
        design_hash=design_hash(machine.design, machine.cards),
        version=version(),
        errors={"torque_nm": 0.04},
    )
    orders = TorqueSpectrum((6,), np.array([0.5]), np.array([0.1]))
    path.write_text(json_text(verdict_record(verdict, orders)))
    return path


def wishes(verdict, **changed):
    """Wishes that take a verdict from a file."""
    return ReleaseWishes(Order(strip=STRIP), verdict, **changed)


@functools.cache
def _kept() -> tempfile.TemporaryDirectory:
    """A folder that lasts as long as the process."""
    return tempfile.TemporaryDirectory()


@functools.cache
def demo_verdict():
    """A verdict of the demo."""
    return write_verdict(DEMO, Path(_kept().name) / "verdict.json")


@functools.cache
def demo_package():
    """The demo's package; not to be changed."""
    folder = Path(_kept().name) / "released"
    release(DEMO, folder, wishes(demo_verdict()))
    return folder


def manifest_of(folder):
    """The manifest of a package."""
    return json.loads((folder / "manifest.json").read_text())
