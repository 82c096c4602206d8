"""What a run file is refused for: one line a fault, whole sentences."""

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from pydantic import ValidationError

from filmfit.errors import Faults
from filmfit.fit.build import build_problem
from filmfit.jobs.fit import read_run
from filmfit.runfile.consistency import contradictions
from filmfit.runfile.keys import Content
from filmfit.runfile.load import load_run_file
from filmfit.runfile.spelled import inside_units
from filmfit.runfile.told import told

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
KINDS = "material, like, model, laws"

REFUSED = [
    ("format = 1", "format = 2", "run.toml:1: format: 2; allowed: 1"),
    ("format = 1\n", "", "run.toml: format: is missing; add format"),
    ('id = "K2-1"\n', "", "run.toml:2: run.id: is missing; add id"),
    ('id = "K2-1"', 'id = ""', "run.toml:3: run.id: ''; allowed: letters, digits, '.', '_' and '-', a letter or digit first"),
    ('id = "K2-1"', 'id = "a/b"', "run.toml:3: run.id: 'a/b'; allowed: letters, digits, '.', '_' and '-', a letter or digit first"),
    ("date = 2026-04-17", 'date = "yesterday"', "run.toml:4: run.date: 'yesterday'; allowed: a date without quotes, as 2026-04-17"),
    ('film = "ITO"\n', 'film = ""\n', "run.toml:5: run.film: ''; allowed: a text that is not empty"),
    ('"dc sputter"', '"dcc"', f"run.toml:6: run.process: 'dcc'; allowed: {PROCESSES}"),
    ("time_s = 900", "time_s = 0", "run.toml:7: run.time_s: 0; allowed: more than 0"),
    ("time_s = 900", 'time_s = "900 s"', "run.toml:7: run.time_s: '900 s'; allowed: a number"),
    ("time_s = 900", "time_s = true", "run.toml:7: run.time_s: true; allowed: a number"),
    ("time_s = 900", "time_s = nan", "run.toml:7: run.time_s: nan; allowed: a finite number"),
    ("time_s = 900", "time_min = -1", "run.toml:7: run.time_min: -1; allowed: more than 0"),
    ("time_s = 900", "time_s = 900\ntime_min = 15", "run.toml:8: run.time_min: time_s stands here too; keep one of them"),
    ("time_s = 900", "tme_s = 900", "run.toml:7: run.tme_s: unknown key; did you mean 'time_s'?"),
    ("time_s = 900", "passes = 1.5", "run.toml:7: run.passes: 1.5; allowed: a whole number"),
    ("time_s = 900", "flows_sccm = { Ar = -1.0 }", "run.toml:7: run.flows_sccm.Ar: -1.0; allowed: at least 0"),
    ("time_s = 900", 'kind = "control"', "run.toml:7: run.kind: 'control'; allowed: 'run' or 'control-plate'"),
    ("thickness_mm = 1.1\n", "", "run.toml:9: substrate.thickness_mm: is missing; add thickness_mm"),
    ("thickness_mm = 1.1", "thickness_mm = 1.1\nback = \"rough\"",
     "run.toml:11: substrate.back: 'rough' is not supported yet; allowed: 'bare', 'blackened' or 'index-matched'"),
    ('material = "soda-lime-glass"\n', "",
     "run.toml:9: substrate: neither a material nor the bare plate's own T; add material = \"...\", or a [[substrate.spectrum]] of T"),
    ('like = "ITO"\n', "", f"run.toml:13: layer[1]: has none of {KINDS}; allowed: one of {KINDS}"),
    ('like = "ITO"', 'like = "ITO"\nmodel = "tco"', f"run.toml:13: layer[1]: has like and model; allowed: one of {KINDS}"),
    ('like = "ITO"', 'model = "oxide"', "run.toml:15: layer[1].model: 'oxide'; allowed: 'tco', 'dielectric' or 'metal'"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = { low = 9, high = 3 }',
     "run.toml:16: layer[1].thickness_nm: low = 9 is not below high = 3"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = { sigma = 3 }',
     "run.toml:16: layer[1].thickness_nm: sigma without the value it belongs to"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = {}',
     "run.toml:16: layer[1].thickness_nm: an empty table: give value, sigma, low, high or start"),
    ('like = "ITO"', 'like = "ITO"\nroughness_nm = 3', "run.toml:16: layer[1].roughness_nm: is not supported yet; leave it out"),
    ('like = "ITO"', 'like = "ITO"\n[[layer]]\nname = "film"\nlike = "ITO"',
     "run.toml:17: layer[2].name: a second layer 'film'; give each layer its own name"),
    ('quantity = "T"', 'quantity = "A"', "run.toml:19: spectrum[1].quantity: 'A'; allowed: 'R' or 'T'"),
    ('quantity = "T"', 'quantity = "T"\nangle_deg = 90', "run.toml:20: spectrum[1].angle_deg: 90; allowed: at most 85"),
    ('quantity = "T"', 'quantity = "T"\nrelative_to = "bare-plate"',
     "run.toml:20: spectrum[1].relative_to: 'bare-plate' is not supported yet; allowed: 'air'"),
    ('quantity = "T"', 'quantity = "T"\nsigma = 0.0', "run.toml:20: spectrum[1].sigma: 0.0; allowed: more than 0"),
    ('quantity = "T"', 'quantity = "T"\n[limits]\nthicknes_nm = { low = 1 }',
     "run.toml:21: limits.thicknes_nm: no such result; did you mean 'thickness_nm'?"),
    ('quantity = "T"', 'quantity = "T"\n[limits]\nhaze = { low = 1 }',
     "run.toml:21: limits.haze: no such result; allowed: thickness_nm, top_nm, roughness_nm, gap_tauc_lorentz_eV, "
     "gap_direct_eV, energy_at_1e4_eV, plasma_energy_eV, carrier_density_cm3, mobility_cm2_Vs, resistivity_ohm_cm, "
     "sheet_resistance_ohm, index_550, transmittance_luminous, transmittance_solar, rate_nm_min"),
    ('quantity = "T"', 'quantity = "T"\n[electrical]\neffective_mass = -0.3',
     "run.toml:21: electrical.effective_mass: -0.3; allowed: more than 0"),
    ('[[spectrum]]\nfile = "t.csv"\nquantity = "T"\n', "", "run.toml: spectrum: is missing; add spectrum"),
    ("format = 1", "format = true", "run.toml:1: format: true; allowed: 1"),
    ("date = 2026-04-17", 'date = "2026-04-17"',
     "run.toml:4: run.date: '2026-04-17'; allowed: a date without quotes, as 2026-04-17"),
    ("date = 2026-04-17", "date = 2026-04-17T10:00:00",
     "run.toml:4: run.date: 2026-04-17T10:00:00; allowed: a date without quotes, as 2026-04-17"),
    ('film = "ITO"\n', 'film = " "\n', "run.toml:5: run.film: ' '; allowed: a text that is not empty"),
    ("time_s = 900", 'chamber = ""', "run.toml:7: run.chamber: ''; allowed: a text that is not empty"),
    ('"dc sputter"', "3", "run.toml:6: run.process: 3; allowed: a text in quotes"),
    ("time_s = 900", "time_min = 1" + 400 * "0", "run.toml:7: run.time_min: a number beyond 1e15; allowed: a finite number"),
    ("time_s = 900", "time_s = 1" + 400 * "0", "run.toml:7: run.time_s: a number beyond 1e15; allowed: a finite number"),
    ("time_s = 900", 'time_from = "lid"', "run.toml:7: run.time_from: 'lid'; allowed: 'shutter' or 'plasma'"),
    ("[substrate]", "[other]\nx = nan\n[substrate]", "run.toml:10: other.x: nan; allowed: a finite number"),
    ("[substrate]", "[other]\nstr = [1]\n[substrate]",
     "run.toml:10: other.str: a list; allowed: a number, a text in quotes, true or false"),
    ("[substrate]", "[other]\nx = 2026-04-17\n[substrate]",
     "run.toml:10: other.x: 2026-04-17; allowed: a number, a text in quotes, true or false"),
    ("[substrate]", "[sample]\nposition_mm = [1]\n[substrate]",
     "run.toml:10: sample.position_mm: a list that is too short; allowed: two numbers in [ ]"),
    ("[substrate]", "[sample]\nposition_mm = [1, 2, 3]\n[substrate]",
     "run.toml:10: sample.position_mm: a list; allowed: two numbers in [ ]"),
    ("[substrate]", "[smaple]\n[substrate]", "run.toml:9: smaple: unknown key; did you mean 'sample'?"),
    ("[run]", "[[run]]", "run.toml:2: run: a list of tables; allowed: one [run] table; write [run]"),
    ("[[layer]]", "[layer]", "run.toml:13: layer: a single [layer] table; allowed: [[layer]] blocks; write [[layer]]"),
    ("[[spectrum]]", '[[back_layer]]\nname = "b"\n[[spectrum]]',
     "run.toml:17: back_layer: is not supported yet; leave it out"),
    ('like = "ITO"', "laws = []", f"run.toml:13: layer[1]: has none of {KINDS}; allowed: one of {KINDS}"),
    ('like = "ITO"', 'laws = "drude"', "run.toml:15: layer[1].laws: 'drude'; allowed: a list in [ ]"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = -5', "run.toml:16: layer[1].thickness_nm: -5; allowed: more than 0"),
    ('like = "ITO"', 'like = "ITO"\nthickness_um = { value = -0.2, sigma = 0.1 }',
     "run.toml:16: layer[1].thickness_um.value: -0.2; allowed: more than 0"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = true', "run.toml:16: layer[1].thickness_nm: true; allowed: a number"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = { value = 9, sgma = 3 }',
     "run.toml:16: layer[1].thickness_nm.sgma: unknown key; did you mean 'sigma'?"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = { value = 9, low = 3 }',
     "run.toml:16: layer[1].thickness_nm: value without sigma is fixed, but low stands beside it"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = { start = 1, low = 3 }',
     "run.toml:16: layer[1].thickness_nm: start = 1 is below low = 3"),
    ('like = "ITO"', 'like = "ITO"\nthickness_nm = { value = 9, sigma = 1, high = 3 }',
     "run.toml:16: layer[1].thickness_nm: value = 9 is above high = 3"),
    ('like = "ITO"', 'material = "air"\nparameters = { "drude.plasma_eV" = 1 }',
     "run.toml:16: layer[1].parameters: stands beside material, which fixes the layer; use like = ... to fit it"),
    ('like = "ITO"', 'like = "ITO"\nparameters = 3', "run.toml:16: layer[1].parameters: 3; allowed: a table of keys"),
    ('like = "ITO"', 'like = "ITO"\n[layer.parameters]\ndrude.plasma_eV = 1.0',
     "run.toml:17: layer[1].parameters.drude.plasma_eV: unknown key; write a parameter's name in quotes: "
     "'drude.plasma_eV'"),
    ('like = "ITO"', 'like = "ITO"\nmain = true\n[[layer]]\nname = "top"\nlike = "ITO"\nmain = true',
     "run.toml:20: layer[2].main: layer[1] is main already; keep one of them"),
    ('quantity = "T"', 'quantity = "T"\nside = "substrate"\n[instrument]\nslit_nm = -1',
     "run.toml:22: instrument.slit_nm: -1; allowed: at least 0"),
    ('quantity = "T"', 'quantity = "T"\ncolumn = true',
     "run.toml:20: spectrum[1].column: true; allowed: a heading in quotes, or a number"),
    ('quantity = "T"', 'quantity = "T"\naccessory = "sphere"',
     "run.toml:20: spectrum[1].accessory: 'sphere' is not supported yet; allowed: 'specular'"),
    ('quantity = "T"', 'quantity = "T"\nstandard_sigma = 0.01',
     "run.toml:20: spectrum[1].standard_sigma: is not supported yet; leave it out"),
    ('quantity = "T"', 'quantity = "T"\n[electrical]\nsheet_resistance_sigma = 0.3',
     "run.toml:21: electrical.sheet_resistance_sigma: stands without sheet_resistance_ohm; add sheet_resistance_ohm, or "
     "leave it out"),
    ('quantity = "T"', 'quantity = "T"\n[limits]\nthickness_nm = 3', "run.toml:21: limits.thickness_nm: 3; allowed: one table"),
    ('quantity = "T"', 'quantity = "T"\n[limits]\nthickness_nm = {}',
     "run.toml:21: limits.thickness_nm: an empty limit: give low, high or both"),
    ('quantity = "T"', 'quantity = "T"\n[limits]\nthickness_nm = { low = 5, high = 3 }',
     "run.toml:21: limits.thickness_nm: low = 5 is not below high = 3"),
    ('film = "ITO"', "film = ITO", "run.toml:5: not TOML at column 8: invalid value; mend the syntax"),
    ('film = "ITO"', 'film = "ITO"\nfilm = "AZO"',
     "run.toml:6: not TOML at column 13: cannot overwrite a value; mend the syntax"),
    ('quantity = "T"\n', 'quantity = """T\n', "run.toml:20: not TOML: unterminated string; mend the syntax"),
    ("format = 1", "format = 1\nx = " + 3000 * "[" + 3000 * "]",
     "run.toml: not TOML that can be read; look for an endless number or nesting"),
    ("format = 1", "format = " + 9000 * "1", "run.toml: not TOML that can be read; look for an endless number or nesting"),
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


@pytest.mark.parametrize("back", ["blackened", "index-matched"])
def test_light_through_a_face_that_lets_none_in(tmp_path, back):
    path = tmp_path / "run.toml"
    text = GOOD.replace("[[layer]]", f'back = "{back}"\n[[layer]]').replace(
        'quantity = "T"', 'quantity = "R"\nside = "substrate"'
    )
    path.write_text(text)
    assert sentences(path) == [
        f'run.toml:21: spectrum[1].side: "substrate" with back = "{back}"; allowed: "film"; no light enters through that '
        "face"
    ]


def test_all_faults_at_once_in_the_order_of_the_file(tmp_path):
    path = tmp_path / "run.toml"
    bad = GOOD.replace("time_s", "tme_s").replace("thickness_mm", "thicknes_mm").replace('"T"', '"X"')
    path.write_text(bad.replace('like = "ITO"', 'like = "ITO"\n[[layer]]\nname = "film"'))
    assert sentences(path) == [
        "run.toml:7: run.tme_s: unknown key; did you mean 'time_s'?",
        "run.toml:9: substrate.thickness_mm: is missing; add thickness_mm",
        "run.toml:10: substrate.thicknes_mm: unknown key; did you mean 'thickness_mm'?",
        f"run.toml:16: layer[2]: has none of {KINDS}; allowed: one of {KINDS}",
        "run.toml:17: layer[2].name: a second layer 'film'; give each layer its own name",
        "run.toml:21: spectrum[1].quantity: 'X'; allowed: 'R' or 'T'",
    ]


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.integers(0, len(GOOD)), st.integers(0, 30), st.text(alphabet='[]{}=".,\n\r#1e+- aéT_', max_size=12))
def test_any_mangled_file_ends_in_a_reading_or_in_sentences(tmp_path, at, cut, put):
    path = tmp_path / "run.toml"
    path.write_bytes((GOOD[:at] + put + GOOD[at + cut :]).encode())
    try:
        load_run_file(path)
    except Faults as faults:
        assert faults.errors
        assert all("\n" not in str(one) and str(one).startswith("run.toml") for one in faults.errors)


VALUES = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=5) | st.dates(),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.sampled_from(["name", "value", "low", "x"]), inner, max_size=3),
    max_leaves=5,
)  # fmt: skip


