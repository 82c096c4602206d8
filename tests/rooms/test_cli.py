"""The command line from outside: what is printed, written and filed, and the exit status."""

import json
import os
import subprocess
import sys

import jsonschema
import pytest


def run(*arguments, cwd, **environment):
    return subprocess.run(
        [sys.executable, "-W", "error", "-m", "filmfit", *map(str, arguments)], cwd=cwd, capture_output=True, text=True,
        timeout=300, env={**os.environ, **environment}, check=False,
    )  # fmt: skip


def test_the_example_from_end_to_end(example, tmp_path, checkout):
    told = run("fit", example / "run.toml", "--json", "out.json", cwd=tmp_path)
    assert told.returncode == 0, told.stderr
    assert "USABLE" in told.stdout.splitlines()[0]
    assert "filed as fit 1 of run C1-0231, revision 1" in told.stdout
    picture = tmp_path / "C1-0231-fit.svg"
    assert picture.read_bytes().startswith(b"<?xml")
    found = json.loads((tmp_path / "out.json").read_text())
    jsonschema.validate(found, json.loads((checkout / "filmfit" / "schema" / "result-1.json").read_text()))
    # the truths that examples/first-run/make_data.py states
    for name, truth in (
        ("thickness_nm", 212.0), ("plasma_energy_eV", 1.72), ("carrier_density_cm3", 7.509e20),
        ("mobility_cm2_Vs", 31.80), ("sheet_resistance_ohm", 12.33),
    ):  # fmt: skip
        got = found["results"][name]
        assert got["low"] <= truth <= got["high"], name
        assert got["value"] == pytest.approx(truth, rel=0.03), name
    assert found["results"]["rate_nm_min"]["value"] == pytest.approx(
        found["results"]["thickness_nm"]["value"] * 60 / 640
    )
    assert found["limits"] == {"sheet_resistance_ohm": "within", "thickness_nm": "within"}
    assert found["provenance"]["tmm_difference"] < 1e-9
    assert "the four-point probe reads 12.8 ohm" in told.stdout

    listed = run("runs", "list", "--json", "-", cwd=tmp_path)
    (row,) = json.loads(listed.stdout)["runs"]
    assert row["id"] == "C1-0231"
    assert row["thickness_nm"]["value"] == found["results"]["thickness_nm"]["value"]
    assert "C1-0231" in run("runs", "list", cwd=tmp_path).stdout
    assert "flows_sccm.O2 = 0.5" in run("runs", "show", "C1-0231", cwd=tmp_path).stdout


def test_same_files_same_bytes_except_times(example, tmp_path):
    found = []
    for number in (1, 2):
        told = run("fit", example / "run.toml", "--json", "-", "--no-records", "--report", f"r{number}", cwd=tmp_path)
        content = json.loads(told.stdout)
        content["fit"].pop("seconds")
        found.append((content, (tmp_path / f"r{number}" / "C1-0231-fit.svg").read_bytes()))
    assert found[0] == found[1]
    assert not (tmp_path / "filmfit-records.sqlite").exists()


def test_one_fault_costs_its_own_run_only(example, tmp_path):
    bad = tmp_path / "bad.toml"
    bad.write_text((example / "run.toml").read_text().replace("power_W", "powr_W"))
    told = run("fit", bad, example / "run.toml", "--quiet", "--json", "all.json", cwd=tmp_path)
    assert told.returncode == 2
    assert told.stderr.strip() == "bad.toml:12: run.powr_W: unknown key; did you mean 'power_W'?"
    assert told.stdout.startswith("C1-0231: usable, 21")
    first, second = json.loads((tmp_path / "all.json").read_text())
    assert first["error"] == {
        "where": "bad.toml:12: run.powr_W", "found": "unknown key", "allowed": "", "do": "did you mean 'power_W'?",
    }  # fmt: skip
    assert second["answer"] == "usable"


def test_an_unwritable_record_is_refused_before_anything_is_done(example, tmp_path):
    told = run("fit", example / "run.toml", "--records", "no/where.sqlite", cwd=tmp_path)
    assert (told.returncode, told.stdout) == (2, "")
    assert told.stderr.strip() == "no/where.sqlite: there is no folder 'no'; make it, or name another file"
    assert sorted(path.name for path in tmp_path.iterdir()) == ["first-run"]


