"""`filmfit new`: a commented run file to begin with.

Knows where to write; the text stands in runfile/starter.py.
"""

from pathlib import Path

import click


@click.command(epilog="Example: filmfit new K2-0417.toml")
@click.argument("file", default="run.toml", type=click.Path(path_type=Path))
def new(file: Path) -> None:
    """Write a commented starter run file (run.toml); a file that is there already is left alone."""
    from datetime import date

    from filmfit.cli.options import write_whole
    from filmfit.errors import UsageError
    from filmfit.runfile.starter import starter_text

    if file.exists():
        raise UsageError(str(file), "is there already", do="name another file")
    write_whole(file, starter_text(file.stem, date.today()).encode())
    click.echo(f"{file} written: fill it in, then 'filmfit fit {file}'")
