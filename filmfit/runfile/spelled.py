"""The user's spelling turned into the one that is used inside: units in keys, names of processes.

Knows which quantities the trade writes in several units; does not check their values.
"""

from collections.abc import Iterator
from typing import Any, Final, NamedTuple

from filmfit.errors import nearest
from filmfit.runfile.fault import Fault, Key
from filmfit.runfile.process import PROCESSES, process_word
from filmfit.units import SUFFIXES

UNITS: Final = {"time": ("s", "min"), "pressure": ("Pa", "mTorr", "mbar"), "thickness": ("nm", "um", "A")}
STEMS: Final = {"run": ("time", "pressure"), "layer": ("thickness", "time")}


class Written(NamedTuple):
    """A key's path and value as the user wrote them."""

    key: Key
    value: Any


def spellings(table: str) -> list[str]:
    """Return the keys of a table that stand for a quantity with a choice of units.

    Args:
        table: the table's name: "run", "layer", ...
    """
    return [f"{stem}_{unit}" for stem in STEMS.get(table, ()) for unit in UNITS[stem]]


def inside_units(raw: dict[str, Any]) -> tuple[dict[Key, Written], list[Fault]]:
    """Turn every quantity with a choice of units into its inside unit, in place.

    Args:
        raw: the file's tables.

    Returns:
        by inside key, the key and value as written; and the faults.
    """
    written: dict[Key, Written] = {}
    faults: list[Fault] = []
    for table, at in tables(raw):
        for stem in STEMS.get(str(at[0]), ()):
            inside, *others = (f"{stem}_{unit}" for unit in UNITS[stem])
            given = [key for key in (inside, *others) if key in table]
            for key in given[1:]:
                faults.append(Fault((*at, key), f"{given[0]} stands here too", do="keep one of them"))
                del table[key]
            if given and given[0] != inside:
                value = table.pop(given[0])
                table[inside] = _scaled(value, SUFFIXES[given[0].rpartition("_")[2]].factor)
                written[(*at, inside)] = Written((*at, given[0]), value)
                if isinstance(value, dict):
                    written |= {(*at, inside, one): Written((*at, given[0], one), value[one]) for one in value}
    return written, faults


def one_process(raw: dict[str, Any]) -> list[Fault]:
    """Turn the usual spellings of a process into the one word of each, in place; return the faults.

    Args:
        raw: the file's tables.
    """
    faults = []
    for table, at in tables(raw):
        given = table.get("process")
        if at[0] in ("run", "layer") and isinstance(given, str):
            word = process_word(given)
            if word is None:
                hint = nearest(given.lower(), PROCESSES)
                faults.append(Fault((*at, "process"), f"'{given}'", ", ".join(PROCESSES), hint))
            else:
                table["process"] = word
    return faults


def tables(raw: dict[str, Any]) -> Iterator[tuple[dict[str, Any], Key]]:
    """Yield the file's tables with their paths, those of arrays one by one."""
    for name, value in raw.items():
        if isinstance(value, dict):
            yield value, (name,)
        elif isinstance(value, list):
            yield from ((one, (name, number)) for number, one in enumerate(value) if isinstance(one, dict))


def _scaled(value: Any, factor: float) -> Any:
    """Return a number, or each number of a table, in the inside unit; anything else as it is, to be refused later."""
    if isinstance(value, dict):
        return {key: _scaled(one, factor) for key, one in value.items()}
    if isinstance(value, bool) or not isinstance(value, int | float):
        return value
    try:
        return value * factor
    except OverflowError:  # a whole number beyond the floats
        return value
