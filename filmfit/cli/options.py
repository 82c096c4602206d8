"""Options and small manners that several commands share.

Knows where the records are by default and how JSON leaves; does not know any command.
"""

import json
import os
import sys
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar

import click

DEFAULT_RECORDS = "filmfit-records.sqlite"
Command = TypeVar("Command", bound=Callable[..., Any])


def records_option(command: Command) -> Command:
    """Add --records, also read from FILMFIT_RECORDS."""
    return click.option(
        "--records",
        envvar="FILMFIT_RECORDS",
        default=DEFAULT_RECORDS,
        show_default=True,
        metavar="URL",
        help="Deposition records: a file or a database URL.",
    )(command)


def json_option(command: Command) -> Command:
    """Add --json."""
    return click.option(
        "--json", "json_to", metavar="FILE", help="Write the result as JSON; '-' is standard output, and nothing else."
    )(command)


def write_json(content: Any, to: str) -> None:
    """Write JSON to standard output ('-') or, whole or not at all, to a file."""
    text = json.dumps(content, indent=2, ensure_ascii=False, allow_nan=False) + "\n"
    if to == "-":
        sys.stdout.write(text)
    else:
        write_whole(Path(to), text.encode())


def write_whole(path: Path, content: bytes) -> None:
    """Write a file whole or not at all.

    Raises:
        UsageError: the place cannot be written.
    """
    from filmfit.errors import UsageError

    try:
        handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.")
        try:
            with os.fdopen(handle, "wb") as file:
                file.write(content)
            Path(temporary).chmod(0o644)
            Path(temporary).replace(path)
        except BaseException:
            Path(temporary).unlink(missing_ok=True)
            raise
    except OSError as error:
        raise UsageError(str(path), f"cannot be written: {error.strerror}", do="name another place") from error
