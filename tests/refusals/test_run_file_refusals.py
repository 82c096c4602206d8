"""What a run file is refused for: one line a fault, whole sentences."""

import pytest

from filmfit.errors import Faults
from filmfit.fit.build import build_problem
from filmfit.jobs.fit import read_run
from filmfit.runfile.load import load_run_file

GOOD = """\
format = 1
[run]
id = "K2-1"
date = 2026-04-17
film = "ITO"
process = "dc sputter"
time_s = 900

[substrate]
thickness_mm = 1.1
material = "soda-lime-glass"

[[layer]]
name = "film"
like = "ITO"

[[spectrum]]
file = "t.csv"
quantity = "T"
"""
PROCESSES = (
    "dc sputter, pulsed dc sputter, rf sputter, mf sputter, thermal evaporation, e-beam evaporation, pyrolytic, other"
)
LAYER = "a layer has one of material, like, model, laws; found"

REFUSED = [
    ("format = 1", "format = 2", "run.toml:1: format: 2; allowed: 1"),
    ("format = 1\n", "", "run.toml: format: is missing; add format"),
    ('id = "K2-1"\n', "", "run.toml:2: run.id: is missing; add id"),
    ('id = "K2-1"', 'id = ""', "run.toml:3: run.id: ''; allowed: letters, digits, '.', '_' and '-', a letter or digit first"),
    ('id = "K2-1"', 'id = "a/b"', "run.toml:3: run.id: 'a/b'; allowed: letters, digits, '.', '_' and '-', a letter or digit first"),
    ("date = 2026-04-17", 'date = "yesterday"', "run.toml:4: run.date: 'yesterday'; allowed: a valid date"),
    ('film = "ITO"\n', 'film = ""\n', "run.toml:5: run.film: ''; allowed: string should have at least 1 character"),
    ('"dc sputter"', '"dcc"', f"run.toml:6: run.process: 'dcc'; allowed: {PROCESSES}"),
    ("time_s = 900", "time_s = 0", "run.toml:7: run.time_s: 0; allowed: greater than 0"),
    ("time_s = 900", 'time_s = "900 s"', "run.toml:7: run.time_s: '900 s'; allowed: a valid number"),
    ("time_s = 900", "time_s = true", "run.toml:7: run.time_s: True; allowed: a valid number"),
    ("time_s = 900", "time_s = nan", "run.toml:7: run.time_s: nan; allowed: a finite number"),
    ("time_s = 900", "time_min = -1", "run.toml:7: run.time_min: -1; allowed: greater than 0"),
    ("time_s = 900", "time_s = 900\ntime_min = 15", "run.toml:8: run.time_min: time_s stands here too; keep one of them"),
    ("time_s = 900", "tme_s = 900", "run.toml:7: run.tme_s: unknown key; did you mean 'time_s'?"),
    ("time_s = 900", "passes = 1.5", "run.toml:7: run.passes: 1.5; allowed: a valid integer"),
    ("time_s = 900", "flows_sccm = { Ar = -1.0 }", "run.toml:7: run.flows_sccm.Ar: -1.0; allowed: greater than or equal to 0"),
    ("time_s = 900", 'kind = "control-plate"', "run.toml:7: run.kind: is not supported yet; leave it out"),
    ("thickness_mm = 1.1\n", "", "run.toml:9: substrate.thickness_mm: is missing; add thickness_mm"),
    ("thickness_mm = 1.1", "thickness_mm = 1.1\nback = \"rough\"",
     "run.toml:11: substrate.back: 'rough' is not supported yet; allowed: 'bare', 'blackened' or 'index-matched'"),
    ('material = "soda-lime-glass"\n', "",
     "run.toml:9: substrate: neither a material nor the bare plate's own T: the plate is not known"),
    ('like = "ITO"\n', "", f"run.toml:13: layer[1]: {LAYER} none of them"),
    ('like = "ITO"', 'like = "ITO"\nmodel = "tco"', f"run.toml:13: layer[1]: {LAYER} like and model"),
    ('like = "ITO"', 'model = "oxide"', "run.toml:15: layer[1].model: 'oxide'; allowed: 'tco', 'dielectric' or 'metal'"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = { low = 9, high = 3 }',
     "run.toml:16: layer[1].thickness_nm: low = 9 is not below high = 3"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = { sigma = 3 }',
     "run.toml:16: layer[1].thickness_nm: sigma without the value it belongs to"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = {}',
     "run.toml:16: layer[1].thickness_nm: an empty table: give value, sigma, low, high or start"),
    ('like = "ITO"', 'like = "ITO"\nroughness_nm = 3', "run.toml:16: layer[1].roughness_nm: is not supported yet; leave it out"),
    ('like = "ITO"', 'like = "ITO"\n[[layer]]\nname = "film"\nlike = "ITO"',
     "run.toml: two layers named 'film': every layer has its own name"),
    ('quantity = "T"', 'quantity = "A"', "run.toml:19: spectrum[1].quantity: 'A'; allowed: 'R' or 'T'"),
    ('quantity = "T"', 'quantity = "T"\nangle_deg = 90', "run.toml:20: spectrum[1].angle_deg: 90; allowed: less than or equal to 85"),
    ('quantity = "T"', 'quantity = "T"\nrelative_to = "bare-plate"',
     "run.toml:20: spectrum[1].relative_to: 'bare-plate' is not supported yet; allowed: 'air'"),
    ('quantity = "T"', 'quantity = "T"\nsigma = 0.0', "run.toml:20: spectrum[1].sigma: 0.0; allowed: greater than 0"),
    ('quantity = "T"', 'quantity = "T"\n[limits]\nthicknes_nm = { low = 1 }',
     "run.toml: [limits] names no result 'thicknes_nm'; allowed: thickness_nm, top_nm, roughness_nm, gap_tauc_lorentz_eV, "
     "gap_direct_eV, energy_at_1e4_eV, plasma_energy_eV, carrier_density_cm3, mobility_cm2_Vs, resistivity_ohm_cm, "
     "sheet_resistance_ohm, index_550, transmittance_luminous, transmittance_solar, rate_nm_min"),
    ('quantity = "T"', 'quantity = "T"\n[electrical]\neffective_mass = -0.3',
     "run.toml:21: electrical.effective_mass: -0.3; allowed: greater than 0"),
    ('[[spectrum]]\nfile = "t.csv"\nquantity = "T"\n', "", "run.toml: spectrum: is missing; add spectrum"),
]  # fmt: skip


