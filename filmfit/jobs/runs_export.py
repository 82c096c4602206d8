"""The records as a table (CSV, which an import reads) or whole (JSON).

Knows columns; does not write files.
"""

import csv
import io
import json
from dataclasses import asdict
from typing import Any

from filmfit.records.series import Deposited, deposited
from filmfit.records.store import Records

FIRST = ("id", "date", "film", "chamber", "source", "process", "recipe", "kind", "time_s", "power_W")
LAST = ("sample", "state", "thickness_nm", "thickness_sigma_nm", "thickness_common_sigma_nm")


def export_csv(store: Records) -> tuple[bytes, int]:
    """Return all runs as CSV (UTF-8) with a heading of run-file keys, and their number."""
    rows = [_flat(one) for one in deposited(store, left_out=True)]
    found = {key for row in rows for key in row}
    middle = sorted(found - {*FIRST, *LAST})
    keys = [key for key in (*FIRST, *middle, *LAST) if key in found]
    out = io.StringIO(newline="")
    writer = csv.DictWriter(out, keys, lineterminator="\n")
    writer.writeheader()
    writer.writerows(rows)
    return out.getvalue().encode(), len(rows)


def export_json(store: Records) -> tuple[bytes, int]:
    """Return everything filed, each run with its revisions, fits and changes, as JSON (UTF-8), and their number."""
    runs = [asdict(store.show(one.id)) for one in deposited(store, left_out=True)]
    whole = {"schema": "filmfit.export/1", "runs": runs}
    text = json.dumps(whole, default=_plain, ensure_ascii=False, allow_nan=False, indent=1) + "\n"
    return text.encode(), len(runs)


def _plain(value: Any) -> Any:
    """Return a date as text, a quantity as a table."""
    return value.isoformat() if hasattr(value, "isoformat") else value.model_dump(mode="json")


def _flat(one: Deposited) -> dict[str, Any]:
    """Return a run as one row."""
    row: dict[str, Any] = {}
    for key, value in one.run.items():
        if key == "flows_sccm":
            row |= {f"flows_sccm.{gas}": flow for gas, flow in value.items()}
        else:
            row[key] = value
    row |= {f"other.{key}": value for key, value in one.conditions.get("other", {}).items()}
    sample = one.conditions.get("sample", {})
    row |= {key: sample[name] for key, name in (("sample", "name"), ("state", "state")) if name in sample}
    depths = (one.thickness_nm, one.sigma_nm, one.common_nm)
    return row | {key: value for key, value in zip(LAST[2:], depths, strict=True) if value is not None}
