"""Bring a laboratory's log into the records.

Knows the order: map, log, records; either all runs are filed or none.
"""

from dataclasses import dataclass
from pathlib import Path

from filmfit.records.bring_in import BroughtIn, Incoming, bring_in
from filmfit.records.store import Records
from filmfit.runfile.log import known_columns, read_log
from filmfit.runfile.log_map import LogMap, read_map


@dataclass(frozen=True)
class Imported:
    """What an import did, or in a dry run would do, and what a person should know of the log."""

    runs: tuple[BroughtIn, ...]
    notes: tuple[str, ...]

    def count(self, what: str) -> int:
        """Return how many runs were new, changed or same."""
        return sum(one.what == what for one in self.runs)


def import_runs(records: str, log: Path, log_map: Path | None = None, dry_run: bool = False) -> Imported:
    """File all runs of a log, or none; a second time files nothing.

    Args:
        records: file or address of the records.
        log: delimited text, one run a row.
        log_map: TOML file that says which column is what.
        dry_run: only tell what would be filed.

    Raises:
        Faults: what is wrong with the map or the log, by line and column.
        RecordsError: the records cannot be used.
    """
    layout = LogMap() if log_map is None else read_map(log_map, known_columns())
    read = read_log(log, layout)
    rows = [Incoming(one.conditions, one.thickness_nm, one.sigma_nm, one.common_nm) for one in read.rows]
    with Records(records) as store:
        return Imported(bring_in(store, rows, read.sha256, dry_run), read.notes)
