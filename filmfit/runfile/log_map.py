"""The map of a laboratory's log: which of its columns is which key, and how it writes dates and numbers.

Knows the map's TOML file; does not read the log.

    format = 1
    decimal = ","                   # default "."
    date_format = "%d.%m.%Y"        # default 2026-04-17
    [columns]                       # key of a run file = heading in the log
    id = "run no."
    time_min = "duration"
    thickness_nm = "d"
    [constants]                     # what is the same in all rows
    chamber = "K2"
"""

import tomllib
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import Field, ValidationError

from filmfit.errors import Faults, FilmfitError, RunFileError, nearest
from filmfit.runfile.keys import Keys


class LogMap(Keys):
    """Which column of a log is what; an empty one suits a heading of run-file keys."""

    format: Literal[1] = 1
    delimiter: Annotated[str, Field(min_length=1, max_length=1)] | None = None
    decimal: Literal[".", ","] = "."
    date_format: str | None = None
    columns: dict[str, str] = Field(default_factory=dict)
    constants: dict[str, Any] = Field(default_factory=dict)


def read_map(path: Path, known: list[str]) -> LogMap:
    """Return a map.

    Args:
        path: the TOML file.
        known: the keys that a column may have.

    Raises:
        Faults: what is wrong with it.
    """
    try:
        raw = tomllib.loads(path.read_text(encoding="utf-8-sig"))
    except OSError as error:
        raise Faults([RunFileError(str(path), f"cannot be read: {error.strerror}")]) from error
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise Faults([RunFileError(path.name, f"not TOML: {error}", do="mend the syntax")]) from error
    try:
        layout = LogMap.model_validate(raw)
    except ValidationError as error:
        details = error.errors(include_url=False)
        raise Faults([_fault(path.name, one["loc"], one["msg"]) for one in details]) from error
    faults: list[FilmfitError] = []
    for table in ("columns", "constants"):
        for key in getattr(layout, table):
            if key not in known and not key.startswith(("flows_sccm.", "other.")):
                hint = nearest(key, known)
                faults.append(RunFileError(f"{path.name}: {table}.{key}", "unknown key", do=hint or "write other.NAME"))
    if faults:
        raise Faults(faults)
    return layout


def _fault(name: str, at: tuple[Any, ...], said: str) -> RunFileError:
    """Return a fault of the map."""
    key = ".".join(str(part) for part in at)
    if said.startswith("Extra inputs"):
        return RunFileError(f"{name}: {key}", "unknown key", ", ".join(LogMap.model_fields))
    return RunFileError(f"{name}: {key}", said[:1].lower() + said[1:])
