"""`python -m lamwright.app` is the command `lamwright`."""

from .cli import main

main(prog_name="lamwright")
