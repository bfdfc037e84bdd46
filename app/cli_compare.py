"""The command `compare`; see `cli` for the rules of commands."""

from pathlib import Path

import click


@click.command()
@click.argument("a", type=click.Path(path_type=Path))
@click.argument("b", type=click.Path(path_type=Path))
@click.option("--json", "json_file", type=click.Path(path_type=Path), help="Write all as JSON.")
@click.option("--out", type=click.Path(path_type=Path), help="Folder for the picture.")
def compare(a: Path, b: Path, json_file: Path | None, out: Path | None) -> None:
    """What differs between A and B, each a design, a DXF drawing, or a folder of results.

    Keys of designs, areas, ribs and the largest deviation of outlines, and figures of folders that
    assess or release has written, beyond their error bars or not. A design and a drawing are laid
    on each other, as in `lamwright compare rotor.toml back.dxf --out seen`; drawings by themselves
    are compared as they lie about their shaft axes.
    """
    from .compare import compare as run
    from .compare import write_compare
    from .compare_screen import print_compare

    report = run(a, b)
    write_compare(report, json_file, out)
    print_compare(report)
