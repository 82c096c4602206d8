"""What a good run file means."""

import hashlib
import re
import subprocess
import sys
from datetime import date
from pathlib import Path

import pytest

from filmfit.fit.build import build_problem
from filmfit.jobs.fit import read_run
from filmfit.runfile.keys import as_record
from filmfit.runfile.lines import lines_of
from filmfit.runfile.load import load_run_file
from filmfit.runfile.process import PROCESSES, process_word
from filmfit.runfile.starter import starter_text

TEXT = """\
format = 1
[run]
id = "K2-1"
date = 2026-04-17
film = "ITO"
process = "DC magnetron sputtering"
time_min = 15
pressure_mTorr = 3.0
flows_sccm = { Ar = 40, O2 = 0.6 }
[other]
note = "new shields"
[substrate]
thickness_mm = 1.1
material = "soda-lime-glass"
[[layer]]
name = "barrier"
material = "fused-silica"
thickness_A = { value = 250, sigma = 30 }
deposited = false
[[layer]]
name = "film"
like = "ITO"
thickness_um = 0.25
[layer.parameters]
"drude.damping_eV" = { value = 0.12, sigma = 0.05 }
"tauc-lorentz.gap_eV" = 3.3
[[spectrum]]
file = "t.csv"
quantity = "T"
"""


@pytest.fixture
def loaded(tmp_path):
    path = tmp_path / "run.toml"
    path.write_text(TEXT)
    return load_run_file(path)


def test_units_in_keys_become_the_inside_units(loaded):
    run = loaded.content.run
    assert run.time_s == 900
    assert run.pressure_Pa == pytest.approx(0.3999671, rel=1e-6)  # 1 Torr = 101325/760 Pa
    assert loaded.content.layer[0].thickness_nm.value == pytest.approx(25.0)
    assert loaded.content.layer[0].thickness_nm.sigma == pytest.approx(3.0)
    assert loaded.content.layer[1].thickness_nm == pytest.approx(250.0)


def test_types_defaults_and_spellings(loaded):
    content = loaded.content
    assert content.run.date == date(2026, 4, 17)
    assert content.run.process == "dc sputter"
    assert content.sample.state == "as-deposited"
    assert content.instrument.scale_sigma_T == 0.003
    assert content.layer[1].parameters["tauc-lorentz.gap_eV"] == 3.3


def test_where_a_key_stands(loaded):
    assert loaded.where("layer", 1, "like") == "run.toml:22: layer[2].like"
    assert loaded.where("layer", 1, "parameters", "tauc-lorentz.gap_eV").startswith("run.toml:26:")
    assert loaded.where("substrate", "back") == "run.toml:12: substrate.back"
    assert loaded.where("run", "flows_sccm", "O2") == "run.toml:9: run.flows_sccm.O2"
    assert loaded.where("spectrum") == "run.toml:27: spectrum"
    assert loaded.where("other", "absent") == "run.toml:10: other.absent"
    assert loaded.where("sample") == "run.toml: sample"


def test_paths_are_relative_to_the_run_file(tmp_path):
    (tmp_path / "bench").mkdir()
    path = tmp_path / "bench" / "run.toml"
    path.write_text(TEXT)
    found = load_run_file(path)
    assert found.resolve("t.csv") == tmp_path / "bench" / "t.csv"
    assert found.resolve("/data/t.csv") == Path("/data/t.csv")


def test_the_checksum_is_that_of_the_bytes_on_disk(tmp_path):
    path = tmp_path / "run.toml"
    content = b"\xef\xbb\xbf" + TEXT.replace("\n", "\r\n").encode()
    path.write_bytes(content)
    found = load_run_file(path)
    assert found.sha256 == hashlib.sha256(content).hexdigest()
    assert found.content.run.id == "K2-1"
    assert found.where("substrate", "back").startswith("run.toml:12:")


