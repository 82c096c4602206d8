"""Amend the conditions of a run in the records.

Knows how KEY=VALUE is understood; the new conditions are checked as a run file's are.
"""

import tomllib
from copy import deepcopy
from typing import Any

from filmfit.errors import UsageError
from filmfit.records.edits import amend, conditions
from filmfit.records.store import Records
from filmfit.runfile.log import checked_run
from filmfit.runfile.spelled import STEMS, UNITS


def amend_run(
    store: Records, run_id: str, words: tuple[str, ...], who: str, because: str
) -> dict[str, tuple[Any, Any]]:
    """Change conditions of a run; the old ones are kept. Return old and new value by key.

    Args:
        store: open records.
        run_id: the run.
        words: KEY=VALUE, the key as in [run] or as other.NAME; an empty value takes the key away.
        who: who changes it.
        because: why.

    Raises:
        UsageError: a word that cannot be understood.
        Faults: a value that a run file may not hold.
        RecordsError: no such run.
    """
    before = conditions(store, run_id)
    new = deepcopy(before)
    for word in words:
        key, sign, text = word.partition("=")
        if not sign or not key.strip():
            raise UsageError(f"'{word}'", "is no change", "KEY=VALUE, for example time_s=900")
        _set(new, key.strip(), text.strip())
    if new["run"].get("id") != run_id:
        raise UsageError("id", "a run keeps its id", do="import it under the other id, and leave this one out")
    new["run"] = checked_run("amend", new["run"])
    changed = {}
    for table in ("run", "other"):
        old_table, new_table = before.get(table, {}), new.get(table, {})
        for key in sorted({*old_table, *new_table}):
            if old_table.get(key) != new_table.get(key):
                changed[f"{table}.{key}"] = (old_table.get(key), new_table.get(key))
    if changed:
        amend(store, run_id, new, changed, who, because)
    return changed


def _set(content: dict[str, Any], key: str, text: str) -> None:
    """Set or take away one key."""
    table, _, name = key.rpartition(".")
    place = content.setdefault("run", {})
    if table == "other":
        place = content.setdefault("other", {})
    elif table == "flows_sccm":
        place = place.setdefault("flows_sccm", {})
    elif table not in ("", "run"):
        raise UsageError(f"'{key}'", "cannot be amended", "a key of [run], other.NAME or flows_sccm.GAS")
    stem = next((one for one in STEMS["run"] if name in [f"{one}_{unit}" for unit in UNITS[one]]), None)
    if stem is not None and table in ("", "run"):
        for unit in UNITS[stem]:
            place.pop(f"{stem}_{unit}", None)
    if text:
        place[name] = _value(text)
    else:
        place.pop(name, None)


def _value(text: str) -> Any:
    """Return a value as TOML would have it; what is no TOML is text."""
    try:
        return tomllib.loads(f"value = {text}")["value"]
    except tomllib.TOMLDecodeError:
        return text
