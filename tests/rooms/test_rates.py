"""Rates, the next run and trends from records: what a group says, what it keeps quiet about."""

import datetime

import numpy as np
import pytest

from filmfit.errors import FilmfitError
from filmfit.jobs.next_run import Wanted, next_run
from filmfit.jobs.rate import rates
from filmfit.jobs.rate_told import rates_json
from filmfit.jobs.trend import trend
from filmfit.rates.law import Series, model
from filmfit.records.bring_in import Incoming, bring_in
from filmfit.records.edits import Event, tell_event
from filmfit.records.store import Records


@pytest.fixture
def store(tmp_path):
    with Records(str(tmp_path / "r.sqlite")) as records:
        yield records


def day(number):
    return (datetime.date(2026, 1, 1) + datetime.timedelta(number)).isoformat()


def fill(store, depths, sigma=None, common=None, other=(), kind=None, prefix="R", **keys):
    """File runs; a key's value may be a list."""
    rows = []
    for at, depth in enumerate(depths):
        mine = {name: value[at] if isinstance(value, list) else value for name, value in keys.items()}
        mine = {name: value for name, value in mine.items() if value is not None}
        run = {"id": f"{prefix}{at:03d}", "date": day(at), "film": "ITO", "chamber": "K1", "source": "T1", "process": "dc sputter",
               **({"kind": kind} if kind else {}), **mine}  # fmt: skip
        run = {name: value for name, value in run.items() if value != ""}
        more = {name: value[at] for name, value in dict(other).items()}
        rows.append(
            Incoming({"format": 1, "run": run, **({"other": more} if more else {})}, float(depth), sigma, common)
        )
    bring_in(store, rows, "0")


def falling(n=60, seed=1, scatter=0.004, drift=-0.003, dead=4.0):
    rng = np.random.default_rng(seed)
    wear = np.round(np.arange(n) * 0.6, 3)
    time = np.resize([600.0, 900.0, 1200.0], n)
    depth = 0.28 * (1 + drift * wear) * (time - dead) * (1 + scatter * rng.standard_normal(n))
    return depth, {"time_s": time.tolist(), "source_energy_kWh": wear.tolist(), "power_W": 400.0}


def test_a_group_in_the_words_of_the_contract(store):
    depth, keys = falling()
    fill(store, depth, **keys)
    (group,) = rates_json(rates(store))["groups"]
    assert (group["chamber"], group["source"], group["film"], group["process"]) == ("K1", "T1", "ITO", "dc sputter")
    assert group["runs"] == 60
    truth = 0.28 * 60 * (1 - 0.003 * 35.4)
    assert group["rate_nm_min"]["low"] < truth < group["rate_nm_min"]["high"]
    assert group["rate_nm_min"]["value"] == pytest.approx(truth, rel=0.005)
    assert group["rate_nm_min_per_kW"]["value"] == pytest.approx(group["rate_nm_min"]["value"] / 0.4)
    assert group["dead_time_s"]["low"] < 4.0 < group["dead_time_s"]["high"]
    assert group["drift_percent_per_kWh"]["low"] < -0.3 < group["drift_percent_per_kWh"]["high"] < 0


def test_no_dead_time_without_different_times_and_no_drift_without_source_energy(store):
    depth, _ = falling()
    fill(store, depth[:20] / depth[:20] * 250 * (1 + 0.01 * np.sin(np.arange(20))), time_s=900.0)
    (group,) = rates_json(rates(store))["groups"]
    assert group["dead_time_s"] is None
    assert group["drift_percent_per_kWh"] is None
    assert group["exponents"] == {}


def test_blunders_are_named_and_do_not_move_the_rate(store):
    depth, keys = falling()
    for at in (7, 30, 44):
        depth[at] *= 0.8
    fill(store, depth, **keys)
    (group,) = rates_json(rates(store))["groups"]
    assert {"R007", "R030", "R044"} == set(group["set_aside"])
    assert {"R007", "R030", "R044"} <= {one["run"] for one in group["alarms"] if one["chart"] == "individuals"}
    assert group["rate_nm_min"]["value"] == pytest.approx(0.28 * 60 * (1 - 0.003 * 35.4), rel=0.005)


def test_the_falling_series_of_the_handbook_kind_raises_a_trend_alarm(store):
    fill(
        store,
        [one * 600 for one in (0.482, 0.479, 0.481, 0.476, 0.478, 0.474, 0.475, 0.471, 0.473, 0.469)],
        time_s=600.0,
    )
    (group,) = rates_json(rates(store))["groups"]
    assert "trend" in {one["chart"] for one in group["alarms"]}
    assert "individuals" not in {one["chart"] for one in group["alarms"]}
    (group,) = rates_json(rates(store, target_nm_min=28.8))["groups"]
    assert "ewma" in {one["chart"] for one in group["alarms"]}


