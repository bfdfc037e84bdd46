"""The command `search`; see `cli` for the rules of commands."""

from pathlib import Path

import click

from .cli_study import PICTURES, pool_options, pool_wishes

_PATH = click.Path(path_type=Path)


@click.command()
@click.argument("study", type=_PATH)
@click.option("--out", required=True, type=_PATH, help="Folder for the ledger and the pictures.")
@click.option(
    "--budget", type=int, default=480, show_default=True, help="Designs in all, rejected ones too."
)
@click.option(
    "--population", type=int, default=24, show_default=True, help="Designs of a generation, even."
)
@click.option("--seed", type=int, default=1, show_default=True, help="Of the random numbers.")
@click.option(
    "--stall",
    type=click.IntRange(0),
    default=8,
    show_default=True,
    help="Generations without gain after which it ends; 0 for the budget alone.",
)
@click.option(
    "--gain",
    "gain_percent",
    type=click.FloatRange(0.0),
    default=1.0,
    show_default=True,
    help="Of the hypervolume over so many generations, in percent; less is a stall.",
)
@click.option(
    "--polish",
    type=click.IntRange(0),
    default=0,
    show_default=True,
    help="Members of the front that go on along the adjoint's slopes at the end.",
)
@PICTURES
@pool_options
def search(
    study: Path,
    out: Path,
    budget: int,
    population: int,
    seed: int,
    stall: int,
    gain_percent: float,
    polish: int,
    pictures: bool,
    **options: object,
) -> None:
    """Look for the best designs of STUDY: those that no other betters in every goal.

    Goals, limits and keys stand in the study file. The same command goes on where a search was
    stopped, however it was, and finds the same as if it had not been.
    """
    from .search_run import search as run
    from .search_screen import print_course, print_search
    from .search_state import SearchSettings
    from .study_screen import watched

    settings = SearchSettings(population, seed, budget, stall, 0.01 * gain_percent, polish)
    wishes = pool_wishes(options)
    report = run(study, out, settings, wishes, watched("search"), print_course)
    print_search(report, str(out))
    if pictures:
        from .study_pictures import draw_study

        again = (
            f"--out FOLDER --budget {budget} --population {population} --seed {seed} "
            f"--stall {stall} --gain {gain_percent:g} --polish {polish}"
        )
        draw_study(out, report.study, "search", again)
