"""The architecture: which way imports run, what crosses, who owns a heavy library, how long a file.

Read from the sources with `ast`, so that a breach is found even in a line that no test runs.
"""

import ast
import importlib
import re
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from fnmatch import fnmatch
from importlib.metadata import packages_distributions
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
ROOMS = ("geometry", "solver", "postprocess", "app")  # each may use those before it
MODULES = sorted(path for room in ROOMS for path in (ROOT / room).rglob("*.py"))
SOURCES = [*MODULES, *sorted((ROOT / "tests").rglob("*.py"))]
LONGEST = 400  # lines of a file: one sitting

# A heavy library has one owner (a drawing or a mesh may take several files), so that starting is
# quick and the library can be replaced.
OWNERS = {
    "gmsh": ("solver/mesh*.py",),
    "ezdxf": ("geometry/dxf*.py",),
    "matplotlib": ("postprocess/figures*.py", "postprocess/sheet*.py"),
    "fontTools": ("postprocess/sheet_font.py",),
    "cvxopt": ("solver/linear.py",),
    "h5netcdf": ("postprocess/netcdf.py",),
    "h5py": ("postprocess/netcdf.py",),
    "xarray": ("postprocess/netcdf.py",),
    "qdldl": ("solver/linear.py",),
    "pebble": ("app/study_workers.py",),
    "distributed": ("app/study_cluster*.py",),
    "dask": ("app/study_cluster*.py",),
    "pymoo": ("app/search*.py",),
    "moocore": ("app/search*.py",),
    "starlette": ("app/page_*.py",),
    "uvicorn": ("app/page_server.py", "app/page_patience.py"),
    "click": ("app/*.py",),
    "rich": ("app/*.py",),
    "pydantic": ("geometry/design*.py", "app/study_tables.py"),
}
IMPORTED_AT_THE_TOP = {
    "click",
    "rich",
    "pydantic",
    "starlette",
}  # light enough, or needed by every command


@dataclass(frozen=True, slots=True)
class Import:
    """One imported name: `from module import name`, or `import module` where name is empty."""

    path: Path
    line: int
    module: str
    name: str
    level: int
    is_late: bool  # inside a function, or for the type checker alone

    @property
    def place(self) -> str:
        """Where it stands, as a fault is reported."""
        return f"{self.path.relative_to(ROOT)}:{self.line}: {self.module} {self.name}".rstrip()

    @property
    def library(self) -> str:
        """The top-level package, empty for a relative import."""
        return "" if self.level else self.module.partition(".")[0]


def _imports(path: Path) -> Iterator[Import]:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    late = {
        id(inner)
        for node in ast.walk(tree)
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef)
        or (isinstance(node, ast.If) and "TYPE_CHECKING" in ast.unparse(node.test))
        for inner in ast.walk(node)
    }
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            for alias in node.names:
                yield Import(path, node.lineno, alias.name, "", 0, id(node) in late)
        elif isinstance(node, ast.ImportFrom):
            for alias in node.names:
                module, level = node.module or "", node.level
                yield Import(path, node.lineno, module, alias.name, level, id(node) in late)


IMPORTS = [item for path in MODULES for item in _imports(path)]
CROSSING = [
    item
    for item in IMPORTS
    if item.module.startswith("lamwright.")
    and item.module.split(".")[1] != item.path.relative_to(ROOT).parts[0]
]


def _plain(distribution: str) -> str:
    return re.sub(r"[-_.]+", "-", distribution).lower()


def _dotted(path: Path) -> str:
    parts = path.relative_to(ROOT).with_suffix("").parts
    return ".".join(("lamwright", *parts[: -1 if parts[-1] == "__init__" else None]))


def test_there_is_something_to_check():
    """The rules below hold for nothing if nothing is found."""
    assert {path.parent.name for path in MODULES} >= set(ROOMS)
    assert len(CROSSING) > 10


