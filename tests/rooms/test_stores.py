"""The same promises on SQLite and on PostgreSQL: nothing lost, nothing twice, nothing half there.

The PostgreSQL server is the test's own, on a socket in its folder; where none is installed, the test says so.
"""

import multiprocessing
import os
import shutil
import signal
import sqlite3
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import pytest
from alembic.autogenerate import compare_metadata
from alembic.migration import MigrationContext
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from filmfit.records.bring_in import Incoming, bring_in
from filmfit.records.check import check
from filmfit.records.edits import Event, confirm, events, leave_out, tell_event
from filmfit.records.series import deposited
from filmfit.records.store import Records
from filmfit.records.tables import Base
from filmfit.report.text import run_text, runs_text

PROGRAMS = [
    Path(one) for one in ("/usr/lib/postgresql/17/bin", "/usr/lib/postgresql/16/bin", "/usr/lib/postgresql/15/bin")
]
NOBODY = 65534


@pytest.fixture(scope="session")
def server():
    """Return the socket folder of a server of the test's own, and its port."""
    where = shutil.which("initdb")
    programs = next((one for one in PROGRAMS if (one / "initdb").exists()), Path(where).parent if where else None)
    if programs is None:
        pytest.skip("PostgreSQL is not installed: not run here")
    folder = Path(tempfile.mkdtemp(prefix="filmfit-pg"))
    as_nobody = []
    if os.getuid() == 0:  # the server refuses to run as root
        os.chown(folder, NOBODY, NOBODY)
        as_nobody = ["setpriv", f"--reuid={NOBODY}", f"--regid={NOBODY}", "--clear-groups"]
    data, quiet = (
        folder / "data",
        {"check": True, "stdout": subprocess.DEVNULL, "stderr": subprocess.DEVNULL, "cwd": "/"},
    )
    subprocess.run([*as_nobody, programs / "initdb", "-D", data, "-U", "filmfit", "-A", "trust", "-E", "UTF8"], **quiet)
    control = [*as_nobody, programs / "pg_ctl", "-D", data, "-w", "-m", "fast", "-l", folder / "log"]
    subprocess.run([*control, "-o", f"-k {folder} -c listen_addresses='' -c fsync=off", "start"], **quiet)
    yield folder
    subprocess.run([*control, "stop"], **quiet)
    shutil.rmtree(folder, ignore_errors=True)


@pytest.fixture(params=["sqlite", "postgresql"])
def address(request, tmp_path):
    if request.param == "sqlite":
        yield str(tmp_path / "r.sqlite")
        return
    psycopg = pytest.importorskip("psycopg")
    folder = request.getfixturevalue("server")
    name = f"t{time.time_ns()}"
    with psycopg.connect(host=str(folder), user="filmfit", dbname="postgres", autocommit=True) as connection:
        connection.execute(f"CREATE DATABASE {name}")
    yield f"postgresql+psycopg://filmfit@/{name}?host={folder}"


def row(run, depth=250.0, **keys):
    return Incoming(
        {
            "format": 1,
            "run": {"id": run, "date": "2026-04-17", "film": "ITO", "chamber": "K1", "time_s": 900.0, **keys},
        },
        depth,
        1.0,
    )


def test_the_schema_is_that_of_the_tables(address):
    with Records(address) as records, records._engine.connect() as connection:
        context = MigrationContext.configure(connection, opts={"compare_type": True})
        assert compare_metadata(context, Base.metadata) == []


def test_runs_come_in_once_and_are_corrected(address):
    with Records(address) as store:
        rows = [row(f"R{number:04d}") for number in range(1203)]
        assert {one.what for one in bring_in(store, rows, "0")} == {"new"}
        assert {one.what for one in bring_in(store, rows, "0")} == {"same"}
        bring_in(store, [row("R0001", 240.0)], "1")
        assert confirm(store, "R0001", 1, "me") == 2
        leave_out(store, "R0002", "me", "stuck")
        assert tell_event(store, Event("K1", rows[0].conditions and store.list_runs(1)[0].date, "vented", "n"), "me")
        assert not tell_event(store, Event("K1", store.list_runs(1)[0].date, "vented", "n"), "me")
        assert len(events(store)) == 1
        found = deposited(store, film="ITO", chamber="K1")
        assert len(found) == 1202
        assert found[1].thickness_nm == 250.0
        assert [one.fits for one in store.list_runs(2, "ITO")] == [1, 1]
        assert store.show("R0001").edits[0].action == "confirm"


