"""A laboratory's log comes in, is corrected by persons, and goes out; nothing is lost, nothing twice."""

import json
import sqlite3

import pytest
from click.testing import CliRunner

from filmfit.cli.main import cli
from filmfit.errors import Faults, FilmfitError
from filmfit.jobs.pieces import pieces
from filmfit.jobs.runs_edit import amend_run
from filmfit.jobs.runs_import import import_runs
from filmfit.records.edits import backup, confirm, leave_out
from filmfit.records.series import deposited
from filmfit.records.store import Records

HEAD = "id,date,film,chamber,source,process,time_s,power_W,thickness_nm,thickness_sigma_nm"
LOG = f"{HEAD}\nA1,2026-01-05,ITO,K1,T7,DC magnetron sputtering,900,400,250.1,1\nA2,2026-01-06,ITO,K1,T7,dc,900,400,249.9,1\n"


@pytest.fixture
def address(tmp_path):
    return str(tmp_path / "r.sqlite")


@pytest.fixture
def log(tmp_path):
    path = tmp_path / "log.csv"
    path.write_text(LOG)
    return path


def counts(done):
    return tuple(done.count(what) for what in ("new", "changed", "same"))


def test_import_is_idempotent_and_a_dry_run_files_nothing(address, log):
    assert counts(import_runs(address, log, dry_run=True)) == (2, 0, 0)
    with Records(address) as records:
        assert records.list_runs() == ()
    assert counts(import_runs(address, log)) == (2, 0, 0)
    assert counts(import_runs(address, log)) == (0, 0, 2)
    with Records(address) as records:
        rows = records.list_runs()
        assert [(row.id, row.fits, row.process) for row in rows] == [("A2", 1, "dc sputter"), ("A1", 1, "dc sputter")]
        assert rows[1].rate_nm_min.value == pytest.approx(250.1 / 15)


def test_a_changed_row_makes_a_revision_and_a_new_thickness_a_fit(address, log):
    import_runs(address, log)
    log.write_text(LOG.replace("900,400,250.1", "960,400,251.1"))
    done = import_runs(address, log)
    assert counts(done) == (0, 1, 1)
    (changed,) = [one for one in done.runs if one.changes]
    assert [(c.key, c.old, c.new) for c in changed.changes] == [
        ("run.time_s", 900.0, 960.0),
        ("thickness_nm", 250.1, 251.1),
    ]
    with Records(address) as records:
        shown = records.show("A1")
        assert [fit.thickness_nm.value for fit in shown.fits] == [250.1, 251.1]
        assert records.list_runs()[1].thickness_nm.value == 251.1


@pytest.mark.parametrize(
    ("row", "sentence"),
    [
        ("A3,2026-13-01,ITO,K1,T7,dc,900,400,1,1", "log.csv:4: date: '2026-13-01'; allowed: a date as 2026-04-17"),
        ("A3,2026-01-07,ITO,K1,T7,dc,1e3x,400,1,1", "log.csv:4: time_s: '1e3x'; allowed: a number"),
        ("A3,2026-01-07,ITO,K1,T7,dc,-5,400,1,1", "log.csv:4: time_s: -5.0; allowed: more than 0"),
        ("A3,2026-01-07,ITO,K1,T7,dc,900,400,nan,1", "log.csv:4: thickness_nm: 'nan'; allowed: a number"),
        ("A3,2026-01-07,ITO,K1,T7,dc,900,400,-1,1", "log.csv:4: thickness_nm: -1; allowed: more than 0"),
        ("A1,2026-01-07,ITO,K1,T7,dc,900,400,1,1", "log.csv:4: id: 'A1' stands in line 2 too; give each run its own id"),
        ("A3,2026-01-07,,K1,T7,dc,900,400,1,1", "log.csv:4: film: is missing; add film"),
        ("A3,2026-01-07,ITO,K1,T7,dcc,900,400,1,1,9,9", "log.csv:4: 12 cells under 10 headings; quote a cell that holds the delimiter"),
    ],
)  # fmt: skip
def test_one_bad_row_and_nothing_is_filed(address, log, row, sentence):
    log.write_text(LOG + row + "\n")
    with pytest.raises(Faults) as caught:
        import_runs(address, log)
    assert str(caught.value) == sentence
    with Records(address) as records:
        assert records.list_runs() == ()


def test_a_map_turns_units_decimals_and_dates_and_keeps_unknown_columns(address, tmp_path):
    log = tmp_path / "log.csv"
    log.write_bytes("Lauf;Tag;Dauer;Druck;d;Gerät\n7;17.04.2026;1,5;3;0,25;x=1\n".encode("cp1252"))
    layout = tmp_path / "map.toml"
    layout.write_text(
        'format = 1\ndecimal = ","\ndate_format = "%d.%m.%Y"\n[columns]\nid = "Lauf"\ndate = "Tag"\n'
        'time_min = "Dauer"\npressure_mTorr = "Druck"\nthickness_um = "d"\n[constants]\nfilm = "AZO"\nchamber = "K2"\n'
    )
    assert counts(import_runs(address, log, layout)) == (1, 0, 0)
    with Records(address) as records:
        (run,) = deposited(records)
    assert run.run["time_s"] == 90.0
    assert run.run["pressure_Pa"] == pytest.approx(0.3999671)  # 3 mTorr
    assert run.thickness_nm == pytest.approx(250.0)
    assert run.conditions["other"] == {"Gerät": "x=1"}


