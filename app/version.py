"""The version of the installed program."""

from importlib.metadata import version as installed_version


def version() -> str:
    """The version as in `pyproject.toml` when it was installed."""
    return installed_version("lamwright")
