"""Options and small manners that several commands share.

Knows where the records are by default, how a fault is told and how JSON and files leave; does not know any command.
"""

import os
import re
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar

import click

DEFAULT_RECORDS = "filmfit-records.sqlite"
SQLITE_FILE = re.compile(r"sqlite(?:\+\w+)?:///(?P<path>[^?]+)")
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


def records_path(records: str) -> Path:
    """Return the file that holds the records; where a server holds them, the default name in the current folder."""
    if "://" not in records:
        return Path(records)
    found = SQLITE_FILE.match(records)
    return Path(found["path"] if found else DEFAULT_RECORDS)


def tell(fault: Exception) -> None:
    """Tell a fault, or several, on standard error, a line each."""
    from filmfit.report.plain import plain

    for line in str(fault).splitlines():
        click.echo(plain(line), err=True)


def write_json(content: Any, to: str) -> None:
    """Write JSON (UTF-8, as RFC 8259 asks) to standard output ('-') or, whole or not at all, to a file."""
    import json

    text = json.dumps(content, indent=2, ensure_ascii=False, allow_nan=False) + "\n"
    whole = text.encode("utf-8", "replace")  # a file's name may hold bytes that are no text
    if to == "-":
        sys.stdout.buffer.write(whole)
    else:
        write_whole(Path(to), whole)


def must_be_writable(path: Path) -> None:
    """Refuse a place for a file before anything is computed.

    Raises:
        UsageError: it is a folder, lies in none, or must not be written.
    """
    from filmfit.errors import UsageError

    if path.is_dir():
        raise UsageError(str(path), "is a folder", do="name a file in it")
    if not path.parent.is_dir():
        raise UsageError(str(path), f"there is no folder '{path.parent}'", do="make it, or name another file")
    if not os.access(path.parent, os.W_OK):
        raise UsageError(str(path), "cannot be written: Permission denied", do="name another place")


def write_whole(path: Path, content: bytes) -> None:
    """Write a file whole or not at all, over one that may be there.

    Raises:
        UsageError: the place cannot be written.
    """
    from filmfit.errors import UsageError

    beside = path.with_name(f".{path.name}.{os.urandom(4).hex()}")
    try:
        try:
            beside.write_bytes(content)
            beside.replace(path)
        except BaseException:
            beside.unlink(missing_ok=True)
            raise
    except OSError as error:
        raise UsageError(str(path), f"cannot be written: {error.strerror}", do="name another place") from error


def write_new(path: Path, content: bytes) -> None:
    """Write a file that was not there, whole or not at all; one that is there, even as a dead link, is left alone.

    Raises:
        UsageError: it is there already, or the place cannot be written.
    """
    from filmfit.errors import UsageError

    try:
        with path.open("xb") as file:
            try:
                file.write(content)
                file.flush()
            except BaseException:
                path.unlink()
                raise
    except FileExistsError as error:
        raise UsageError(str(path), "is there already", do="name another file") from error
    except OSError as error:
        raise UsageError(str(path), f"cannot be written: {error.strerror}", do="name another place") from error