@settings(max_examples=150, deadline=None)
@given(st.dictionaries(st.sampled_from(sorted(Content.model_fields)), VALUES))
def test_tables_of_any_types_end_in_faults(raw):
    assert isinstance(list(contradictions(raw)), list)
    written, _ = inside_units(raw)
    with pytest.raises(ValidationError) as caught:
        Content.model_validate(raw)
    found = told(caught.value.errors(include_url=False), written)
    assert found
    assert all(one.found for one in found)


@pytest.mark.parametrize(
    ("name", "do"), [("rum.toml", "did you mean 'run.toml'?"), ("zzz", "write one with 'filmfit new'")]
)
def test_missing_file(tmp_path, name, do):
    (tmp_path / "run.toml").write_text(GOOD)
    assert sentences(tmp_path / name) == [f"{tmp_path / name}: no such file; {do}"]


def test_folder_foreign_bytes_and_impossible_names(tmp_path):
    (said,) = sentences(tmp_path / (300 * "x"))
    assert said.endswith(": cannot be read: File name too long")
    assert sentences(tmp_path / "a\0b")[0].endswith("no such file; write one with 'filmfit new'")
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
        ('like = "ITO"', 'like = "ITO"\n[[layer]]\nname = "cap"\nmodel = "dielectric"',
         "run.toml:13: layer: 'film' and 'cap' are fitted; allowed: one main layer; give one main = true"),
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