def test_missing_sources_are_their_own_group_and_reactive_modes_are_not_mixed(store):
    fill(store, [250.0] * 4, time_s=900.0, source="", prefix="A")
    fill(store, [250.0] * 4, time_s=900.0, prefix="B")
    fill(store, [250.0] * 4, time_s=900.0, target_mode="oxide", prefix="C")
    found = rates_json(rates(store))["groups"]
    assert [(one["source"], one["target_mode"], one["runs"]) for one in found] == [
        ("-", None, 4),
        ("T1", None, 4),
        ("T1", "oxide", 4),
    ]


def test_a_target_change_begins_a_new_life_and_a_vent_a_segment(store):
    depth, keys = falling(60)
    depth[30:] *= 1.3
    keys["source_energy_kWh"][30:] = keys["source_energy_kWh"][:30]
    fill(store, depth, **keys)
    tell_event(store, Event("K1", datetime.date(2026, 1, 31), "target-changed", ""), "me")
    tell_event(store, Event("K1", datetime.date(2026, 2, 15), "vented", ""), "me")
    tell_event(store, Event("K2", datetime.date(2026, 2, 15), "target-changed", ""), "me")
    tell_event(store, Event("K1", datetime.date(2026, 2, 10), "target-changed", "", "T2"), "me")
    (group,) = rates_json(rates(store))["groups"]
    assert (group["target_lives"], group["segments"], group["runs"], group["runs_in_law"]) == (2, 2, 60, 30)


def test_common_error_does_not_shrink_with_the_number_of_runs(store):
    depth, keys = falling()
    fill(store, depth, sigma=2.6, common=2.5, **keys)
    (group,) = rates_json(rates(store))["groups"]
    share = 2.5 / np.median(depth)
    assert group["rate_nm_min"]["sigma"] / group["rate_nm_min"]["value"] > 0.95 * share


def test_an_alarm_that_a_control_plate_shares_is_the_instruments(store):
    rng = np.random.default_rng(5)
    made, plates = 250 + rng.normal(size=30), 120 + 0.3 * rng.normal(size=30)
    made[20] += 20
    plates[20] += 6
    made[10] += 20
    fill(store, made, time_s=900.0)
    fill(store, plates, kind="control-plate", prefix="P")
    told = rates_json(rates(store))
    kinds = {one["run"]: one["kind"] for one in told["groups"][0]["alarms"] if one["chart"] == "individuals"}
    assert (kinds["R020"], kinds["R010"]) == ("instrument", "process")
    assert told["groups"][0]["runs"] == 30
    assert {"run": "P020", "chart": "individuals", "kind": "instrument"} in told["control_plates"][0]["alarms"]


def test_new_tooling_rests_on_the_runs_since_the_last_edit(store):
    tooling, indicated = [100.0] * 3 + [132.0] * 3, [200.0] * 3 + [155.0, 155.0, 155.0]
    fill(
        store,
        [148.0] * 6,
        time_s=90.0,
        crystal_nm=indicated,
        crystal_tooling_percent=tooling,
        step_nm=[148.0] * 3 + [147.0, 148.0, 149.0],
    )
    (group,) = rates_json(rates(store))["groups"]
    assert group["crystal_tooling_percent"]["value"] == pytest.approx(126.03870968, abs=1e-8)
    # sd 1 nm of 3: 4.3027 / sqrt(3) nm, Student's factor of two degrees
    assert group["crystal_tooling_percent"]["high"] == pytest.approx(
        126.03870968 * (1 + 4.30265 / 3**0.5 / 148), rel=1e-5
    )


def test_in_line_runs_have_a_dynamic_rate(store):
    fill(store, [450.0, 451.0, 449.0, 450.5], carrier_speed_m_min=1.2, passes=3)
    (group,) = rates_json(rates(store))["groups"]
    assert group["rate_nm_min"] is None
    assert group["dynamic_rate_nm_m_min"]["value"] == pytest.approx(180.0, rel=2e-3)
    found = next_run(store, Wanted("ITO", 480.0, passes=3))
    assert 3 / found.found.exposure.value == pytest.approx(180.0 * 3 / 480, rel=3e-3)


