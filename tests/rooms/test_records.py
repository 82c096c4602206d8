"""The deposition records on SQLite."""

import sqlite3
from concurrent.futures import ThreadPoolExecutor

import pytest
from alembic.autogenerate import compare_metadata
from alembic.migration import MigrationContext

from filmfit.errors import RecordsError
from filmfit.records.revise import Change, differences
from filmfit.records.store import Records
from filmfit.records.tables import Base, dumps
from filmfit.result import FitSummary, Provenance, Quantity, Result, Results


def result(run="K2-1", answer="usable", depth=251.3):
    got = None if answer == "unusable" else Quantity.normal(depth, 0.6)
    return Result(
        run=run, film="ITO", answer=answer, reasons=(), results=Results(thickness_nm=got, rate_nm_min=got), layers=(),
        instrument={}, alternatives=(), limits={},
        fit=FitSummary(model="m", reduced_chi2=1.0, rms_R=0.001, rms_T=0.001, points=10, free=2, seconds=0.1),
        provenance=Provenance(filmfit="0", packages={}, run_file="sha256:0", files={}, tmm_difference=None),
    )  # fmt: skip


def conditions(run="K2-1", **keys):
    return {
        "format": 1,
        "run": {"id": run, "date": "2026-04-17", "film": "ITO", "chamber": "K2", "time_s": 900.0, **keys},
    }


@pytest.fixture
def address(tmp_path):
    return str(tmp_path / "r.sqlite")


def test_a_fit_is_appended_and_unchanged_conditions_make_no_revision(address):
    with Records(address) as records:
        first = records.file_fit(conditions(), "0", result())
        second = records.file_fit(conditions(), "0", result(depth=250.0))
        assert (first.fit, second.fit, second.revision, second.changes) == (1, 2, 1, ())
        shown = records.show("K2-1")
    assert [fit.thickness_nm.value for fit in shown.fits] == [251.3, 250.0]
    assert shown.fits[0].result["schema"] == "filmfit.result/1"


def test_changed_conditions_make_a_revision_and_the_old_ones_are_kept(address):
    with Records(address) as records:
        records.file_fit(conditions(), "0", result())
        filed = records.file_fit(conditions(time_s=960.0, chamber="K3"), "1", result())
        assert filed.revision == 2
        assert filed.changes == (Change("run.chamber", "K2", "K3"), Change("run.time_s", 900.0, 960.0))
        shown = records.show("K2-1")
        assert shown.conditions["run"]["chamber"] == "K3"
        assert [number for number, *_ in shown.revisions] == [1, 2]
        assert records.list_runs()[0].chamber == "K3"


def test_the_list_shows_the_latest_usable_fit_newest_run_first(address):
    with Records(address) as records:
        records.file_fit(conditions("A"), "0", result("A", depth=100.0))
        records.file_fit(conditions("A"), "0", result("A", "unusable"))
        records.file_fit(conditions("B", date="2026-05-01"), "0", result("B", "unusable"))
        rows = records.list_runs()
        assert [row.id for row in rows] == ["B", "A"]
        assert (rows[0].answer, rows[0].thickness_nm) == ("unusable", None)
        assert (rows[1].answer, rows[1].thickness_nm.value, rows[1].fits) == ("usable", 100.0, 2)
        assert [row.id for row in records.list_runs(last=1)] == ["B"]
        assert records.list_runs(film="AZO") == ()


def test_differences_by_dotted_key():
    old = {"a": {"b": 1, "c": [1, 2]}, "d": 1}
    new = {"a": {"b": 1, "c": [1, 3]}, "e": None, "f": 2}
    assert differences(old, new) == (Change("a.c", [1, 2], [1, 3]), Change("d", 1, None), Change("f", None, 2))


def test_the_schema_is_that_of_the_tables(address):
    with Records(address) as records, records._engine.connect() as connection:
        context = MigrationContext.configure(connection, opts={"compare_type": True})
        assert compare_metadata(context, Base.metadata) == []


