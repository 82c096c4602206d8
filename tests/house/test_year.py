"""The invented year: its script makes it, and the records say of it what is true."""

import datetime
import subprocess
import sys

import pytest

from filmfit.jobs.rate import rates
from filmfit.jobs.runs_import import import_runs
from filmfit.jobs.trend import trend
from filmfit.records.edits import Event, tell_event
from filmfit.records.store import Records

BLUNDERS = {"K1-0031", "K1-0077", "K1-0143", "K2-0042", "K2-0090"}


@pytest.fixture(scope="module")
def year(tmp_path_factory, checkout):
    address = str(tmp_path_factory.mktemp("year") / "r.sqlite")
    import_runs(address, checkout / "examples" / "year" / "log.csv")
    with Records(address) as store:
        tell_event(store, Event("K1", datetime.date(2025, 7, 2), "target-changed", "", "ITO target"), "me")
        yield store


def test_the_same_bytes_come_out(tmp_path, checkout):
    script = checkout / "examples" / "year" / "make_log.py"
    subprocess.run([sys.executable, script, tmp_path], check=True, capture_output=True)
    assert (tmp_path / "log.csv").read_bytes() == (checkout / "examples" / "year" / "log.csv").read_bytes()


def test_drifts_rates_and_powers_are_those_of_the_head(year):
    found = {(one.group.chamber, one.group.film): one for one in rates(year).groups}
    assert len(found) == 4
    ito, azo = found["K1", "ITO"], found["K1", "AZO"]
    assert (ito.lives, azo.lives) == (2, 1)
    assert ito.drift_percent_per_kWh.low < -0.3 < ito.drift_percent_per_kWh.high
    assert azo.drift_percent_per_kWh.low < -0.15 < azo.drift_percent_per_kWh.high
    assert ito.dead_time_s.low < 4.0 < ito.dead_time_s.high
    assert ito.exponents["power_W"].low < 0.97 < ito.exponents["power_W"].high
    assert found["K2", "ITO"].rate.low < 180.0 < found["K2", "ITO"].rate.high
    assert found["K2", "Ag"].rate.low < 7.2 < found["K2", "Ag"].rate.high


def test_the_five_blunders_are_named(year):
    groups = rates(year).groups
    assert {run for one in groups for run in one.set_aside} == BLUNDERS
    called = {alarm.run for one in groups for alarm in one.alarms if alarm.chart == "individuals"}
    assert called >= BLUNDERS
    assert len(called - BLUNDERS) <= 3  # of 300 runs at three sigma


def test_the_oxygen_series_has_its_minimum(year):
    found = trend(year, "resistivity_ohm_cm", "flows_sccm.O2", chamber="K1", film="ITO")
    assert found.optimum.kind == "minimum"
    assert found.optimum.x.value == pytest.approx(0.55, abs=0.03)