def test_next_time_hits_the_thickness_and_stable_processes_are_left_alone(store):
    depth, keys = falling()
    fill(store, depth, **keys)
    found = next_run(store, Wanted("ITO", 200.0))
    truth = 4 + 200 / (0.28 * (1 - 0.003 * 35.4))
    assert found.found.exposure.low < truth < found.found.exposure.high
    assert not found.found.keep
    last = float(0.28 * (1 - 0.003 * 35.4) * 1196)
    kept = next_run(store, Wanted("ITO", last * 1.0005))
    assert (kept.found.keep, kept.found.exposure.value) == (True, 1200.0)
    assert 0.9 < kept.found.within <= 1.0
    assert len(kept.runs) == 60


@pytest.mark.parametrize(
    ("wanted", "sentence"),
    [
        (Wanted("ITO", 600.0), r"filmfit next: 24\d\d s lies outside the recorded 600 to 1200 s, by 10\d %; deposit a run nearer to it, or give --extrapolate"),
        (Wanted("ITO", 200.0, power_W=500.0), r"filmfit next: 500 W: the runs, of 400 W at last, do not show how the rate goes with power; deposit .*"),
        (Wanted("ITO", 200.0, source_energy_kWh=90.0), r"filmfit next: 90 kWh lies outside the recorded 0 to 35.4 kWh, by 54.6 kWh; deposit .*"),
        (Wanted("ITOO", 200.0), r".*: no runs of film 'ITOO' with thickness and time there; did you mean 'ITO'\?"),
    ],
)  # fmt: skip
def test_no_extrapolation_unless_told_to(store, wanted, sentence):
    depth, keys = falling()
    fill(store, depth, **keys)
    with pytest.raises(FilmfitError, match=f"^{sentence}$"):
        next_run(store, wanted)
    if wanted.film == "ITO":
        far = next_run(store, Wanted(**{**wanted.__dict__, "extrapolate": True}))
        assert any("outside" in note or "proportional" in note for note in far.notes)


def test_an_oxygen_series_has_its_minimum_and_a_monotone_one_has_none(store):
    rng = np.random.default_rng(6)
    flow = np.round(np.tile(np.linspace(0.2, 1.0, 9), 2), 3)
    rho = 4e-4 * np.exp(1.5 * (flow - 0.55) ** 2 / 0.16) * (1 + 0.02 * rng.standard_normal(18))
    fill(
        store,
        [250.0] * 18,
        time_s=900.0,
        flows_sccm=[{"O2": float(one)} for one in flow],
        other={"resistivity_ohm_cm": rho.tolist()},
    )
    found = trend(store, "resistivity_ohm_cm", "flows_sccm.O2")
    assert found.optimum.kind == "minimum"
    assert found.optimum.x.low < 0.55 < found.optimum.x.high
    assert found.optimum.x.high - found.optimum.x.low < 0.1
    assert len(found.points) == 18
    none = trend(store, "flows_sccm.O2", "resistivity_ohm_cm")
    assert none.optimum is None
    assert none.reason
    with pytest.raises(
        FilmfitError, match=r"^--of: no run has 'resistivty_ohm_cm'; did you mean 'resistivity_ohm_cm'\?$"
    ):
        trend(store, "resistivty_ohm_cm", "flows_sccm.O2")


def test_derivatives_of_the_law_are_those_of_differences():
    rng = np.random.default_rng(7)
    made = Series(np.ones(6), np.zeros(6), rng.uniform(300, 900, 6), np.array([0, 0, 0, 1, 1, 1]), rng.uniform(0, 30, 6),
                  {"power_W": rng.uniform(200, 400, 6)}, True)  # fmt: skip
    names, middle = ("level 0", "level 1", "wear", "power_W", "dead"), {"wear": 15.0, "power_W": 300.0}
    values = np.array([-1.2, -1.1, -0.004, 0.9, 5.0])
    _, gradient = model(made, names, values, middle)
    for at in range(values.size):
        step = np.zeros(values.size)
        step[at] = 1e-6
        difference = (
            model(made, names, values + step, middle)[0] - model(made, names, values - step, middle)[0]
        ) / 2e-6
        assert gradient[:, at] == pytest.approx(difference, rel=1e-5, abs=1e-8)


def test_pictures_are_the_same_bytes_twice(store):
    from filmfit.report.rate_figures import draw_rate, draw_trend

    depth, keys = falling()
    fill(store, depth, **keys)
    (one,) = rates(store).groups
    calls = [False] * 59 + [True]
    assert draw_rate(one.law, "a <b> $x$", calls, False) == draw_rate(one.law, "a <b> $x$", calls, False)
    found = trend(store, "rate_nm_min", "source_energy_kWh")
    points = [(p.series, p.x, p.y) for p in found.points]
    assert draw_trend(points, "rate", "wear", None).startswith(b"<?xml")
