"""The command `page`; see `cli` for the rules of commands."""

from pathlib import Path

import click


@click.command()
@click.argument("design", required=False, type=click.Path(path_type=Path))
@click.option(
    "--folder",
    type=click.Path(path_type=Path),
    help="All that the page may see: designs, cards, studies.  [default: the design's]",
)
@click.option(
    "--port",
    type=click.IntRange(0, 65535),
    default=8765,
    show_default=True,
    help="On this machine alone; 0 for any.",
)
def page(design: Path | None, folder: Path | None, port: int) -> None:
    """Drag the ribs and barriers of DESIGN in a browser, with its verdict beside.

    As in `lamwright page designs/demo_24s4p_arc.toml`: open the address that it prints. Only this
    machine can reach it, and only who has the address. End it by the interrupt key.
    """
    from .page_api import opened_page
    from .page_guard import Door, new_token
    from .page_server import listening, serve

    opened = opened_page(design, folder)
    own = listening(port)
    door = Door(own.getsockname()[1], new_token())
    click.echo(f"page: {door.address}")
    click.echo(f"folder: {opened.folder.root}")
    click.echo("end it by the interrupt key (Ctrl-C); drafts and finished results are kept")
    try:
        serve(opened, door, own)
    except KeyboardInterrupt:
        raise KeyboardInterrupt("ended; drafts and finished results are kept") from None