def test_the_picture_lies_beside_the_records_and_stages_are_told_on_standard_error(example, tmp_path):
    (tmp_path / "lab").mkdir()
    told = run("fit", example / "run.toml", "--records", "sqlite:///lab/a.sqlite", "--quiet", "--verbose", cwd=tmp_path)
    assert told.returncode == 0, told.stderr
    assert len(told.stdout.splitlines()) == 1
    assert (tmp_path / "lab" / "C1-0231-fit.svg").is_file()
    for stage in ("read and fitted in", "filed in", "drawn in"):
        assert f"filmfit.cli: {example}/run.toml: {stage}" in told.stderr
    assert "alembic" not in told.stderr


def test_new_writes_a_run_file_once(tmp_path):
    told = run("new", "K2-9.toml", cwd=tmp_path)
    assert told.returncode == 0
    assert 'id = "K2-9"' in (tmp_path / "K2-9.toml").read_text()
    again = run("new", "K2-9.toml", cwd=tmp_path)
    assert (again.returncode, again.stderr.strip()) == (2, "K2-9.toml: is there already; name another file")


def test_json_on_standard_output_is_nothing_else(example, tmp_path):
    told = run("fit", example / "run.toml", "--json", "-", "--no-records", cwd=tmp_path)
    assert json.loads(told.stdout)["schema"] == "filmfit.result/1"


@pytest.mark.parametrize(
    ("arguments", "line"),
    [
        (["fti"], "filmfit: No such command 'fti'. Did you mean 'fit'?; see 'filmfit --help'"),
        (["tradeoff", "--of", "x"], "filmfit: 'tradeoff' is not supported yet; see 'filmfit --help'"),
        (["fit"], "filmfit fit: Missing argument 'RUN.toml...'; see 'filmfit fit --help'"),
        (["fit", "x.toml", "--together"], "filmfit fit: --together is not supported yet; see 'filmfit fit --help'"),
        (["fit", "x.toml", "--workers", "4"], "filmfit fit: --workers is not supported yet; see 'filmfit fit --help'"),
        (["fit", "x.toml", "--no-records"], "x.toml: no such file; write one with 'filmfit new'"),
        (
            ["runs", "list"],
            "filmfit-records.sqlite: no such records; file a run with 'filmfit fit', or name them with --records",
        ),
        (["materials", "show", "ITOO"], "material: unknown material 'ITOO'; did you mean 'ITO'?"),
        (["new", "no/run.toml"], "no/run.toml: cannot be written: No such file or directory; name another place"),
    ],
)
def test_wrong_use_is_one_line_and_status_2(tmp_path, arguments, line):
    told = run(*arguments, cwd=tmp_path)
    assert told.returncode == 2
    assert told.stderr.strip().splitlines() == [line]
    assert not list(tmp_path.iterdir())


@pytest.mark.parametrize("command", [[], ["new"], ["fit"], ["runs"], ["runs", "list"], ["runs", "show"], ["materials"],
                                     ["materials", "list"], ["materials", "show"]])  # fmt: skip
def test_every_help_ends_with_an_example(tmp_path, command):
    told = run(*command, "--help", cwd=tmp_path)
    assert told.returncode == 0
    assert told.stdout.strip().splitlines()[-1].strip().startswith("Example: filmfit ")


def test_materials_are_listed_and_shown_with_their_reference(tmp_path):
    assert "soda-lime-glass" in run("materials", "list", cwd=tmp_path).stdout
    shown = run("materials", "show", "ITO", cwd=tmp_path).stdout
    assert "reference:" in shown
    assert "effective mass: 0.35" in shown


def test_output_survives_an_ascii_terminal(example, tmp_path):
    told = run("materials", "show", "silver", cwd=tmp_path, PYTHONIOENCODING="ascii", LC_ALL="C", PYTHONUTF8="0")
    assert told.returncode == 0
    assert "Raki" in run("materials", "show", "aluminium", cwd=tmp_path, PYTHONIOENCODING="ascii").stdout


def test_help_and_import_stay_light():
    heavy = ["numpy", "scipy", "pydantic", "rich", "sqlalchemy", "alembic", "matplotlib", "lmfit", "tmm"]
    code = (
        "import sys; import filmfit; import filmfit.cli.main as m\n"
        "try:\n    m.cli.main(['--help'])\nexcept SystemExit:\n    pass\n"
        f"print([name for name in {heavy} if name in sys.modules])"
    )
    told = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert told.stdout.strip().splitlines()[-1] == "[]"
