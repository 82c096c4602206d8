"""What a good run file means."""

from datetime import date

import pytest

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


def test_lines_of_nested_and_dotted_tables():
    found = lines_of("a.b = 1\n[[x]]\ny = [\n 1,\n 2]\n[x.z]\nw = { q = 1 }\n[[x]]\n[[x.s]]\nt = 1\n")
    assert found["a", "b"] == 1
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


def test_the_starter_file_loads(tmp_path):
    path = tmp_path / "K2-7.toml"
    path.write_text(starter_text("K2-7", date(2026, 4, 17)))
    assert load_run_file(path).content.run.id == "K2-7"