def test_check_names_what_is_wrong_and_repairs_nothing(address):
    with Records(address) as store:
        bring_in(store, [row("A"), Incoming(row("B").conditions)], "0")
        assert [(one.what, one.runs) for one in check(store)] == [("no usable fit", ("B",))]
        with store._engine.begin() as connection:
            connection.exec_driver_sql("UPDATE runs SET fit = 7 WHERE id = 'A'")
        for _ in range(2):
            assert ("the fit that counts is not there", ("A",)) in [(one.what, one.runs) for one in check(store)]


def write_many(address, worker, seconds, ready, told):
    """Wait for the others, then file runs of one's own and fits of a shared one for a while; put what was acknowledged."""
    done = 0
    with Records(address) as store:
        ready.wait(120)
        until = time.time() + seconds
        while time.time() < until:
            bring_in(store, [row(f"W{worker}-{done}")], "0")
            bring_in(store, [row("shared", 200.0 + worker + done / 1000)], "0")
            done += 1
    told.put((worker, done))


def eight_writers(address, seconds):
    """Let eight processes write at once and look for what they lost."""
    with Records(address):
        pass
    context = multiprocessing.get_context("spawn")
    told = context.Queue()
    ready = context.Barrier(8)
    workers = [context.Process(target=write_many, args=(address, number, seconds, ready, told)) for number in range(8)]
    for one in workers:
        one.start()
    counts = dict(told.get(timeout=seconds + 40) for _ in workers)
    for one in workers:
        one.join()
    assert [one.exitcode for one in workers] == [0] * 8
    with Records(address) as store:
        ids = {one.id for one in store.list_runs()}
        fits = [one.number for one in store.show("shared").fits]
    assert ids == {f"W{worker}-{at}" for worker, count in counts.items() for at in range(count)} | {"shared"}
    assert fits == list(range(1, len(fits) + 1))
    assert sum(counts.values()) >= 8
    return sum(counts.values())


def test_eight_processes_at_once(address):
    eight_writers(address, 2)


@pytest.mark.full
def test_eight_processes_at_once_for_half_a_minute(address):
    print(f"\n{eight_writers(address, 30)} runs by eight processes, none lost: {address.split(':')[0]}")


WRITER = """
import sys
from filmfit.records.bring_in import Incoming, bring_in
from filmfit.records.store import Records
with Records(sys.argv[1]) as store:
    number = 0
    while True:
        run = f"{sys.argv[2]}-{number}"
        rows = [Incoming({"format": 1, "run": {"id": f"{run}-{part}", "date": "2026-04-17", "film": "ITO"}}, 250.0) for part in "ab"]
        bring_in(store, rows, "0")
        print(run, flush=True)
        number += 1
"""


def killed(address, times):
    """Kill a writer again and again; every acknowledged pair of runs must be there, and no half pair."""
    acknowledged = []
    for number in range(times):
        writer = subprocess.Popen(
            [sys.executable, "-c", WRITER, address, f"K{number}"], stdout=subprocess.PIPE, text=True
        )
        acknowledged.append(writer.stdout.readline().strip())
        time.sleep(0.003 * (number % 17))
        writer.send_signal(signal.SIGKILL)
        acknowledged += [line for line in writer.stdout.read().split("\n")[:-1] if line]
        writer.stdout.close()
        writer.wait()
    with Records(address) as store:
        found = {one.id: one.fits for one in store.list_runs()}
    for run in acknowledged:
        assert found.get(f"{run}-a") == found.get(f"{run}-b") == 1
    pairs = {name[:-2] for name in found}
    assert all(f"{pair}-{part}" in found for pair in pairs for part in "ab")
    assert len(acknowledged) >= times


def test_killed_while_writing(address):
    killed(address, 5)


@pytest.mark.full
def test_killed_while_writing_fifty_times(address):
    killed(address, 50)


TEXT = st.text(st.characters(exclude_categories=["Cs"], exclude_characters="\0"), min_size=1, max_size=40).filter(
    str.strip
)


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(film=TEXT, chamber=TEXT, note=TEXT)
def test_names_and_notes_are_data(tmp_path, film, chamber, note):
    with Records(str(tmp_path / "r.sqlite")) as store:
        (done,) = bring_in(store, [row("X", film=film, chamber=chamber)], "0")
        assert done.what in ("new", "changed", "same")
        leave_out(store, "X", note, note)
        (line,) = store.list_runs()
        assert (line.film, line.chamber, line.left_out) == (film, chamber, note)
        assert len(deposited(store, film=film, chamber=chamber, left_out=True)) == 1
        assert runs_text([line]).isprintable() or "\n" in runs_text([line])
        assert note.strip()[:1] in run_text(store.show("X")) or not note.strip()[:1].isprintable()
        leave_out(store, "X", note, None)
    with sqlite3.connect(tmp_path / "r.sqlite") as plain:
        assert plain.execute("SELECT count(*) FROM runs").fetchone() == (1,)
    plain.close()