def sentences(path):
    with pytest.raises(Faults) as caught:
        load_run_file(path)
    return str(caught.value).splitlines()


def test_the_good_file_is_good(tmp_path):
    path = tmp_path / "run.toml"
    path.write_text(GOOD)
    assert load_run_file(path).content.run.id == "K2-1"


@pytest.mark.parametrize(("old", "new", "sentence"), REFUSED)
def test_sentence(tmp_path, old, new, sentence):
    assert old in GOOD
    path = tmp_path / "run.toml"
    path.write_text(GOOD.replace(old, new, 1))
    assert sentences(path) == [sentence]


def test_all_faults_at_once(tmp_path):
    path = tmp_path / "run.toml"
    path.write_text(GOOD.replace("time_s", "tme_s").replace("thickness_mm", "thicknes_mm").replace('"T"', '"X"'))
    assert len(sentences(path)) == 4


def test_broken_syntax_names_the_line(tmp_path):
    path = tmp_path / "run.toml"
    path.write_text(GOOD.replace('film = "ITO"', "film = ITO"))
    assert "line 5" in sentences(path)[0]


@pytest.mark.parametrize(
    ("name", "do"), [("rum.toml", "did you mean 'run.toml'?"), ("zzz", "write one with 'filmfit new'")]
)
def test_missing_file(tmp_path, name, do):
    (tmp_path / "run.toml").write_text(GOOD)
    assert sentences(tmp_path / name) == [f"{tmp_path / name}: no such file; {do}"]


def test_folder_and_foreign_bytes(tmp_path):
    assert sentences(tmp_path) == [f"{tmp_path}: is a folder; name the run file in it"]
    path = tmp_path / "run.toml"
    path.write_bytes(GOOD.encode("utf-16"))
    assert sentences(path) == [f"{path}: is not UTF-8 text; save it as UTF-8"]


SCAN = "nm,T\n" + "\n".join(f"{x},0.8" for x in range(350, 1000, 10))


@pytest.mark.parametrize(
    ("old", "new", "sentence"),
    [
        ('like = "ITO"', 'like = "ITOO"', "run.toml:15: layer[1].like: unknown material 'ITOO'; did you mean 'ITO'?"),
        ('like = "ITO"', 'material = "ITO"',
         "run.toml:15: layer[1].material: 'ITO' is where a fit begins, not a known material; use like = \"ITO\""),
        ('like = "ITO"', 'like = "titania"',
         "run.toml:15: layer[1].like: 'titania' has no law to fit; use material = \"titania\" to hold it fixed"),
        ('like = "ITO"', 'like = "fused-silica"',
         "run.toml:15: layer[1].like: 'fused-silica' has no law to fit; use material = \"fused-silica\" to hold it fixed"),
        ('"soda-lime-glass"', '"ITO"',
         "run.toml:11: substrate.material: 'ITO' is where a fit begins, not a known material; name a glass: see "
         "'filmfit materials list'"),
        ('like = "ITO"', 'laws = ["constant", "druude"]',
         "run.toml:15: layer[1].laws: unknown law 'druude'; allowed: cauchy, constant, drude, lorentz, sellmeier, "
         "tauc-lorentz, urbach; did you mean 'drude'?"),
        ('like = "ITO"', 'like = "ITO"\n[layer.parameters]\n"drude.plasma" = 1.0',
         "run.toml:17: layer[1].parameters.drude.plasma: no such parameter of this layer; allowed: constant.epsilon, "
         "tauc-lorentz.amplitude_eV, tauc-lorentz.peak_eV, tauc-lorentz.width_eV, tauc-lorentz.gap_eV, drude.plasma_eV, "
         "drude.damping_eV; did you mean 'drude.plasma_eV'?"),
        ("soda-lime-glass", "soda-lime", "run.toml:11: substrate.material: unknown material 'soda-lime'; did you mean "
         "'soda-lime-glass'?"),
        ("t.csv", "u.csv", "run.toml:18: spectrum[1].file: no file 'u.csv' in FOLDER; did you mean 't.csv'?"),
    ],
)  # fmt: skip
def test_names_that_the_file_points_at(tmp_path, old, new, sentence):
    path = tmp_path / "run.toml"
    path.write_text(GOOD.replace(old, new, 1))
    (tmp_path / "t.csv").write_text(SCAN)
    with pytest.raises(Faults) as caught:
        build_problem([read_run(load_run_file(path))])
    assert str(caught.value) == sentence.replace("FOLDER", str(tmp_path))
