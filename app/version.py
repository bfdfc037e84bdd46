"""The version of the installed program."""

from functools import lru_cache


@lru_cache(maxsize=1)  # reading it takes 1 ms, and every design of a study states it
def version() -> str:
    """The version as in `pyproject.toml` when it was installed."""
    from importlib.metadata import version as installed_version  # 20 ms

    return installed_version("lamwright")