def test_the_file_is_safe_for_several_writers(address):
    with Records(address) as records:
        records.file_fit(conditions(), "0", result())
    with sqlite3.connect(address) as plain:
        assert plain.execute("PRAGMA journal_mode").fetchone() == ("wal",)
        assert plain.execute("PRAGMA integrity_check").fetchone() == ("ok",)
        names = [row[0] for row in plain.execute("SELECT name FROM sqlite_master WHERE type = 'table'")]
    plain.close()
    assert {"runs", "revisions", "fits", "alembic_version"} <= set(names)


def test_four_writers_lose_nothing(address):
    with Records(address):
        pass

    def write(worker):
        with Records(address) as records:
            for number in range(12):
                records.file_fit(conditions(f"W{worker}-{number % 3}"), "0", result(f"W{worker}-{number % 3}"))
                records.file_fit(conditions("shared"), "0", result("shared"))

    with ThreadPoolExecutor(4) as pool:
        list(pool.map(write, range(4)))
    with Records(address) as records:
        rows = {row.id: row.fits for row in records.list_runs()}
        numbers = [fit.number for fit in records.show("shared").fits]
    assert rows["shared"] == 48
    assert numbers == list(range(1, 49))
    assert sum(count for name, count in rows.items() if name != "shared") == 48


def test_a_failed_filing_leaves_nothing(address, monkeypatch):
    with Records(address) as records:
        records.file_fit(conditions(), "0", result())
        broken = conditions("B")
        broken["other"] = {"x": float("nan")}
        with pytest.raises(Exception, match=r"JSON|nan|cannot be used"):
            records.file_fit(broken, "0", result("B"))
        assert [row.id for row in records.list_runs()] == ["K2-1"]


def test_no_nan_in_json():
    with pytest.raises(ValueError, match="not JSON compliant"):
        dumps({"x": float("inf")})


def test_an_empty_file_becomes_records_and_a_second_opening_changes_nothing(tmp_path):
    path = tmp_path / "r.sqlite"
    path.touch()
    with Records(str(path)) as records:
        records.file_fit(conditions(), "0", result())
    with Records(f"sqlite:///{path}") as records:
        assert len(records.list_runs()) == 1


@pytest.mark.parametrize(
    ("prepare", "sentence"),
    [
        (lambda p: p.mkdir(), "{path}: is a folder; name a file in it"),
        (
            lambda p: p.write_text("my precious notes, not a database"),
            "{path}: is not a database; name another file with --records",
        ),
        (lambda p: _foreign(p), "{path}: is another program's database; name another file with --records"),
        (
            lambda p: _newer(p),
            "{path}: was written by a newer filmfit (schema 9999); allowed: schema 0002 or older; upgrade filmfit",
        ),
    ],
)
def test_refusals(tmp_path, prepare, sentence):
    path = tmp_path / "r.sqlite"
    prepare(path)
    before = path.read_bytes() if path.is_file() else b""
    with pytest.raises(RecordsError) as caught:
        Records(str(path))
    assert str(caught.value) == sentence.format(path=path)
    assert (path.read_bytes() if path.is_file() else b"") == before


def test_refused_addresses(tmp_path):
    for address, sentence in (
        (
            str(tmp_path / "no" / "r.sqlite"),
            f"{tmp_path / 'no' / 'r.sqlite'}: there is no folder '{tmp_path / 'no'}'; make it, or name another file",
        ),
        ("nosuch://x/y", "nosuch://x/y: no driver for 'nosuch'; install it, or give a file name"),
    ):
        with pytest.raises(RecordsError) as caught:
            Records(address)
        assert str(caught.value) == sentence


def test_an_unknown_run_names_the_nearest(address):
    with Records(address) as records:
        records.file_fit(conditions(), "0", result())
        with pytest.raises(RecordsError) as caught:
            records.show("K2-2")
        assert str(caught.value) == f"{address}: no run 'K2-2'; did you mean 'K2-1'?"


def _foreign(path):
    plain = sqlite3.connect(path)
    plain.execute("PRAGMA journal_mode=WAL")
    plain.execute("CREATE TABLE customers (id INTEGER)")
    plain.commit()
    plain.close()


def _newer(path):
    with Records(str(path)):
        pass
    plain = sqlite3.connect(path)
    plain.execute("UPDATE alembic_version SET version_num = '9999'")
    plain.commit()
    plain.close()