def test_a_good_file_needs_no_parser_for_its_places(tmp_path):
    path = tmp_path / "run.toml"
    path.write_text(TEXT)
    told = (
        "import sys; from filmfit.runfile.load import load_run_file; load_run_file(sys.argv[1]); "
        "print('tree_sitter' in sys.modules)"
    )
    out = subprocess.run([sys.executable, "-c", told, str(path)], capture_output=True, text=True, check=True)
    assert out.stdout == "False\n"


def test_lines_of_nested_and_dotted_tables():
    found = lines_of(
        "a.b = 1\n[[x]]\ny = [\n 1,\n 2]\n[x.z]\nw = { q = 1 }\n[[x]]\n[[x.s]]\nt = 1\n"
        '[c."d.e"]\n"\\u0041" = [\n  { f = 1 },\n  { f = 2 },\n]\n'
    )
    assert found["a", "b"] == found[("a",)] == 1
    assert found[("x",)] == 2
    assert found[("c",)] == found["c", "d.e"] == 11
    assert found["c", "d.e", "A"] == 12
    assert found["c", "d.e", "A", 1, "f"] == 14
    assert found["x", 0, "y", 1] == 5
    assert found["x", 0, "z", "w", "q"] == 7
    assert found["x", 1, "s", 0, "t"] == 10


def test_the_record_is_plain_and_holds_what_was_stated(loaded):
    import json

    record = as_record(loaded.content)
    assert json.loads(json.dumps(record, allow_nan=False)) == record
    assert record["run"]["date"] == "2026-04-17"
    assert record["other"] == {"note": "new shields"}
    assert "sample" not in record


@pytest.mark.parametrize(
    ("given", "word"),
    [
        ("dc sputter", "dc sputter"), ("DC-magnetron", "dc sputter"), ("pulsed DC sputtering", "pulsed dc sputter"),
        ("RF sputter", "rf sputter"), ("mid-frequency sputtering", "mf sputter"), ("e-beam", "e-beam evaporation"),
        ("electron beam evaporation", "e-beam evaporation"), ("thermal", "thermal evaporation"),
        ("resistive evaporation", "thermal evaporation"), ("spray pyrolysis", "pyrolytic"), ("other", "other"),
        ("magic", None), ("", None),
    ],
)  # fmt: skip
def test_spellings_of_a_process(given, word):
    assert process_word(given) == word
    assert word is None or word in PROCESSES


@pytest.mark.parametrize(
    ("given", "used"), [("K2-7", "K2-7"), ('my "run"', "my-run-"), ("-Größe", "Gr-e"), ("{x}", "x-"), ("日", "run-1"), (200 * "x", 100 * "x")]
)  # fmt: skip
def test_the_starter_file_loads_whatever_it_is_named(tmp_path, given, used):
    path = tmp_path / "run.toml"
    path.write_text(starter_text(given, date(2026, 4, 17)))
    assert load_run_file(path).content.run.id == used


def test_the_starter_file_beside_spectra_is_ready_to_fit(tmp_path):
    path = tmp_path / "run.toml"
    path.write_text(starter_text("K2-7", date(2026, 4, 17)))
    for name, value in (("t", 80.0), ("r", 9.0)):
        rows = "".join(f"{x},{value}\n" for x in range(350, 1000, 10))
        (tmp_path / f"{name}.csv").write_text(f"Wavelength (nm),{name.upper()} (%)\n{rows}")
    built = build_problem([read_run(load_run_file(path))])
    assert [len(scan.values) for scan in built.problem.runs[0].scans] == [65, 65]


def test_what_is_commented_out_in_the_starter_file_is_right_too(tmp_path):
    path = tmp_path / "run.toml"
    text = re.sub(r"(?m)^# (?=\w+ = |\[)", "", starter_text("K2-7", date(2026, 4, 17)))
    path.write_text(text)
    content = load_run_file(path).content
    assert content.substrate.spectrum[0].file == "bare.csv"
    assert content.run.flows_sccm == {"Ar": 40.0, "O2": 0.5}
    assert content.electrical.sheet_resistance_ohm == 12.0


def test_every_practice_run_file_loads(practice):
    files = sorted(practice.glob("*/run.toml"))
    assert len(files) == 47
    for path in files:
        assert load_run_file(path).content.run.id == path.parent.name
