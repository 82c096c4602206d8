"""What a material file is refused for, in full sentences."""

import pytest

from filmfit.errors import MaterialError
from filmfit.materials import load, material

GOOD = """
name = "x"
kind = "fixed"
description = "a test"
valid_nm = [300, 1000]
reference = "A. Author, Journal 1, 2 (2000)"
origin = "measured"
laws = ["constant"]
[parameters]
"constant.epsilon" = { value = 2.0 }
"""


@pytest.mark.parametrize(
    ("old", "new", "sentence"),
    [
        ('reference = "A. Author, Journal 1, 2 (2000)"', "", "x.toml: reference: missing or empty; allowed: a text"),
        ('origin = "measured"', 'origin = "guess"', "x.toml: origin: 'guess'; allowed: measured, handbook, memory"),
        ("[300, 1000]", "[1000, 300]", "x.toml: valid_nm: 1000, 300; allowed: two ascending positive numbers"),
        ("[300, 1000]", "300", "x.toml: valid_nm: missing or not a pair; allowed: [shortest, longest]"),
        ("value = 2.0", "value = nan", "x.toml: constant.epsilon: nan; allowed: a finite number"),
        ("value = 2.0", "value = 2.0, low = 3.0, high = 4.0", "x.toml: constant.epsilon: 2 outside 3..4"),
        ('"constant.epsilon"', '"constant.eps"',
         "x.toml: parameters: missing or not of these laws: constant.eps, constant.epsilon"),
        ('laws = ["constant"]', 'laws = ["constent"]',
         "x.toml: unknown law 'constent'; allowed: cauchy, constant, drude, lorentz, sellmeier, tauc-lorentz, urbach; "
         "did you mean 'constant'?"),
        ('kind = "fixed"', 'kind = "fixed"\nflavour = 1',
         "x.toml: flavour: unknown key; allowed: name, kind, description, valid_nm, reference, origin, laws, parameters, "
         "table, starting, index_550, effective_mass, continuous_above_nm, index_sigma"),
    ],
)  # fmt: skip
def test_sentence(tmp_path, old, new, sentence):
    path = tmp_path / "x.toml"
    path.write_text(GOOD.replace(old, new))
    with pytest.raises(MaterialError) as caught:
        load(path)
    assert str(caught.value) == sentence


@pytest.mark.parametrize(
    ("table", "sentence"),
    [
        ("wavelength_nm = [400, 300]\nn = [1, 1]\nk = [0, 0]", "x.toml: table[0].wavelength_nm: not ascending"),
        ("wavelength_nm = [300, 400]\nn = [1, 1]\nk = [0, -1]", "x.toml: table[0].k: negative; allowed: k >= 0"),
        ("wavelength_nm = [300, 400]\nn = [1, 1]\nk = [0, 0, 0]", "x.toml: table[0]: columns of different length"),
        ("wavelength_nm = [300]\nn = [1]\nk = [0]",
         "x.toml: table[0].wavelength_nm: missing or too short; allowed: a list of numbers"),
    ],
)  # fmt: skip
def test_table_sentence(tmp_path, table, sentence):
    path = tmp_path / "x.toml"
    head = GOOD.partition("laws")[0]
    path.write_text(f'{head}\n[[table]]\nreference = "same"\n{table}\n')
    with pytest.raises(MaterialError) as caught:
        load(path)
    assert str(caught.value) == sentence


def test_unknown_names():
    with pytest.raises(MaterialError) as caught:
        material("soda-lime", where="run.toml:12: substrate.material")
    assert str(caught.value) == (
        "run.toml:12: substrate.material: unknown material 'soda-lime'; did you mean 'soda-lime-glass'?"
    )
    with pytest.raises(MaterialError) as caught:
        material("zzz")
    assert str(caught.value) == "material: unknown material 'zzz'; see 'filmfit materials list'"
    with pytest.raises(MaterialError) as caught:
        material("gone.toml")
    assert str(caught.value) == "material: no file 'gone.toml'; give a path relative to the run file"


def test_a_users_own_file_is_read(tmp_path):
    (tmp_path / "own.toml").write_text(GOOD)
    assert material("own.toml", tmp_path).parameters["constant.epsilon"].value == 2.0


def test_bytes_that_are_no_toml(tmp_path):
    path = tmp_path / "x.toml"
    path.write_bytes(b"\xff\xfe\x00junk")
    with pytest.raises(MaterialError, match="not a readable TOML file"):
        load(path)