def test_imports_run_one_way():
    """Design: geometry <- solver <- postprocess <- app; nothing imports upward."""
    upward = [
        item.place
        for item in CROSSING
        if ROOMS.index(item.module.split(".")[1])
        > ROOMS.index(item.path.relative_to(ROOT).parts[0])
    ]
    assert upward == []


def test_names_cross_absolutely_and_stay_relatively():
    """Between rooms `from lamwright.room.module import name`, inside one `from .module`."""
    wrong = [
        item.place
        for item in IMPORTS
        if item.level > 1
        or item.library in ROOMS
        or (item.library == "lamwright" and (item not in CROSSING or not item.name))
    ]
    assert wrong == []


def test_only_public_names_with_docstrings_cross():
    """A name used by another room is a promise: it exists, is public, and says what it is."""
    broken = []
    for item in CROSSING:
        value = getattr(importlib.import_module(item.module), item.name, None)
        # A module's functions and classes explain themselves; constants and aliases cannot.
        own = getattr(value, "__module__", None) == item.module
        if value is None or item.name.startswith("_") or (own and not value.__doc__):
            broken.append(item.place)
    assert broken == []


@pytest.mark.parametrize("room", ROOMS)
def test_a_door_lists_its_names(room):
    """The door is the index of a room: sorted, complete, each name there and explained."""
    door = importlib.import_module(f"lamwright.{room}")
    names = list(door.__all__)
    assert names == sorted(set(names))
    assert [name for name in names if not getattr(door, name).__doc__] == []
    assert len(door.__doc__.splitlines()) >= 3


def test_heavy_libraries_stay_with_their_owner():
    """One owner each, and imported inside functions, so that `--help` does not wait for them."""
    stray = []
    for item in IMPORTS:
        owners = OWNERS.get(item.library, ("*",))
        is_owner = any(fnmatch(item.path.relative_to(ROOT).as_posix(), own) for own in owners)
        is_early = item.library in OWNERS and not item.is_late
        if not is_owner or (is_early and item.library not in IMPORTED_AT_THE_TOP):
            stray.append(item.place)
    assert stray == []


def test_every_library_is_pinned():
    """What is imported is installed by README's commands, at a tested version, tests included."""
    pinned = set(re.findall(r"^([\w-]+)==", (ROOT / "constraints.txt").read_text(), re.MULTILINE))
    providers = packages_distributions()
    unpinned = [
        item.place
        for path in SOURCES
        for item in _imports(path)
        if not {_plain(name) for name in providers.get(item.library, ())} <= pinned | {"lamwright"}
    ]
    assert unpinned == []


@pytest.mark.parametrize("path", SOURCES, ids=lambda path: path.relative_to(ROOT).as_posix())
def test_a_file_is_one_sitting(path):
    """House rule: 150 lines is normal, 250 a question, 400 the limit."""
    assert len(path.read_text(encoding="utf-8").splitlines()) <= LONGEST


def test_rooms_are_silent():
    """Only the front door prints; the rooms return values and call back with progress."""
    loud = [
        f"{path.relative_to(ROOT)}:{node.lineno}"
        for path in MODULES
        if not path.is_relative_to(ROOT / "app")
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8")))
        if isinstance(node, ast.Call) and ast.unparse(node.func) == "print"
    ]
    assert loud == []


def test_all_rooms_load_once_and_without_the_heavy_libraries():
    """The repository's folders must not load beside the package: `geometry` is a second copy.

    A new process, since the tests around this one load the heavy libraries rightly.
    """
    modules = [_dotted(path) for path in MODULES if path.name != "__main__.py"]
    code = f"import sys, {', '.join(modules)}; print(*sys.modules, sep='\\n')"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    loaded = set(run.stdout.split())
    assert loaded >= set(modules)
    assert not loaded & set(ROOMS)
    assert not loaded & (set(OWNERS) - IMPORTED_AT_THE_TOP)


def test_this_process_has_no_second_copy():
    """The same, of the process that runs the tests, whatever they imported before this one."""
    for path in MODULES:
        if path.name != "__main__.py":
            importlib.import_module(_dotted(path))
    assert not set(ROOMS) & set(sys.modules)
