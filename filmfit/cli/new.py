"""`filmfit new`: a commented run file to begin with.

Knows where to write and which id to begin with; the text stands in runfile/starter.py.
"""

import re
from pathlib import Path

import click

ID_LENGTH = 100


@click.command(epilog="Example: filmfit new K2-0417.toml")
@click.argument("file", default="run.toml", type=click.Path(path_type=Path))
def new(file: Path) -> None:
    """Write a commented starter run file (run.toml); a file that is there already is left alone."""
    import shlex
    from datetime import date

    from filmfit.cli.options import write_new
    from filmfit.runfile.starter import starter_text

    write_new(file, starter_text(run_id(file.stem), date.today()).encode())
    click.echo(f"{file} written: fill it in, then 'filmfit fit {shlex.quote(str(file))}'")


def run_id(stem: str) -> str:
    """Return a run's id after the name of its file: letters, digits, '.', '_' and '-', a letter or digit first."""
    return re.sub(r"[^A-Za-z0-9._-]+", "-", stem).strip("-._")[:ID_LENGTH] or "run"
