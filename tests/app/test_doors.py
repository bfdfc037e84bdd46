"""The doors of the rooms as a script uses them: every name, whatever was loaded before."""

import ast
import importlib
import inspect
import subprocess
import sys
from pathlib import Path
from types import ModuleType

import pytest

ROOT = Path(__file__).parents[2]
ROOMS = ("geometry", "solver", "postprocess", "app")
MODULES = {room: {path.stem for path in (ROOT / room).glob("*.py")} for room in ROOMS}


@pytest.mark.parametrize("room", ROOMS)
def test_no_name_is_a_modules(room: str):
    """`from room import name` would give the module once it is loaded, and the value before."""
    door = importlib.import_module(f"lamwright.{room}")
    assert not set(door.__all__) & MODULES[room]


@pytest.mark.parametrize("room", ROOMS)
def test_names_are_values_after_all_modules_were_loaded(room: str):
    """The same by what it protects from."""
    for name in MODULES[room] - {"__init__", "__main__"}:
        importlib.import_module(f"lamwright.{room}.{name}")
    door = importlib.import_module(f"lamwright.{room}")
    for name in door.__all__:
        assert not isinstance(getattr(door, name), ModuleType)


@pytest.mark.parametrize("room", ROOMS)
def test_a_type_checker_sees_the_same_names(room: str):
    """What stands under TYPE_CHECKING is what `__getattr__` gives, no more and no less."""
    tree = ast.parse((ROOT / room / "__init__.py").read_text(encoding="utf-8"))
    (checked,) = [node for node in tree.body if isinstance(node, ast.If)]
    seen = set()
    for node in checked.body:
        if isinstance(node, ast.ImportFrom):
            seen |= {alias.asname for alias in node.names}
        else:
            assert isinstance(node, ast.Assign)
            seen |= {ast.unparse(target) for target in node.targets}
    door = importlib.import_module(f"lamwright.{room}")
    assert {name for name in seen if not name.startswith("_")} == set(door.__all__)


@pytest.mark.parametrize("room", ROOMS)
def test_a_notebook_completes_the_names_alone(room: str):
    """Completion asks `dir`, which would list imports of the door's own and no lazy name."""
    door = importlib.import_module(f"lamwright.{room}")
    assert dir(door) == sorted(door.__all__)


@pytest.mark.parametrize("room", ROOMS)
def test_a_place_may_be_a_text(room: str):
    """Who types a call types a string: functions and constructors of the door take both."""
    door = importlib.import_module(f"lamwright.{room}")
    values = [getattr(door, name) for name in door.__all__]
    called = [value for value in values if inspect.isfunction(value)]
    called += [
        made
        for _, made in inspect.getmembers(getattr(door, "Ledger", None))
        if inspect.ismethod(made)
    ]
    for function in called:
        for key, parameter in inspect.signature(function).parameters.items():
            kind = str(parameter.annotation)
            if "athlib.Path" in kind and "Callable" not in kind:
                assert kind.startswith("str | "), f"{function.__name__}({key}: {kind})"


@pytest.mark.parametrize("room", ROOMS)
def test_an_unknown_name_is_told(room: str):
    """As of any module."""
    door = importlib.import_module(f"lamwright.{room}")
    with pytest.raises(AttributeError, match=f"lamwright.{room} has no nothing"):
        door.nothing  # noqa: B018


def test_a_door_loads_nothing_by_itself():
    """Opening all four doors loads none of the libraries that their rooms need."""
    code = (
        "import sys; import lamwright.geometry, lamwright.solver, lamwright.postprocess,"
        " lamwright.app; print(*{'numpy', 'scipy', 'pydantic', 'gmsh'} & set(sys.modules))"
    )
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.strip() == ""