def test_an_amendment_keeps_the_old_value_and_the_same_log_does_not_undo_it(address, log):
    import_runs(address, log)
    with Records(address) as records:
        assert amend_run(records, "A1", ("time_min=16",), "zoe", "shutter log") == {"run.time_s": (900.0, 960.0)}
        with pytest.raises(Faults, match="time_s"):
            amend_run(records, "A1", ("time_s=-1",), "zoe", "")
    assert counts(import_runs(address, log)) == (0, 0, 2)
    with Records(address) as records:
        shown = records.show("A1")
    assert shown.conditions["run"]["time_s"] == 960.0
    (edit,) = shown.edits
    assert (edit.who, edit.key, edit.old, edit.new, edit.because) == ("zoe", "run.time_s", 900.0, 960.0, "shutter log")


def test_confirm_and_leave_out(address, log):
    import_runs(address, log)
    log.write_text(LOG.replace("250.1", "251.1"))
    import_runs(address, log)
    with Records(address) as records:
        assert confirm(records, "A1", 1, "zoe") == 2
        with pytest.raises(FilmfitError) as caught:
            confirm(records, "A1", 3, "zoe")
        assert str(caught.value) == f"{address}: run 'A1' has no fit 3; allowed: 1, 2"
        leave_out(records, "A2", "zoe", "shutter stuck")
        (one,) = deposited(records)
        assert (one.id, one.thickness_nm) == ("A1", 250.1)
        leave_out(records, "A2", "zoe", None)
        assert len(deposited(records)) == 2
        assert [edit.action for edit in records.show("A2").edits] == ["leave-out", "take-in"]


def test_states_of_a_run_stand_side_by_side_and_the_run_counts_once(address, tmp_path):
    log = tmp_path / "log.csv"
    log.write_text(
        "id,date,film,time_s,sample,state,thickness_nm,thickness_sigma_nm\n"
        "A1,2026-01-05,ITO,900,centre,as-deposited,250,3\nA1,2026-01-05,ITO,900,centre,annealed,246,4\n"
        "A1,2026-01-05,ITO,900,edge,as-deposited,240,3\n"
    )
    import_runs(address, log)
    assert counts(import_runs(address, log)) == (0, 0, 3)
    with Records(address) as records:
        (run,) = deposited(records)
        assert run.thickness_nm == 250.0
        found = pieces(records.show("A1"))
    assert [(one.sample, one.state) for one in found] == [
        ("centre", "as-deposited"),
        ("centre", "annealed"),
        ("edge", "as-deposited"),
    ]
    assert found[0].difference_nm is None
    assert (found[1].difference_nm.value, found[1].difference_nm.sigma) == (-4.0, 5.0)


def test_export_comes_back_the_same(address, log, tmp_path):
    import_runs(address, log)
    run = CliRunner(env={"FILMFIT_RECORDS": address})
    out, whole = tmp_path / "o.csv", tmp_path / "o.json"
    assert run.invoke(cli, ["runs", "export", str(out)], catch_exceptions=False).exit_code == 0
    assert run.invoke(cli, ["runs", "export", str(whole)], catch_exceptions=False).exit_code == 0
    assert counts(import_runs(address, out)) == (0, 0, 2)
    assert [one["id"] for one in json.loads(whole.read_text())["runs"]] == ["A1", "A2"]


def test_a_backup_under_an_open_writer_is_whole(address, log, tmp_path):
    import_runs(address, log)
    writer = sqlite3.connect(address)
    writer.execute("BEGIN IMMEDIATE")
    writer.execute("UPDATE runs SET film = 'half done'")
    backup(tmp_path / "r.sqlite", tmp_path / "b.sqlite")
    writer.rollback()
    writer.close()
    with Records(str(tmp_path / "b.sqlite")) as records:
        assert [row.film for row in records.list_runs()] == ["ITO", "ITO"]


def test_a_file_of_the_first_schema_is_brought_up_with_its_rows(address):
    from alembic import command
    from alembic.config import Config
    from sqlalchemy import create_engine

    import filmfit.records.engine as engine

    config = Config()
    config.set_main_option("script_location", str(engine.Path(engine.__file__).parent / "migrations"))
    old = create_engine(f"sqlite:///{address}")
    with old.connect() as connection, connection.begin():
        config.attributes["connection"] = connection
        command.upgrade(config, "0001")
        told = '{"format": 1, "run": {"id": "X", "date": "2026-01-01", "film": "ITO"}, "sample": {"name": "edge"}}'
        now = "2026-01-01 00:00:00"
        connection.exec_driver_sql("INSERT INTO runs VALUES ('X','2026-01-01','ITO','-','-','-',?)", (now,))
        connection.exec_driver_sql("INSERT INTO revisions VALUES (1,'X',1,?,'[]','0',?)", (told, now))
        for number, answer in ((1, "usable"), (2, "unusable")):
            connection.exec_driver_sql(
                "INSERT INTO fits VALUES (?,'X',1,?,?,250,1,248,252,NULL,NULL,NULL,NULL,'{}',?)",
                (number, number, answer, now),
            )
    old.dispose()
    with Records(address) as records:
        (row,) = records.list_runs()
        assert (row.id, row.fits, row.thickness_nm.value) == ("X", 2, 250.0)
        assert records.show("X").fits[0].sample == "edge"
