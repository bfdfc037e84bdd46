"""The example at the end of each command's `--help`, from the folder of a checkout.

Files that are named are there, folders in `out` are what a line before has made: a test holds both.
"""

import click

_DEMO = "designs/demo_24s4p_arc.toml"
_STUDY = "designs/studies/barriers_by_end_angle.toml"

EXAMPLES: dict[str, tuple[str, ...]] = {
    "assess": (f"lamwright assess {_DEMO} --out out/demo",),
    "compare": (f"lamwright compare {_DEMO} designs/demo_36s4p_straight.toml",),
    "ledger": (
        f"lamwright sweep {_STUDY} --out out/barriers",
        "lamwright ledger out/barriers --where 'passes' --sort -torque_nm",
    ),
    "locked": (f"lamwright locked {_DEMO} --currents 6,12 --out out/locked",),
    "map": (f"lamwright map {_DEMO} --points 9x9 --out out/map",),
    "outline": (
        f"lamwright outline {_DEMO} --out out/outline",
        f"lamwright outline {_DEMO} --ranges",
    ),
    "page": (f"lamwright page {_DEMO}",),
    "point": (f"lamwright point {_DEMO} --i-d 8 --i-q 4 --angle 2.5",),
    "release": (f"lamwright release {_DEMO} --out out/package --date 2026-01-31",),
    "ribs": (f"lamwright ribs {_DEMO} --out out/ribs",),
    "search": (
        "lamwright search designs/studies/torque_against_ripple.toml --out out/front --budget 480",
    ),
    "slopes": (f"lamwright slopes {_DEMO} --out out/slopes",),
    "spread": (f"lamwright spread {_DEMO} --out out/spread",),
    "start": (
        f"lamwright start --stator {_DEMO} --poles 4 --max-speed 6000 --yes --out first.toml",
    ),
    "sweep": (f"lamwright sweep {_STUDY} --out out/barriers",),
    "verify": (
        f"lamwright release {_DEMO} --out out/package",
        "lamwright verify out/package",
    ),
    "winding": (f"lamwright winding {_DEMO}",),
}


def add_examples(group: click.Group) -> None:
    """Put each command's example at the end of its help."""
    for name, command in group.commands.items():
        lines = EXAMPLES.get(name, ())
        if lines:
            # \b keeps the lines as they are: an example that is wrapped cannot be copied.
            command.epilog = "\b\n" + "\n".join(("Example:", *(f"  {line}" for line in lines)))
