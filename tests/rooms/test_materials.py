"""How a material is read, interpolated and held to its range; what an incomplete file is told."""

import numpy as np
import pytest

from filmfit.errors import MaterialError
from filmfit.materials import OpticalTable, library, load, material

HEAD = """
name = "x"
kind = "fixed"
description = "a test"
valid_nm = [300, 1000]
reference = "A. Author, Journal 1, 2 (2000)"
origin = "measured"
"""
LAW = 'laws = ["constant"]\n[parameters]\n"constant.epsilon" = { value = 2.25, low = 1.0, high = 4.0 }\n'
TABLE = '[[table]]\nreference = "r"\nwavelength_nm = [300, 1000]\nn = [1.5, 1.5]\nk = [0, 0]\n'
STARTING = (
    '[starting]\nlaws = ["constant"]\n[starting.parameters]\n"constant.epsilon" = { value = 2, low = 1, high = 4 }\n'
)
INDEX = '[index_550]\nvalue = 1.9\nsigma = 0.1\nreference = "r"\n'
OUT_OF_PLACE = "out of place; allowed: [starting] with the laws of a fixed table, else laws at the top"


def read(tmp_path, content):
    path = tmp_path / "x.toml"
    path.write_text(content)
    return load(path)


def refusal(tmp_path, content):
    with pytest.raises(MaterialError) as caught:
        read(tmp_path, content)
    return str(caught.value)


def test_a_law_is_the_material(tmp_path):
    one = read(tmp_path, HEAD + LAW)
    np.testing.assert_allclose(one.epsilon(np.array([300.0, 1000.0])), 2.25)
    assert one.parameters["constant.epsilon"].low == 1.0
    assert one.index_550 is None


def test_a_table_is_the_material_and_the_starting_block_its_law(tmp_path):
    one = read(tmp_path, HEAD + TABLE + STARTING)
    np.testing.assert_allclose(one.epsilon(np.array([640.0])), 2.25)
    assert one.laws == ("constant",)
    assert one.parameters["constant.epsilon"].value == 2.0


def test_both_ends_of_the_range_are_covered_and_nothing_beyond(tmp_path):
    one = read(tmp_path, HEAD + TABLE)
    np.testing.assert_array_equal(one.covers(np.array([299.9, 300.0, 1000.0, 1000.1])), [False, True, True, False])
    with pytest.raises(ValueError, match="x is known for 300-1000 nm only"):
        one.epsilon(np.array([500.0, 1000.1]))


def test_interpolation_does_not_overshoot_beside_a_step():
    # shape-preserving: Fritsch and Carlson, SIAM J. Numer. Anal. 17, 238 (1980); a plain cubic spline goes below 0 here
    table = OpticalTable(
        np.array([300.0, 320.0, 340.0, 360.0, 380.0]),
        np.array([2.0, 2.0, 2.0, 1.5, 1.5]),
        np.array([1.0, 1.0, 1e-6, 0.0, 0.0]),
        "r",
    )
    found = table.index(np.linspace(300.0, 380.0, 801))
    assert found.imag.min() >= 0.0
    assert found.imag.max() <= 1.0
    assert found.real.min() >= 1.5
    assert found.real.max() <= 2.0
    assert np.all(np.diff(found.imag) <= 1e-12)


def test_a_table_is_never_carried_on_beyond_its_ends():
    # Johnson and Christy's silver ends at 1937 nm, the material at 2500 nm
    shorter = material("silver").tables[2]
    with pytest.raises(ValueError, match=r"292\.4-1937 nm"):
        shorter.index(np.array([2000.0]))


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        (HEAD + TABLE.replace("[300, 1000]", "[400, 1000]"),
         "x.toml: valid_nm: 300, 1000; allowed: inside 400-1000, the range of table[0]"),
        (HEAD + TABLE.replace("[300, 1000]", "[-300, 1000]"), "x.toml: table[0].wavelength_nm: negative; allowed: wavelength_nm >= 0"),
        (HEAD + TABLE.replace("[1.5, 1.5]", "[1.5, -1.5]"), "x.toml: table[0].n: negative; allowed: n >= 0"),
        (HEAD + TABLE + "kappa = [0, 0]\n",
         "x.toml: table[0].kappa: unknown key; allowed: reference, wavelength_nm, n, k"),
        (HEAD + TABLE.replace('reference = "r"', ""), "x.toml: table[0].reference: missing or empty; allowed: a text"),
        (HEAD + TABLE.replace("[[table]]", "[table]"), "x.toml: table: not a list; allowed: [[table]] blocks"),
        (HEAD + "table = [3]\n", "x.toml: table[0]: 3; allowed: a table of keys"),
        (HEAD + LAW.replace('["constant"]', '"constant"'), "x.toml: laws: 'constant'; allowed: a list of names"),
        (HEAD + LAW.replace('["constant"]', "[3]"), "x.toml: laws: [3]; allowed: a list of names"),
        (HEAD + 'laws = ["constant"]\nparameters = 3\n', "x.toml: parameters: 3; allowed: a table of keys"),
        (HEAD + 'laws = ["constant"]\n[parameters]\n"constant.epsilon" = 2.0\n',
         "x.toml: constant.epsilon: 2.0; allowed: a table of keys"),
        (HEAD + LAW.replace("high", "hihg"),
         "x.toml: constant.epsilon.hihg: unknown key; allowed: value, low, high, sigma; did you mean 'high'?"),
        (HEAD + LAW.replace("value = 2.25", "value = 2.25, sigma = 0"),
         "x.toml: constant.epsilon.sigma: 0; allowed: greater than 0"),
        (HEAD + LAW.replace("low = 1.0", "low = -1.0"),
         "x.toml: constant.epsilon: -1..4; allowed: inside 0..inf, the bounds of the law"),
        (HEAD.replace("fixed", "starting") + LAW.replace(", low = 1.0, high = 4.0", ""),
         "x.toml: constant.epsilon: no room between 2.25 and 2.25; allowed: low < high where a fit begins"),
        (HEAD.replace("fixed", "starting") + TABLE, "x.toml: laws: missing; allowed: a list of names"),
        (HEAD + STARTING, f"x.toml: starting: {OUT_OF_PLACE}"),
        (HEAD + LAW + STARTING, f"x.toml: starting: {OUT_OF_PLACE}"),
        (HEAD + LAW + TABLE, f"x.toml: laws: {OUT_OF_PLACE}"),
        (HEAD + LAW.partition("\n")[2] + TABLE, f"x.toml: parameters: {OUT_OF_PLACE}"),
        (HEAD, "x.toml: laws: neither laws nor a table; allowed: a list of names"),
        (HEAD + TABLE + "[starting]\nflavour = 1\n",
         "x.toml: starting.flavour: unknown key; allowed: laws, parameters"),
        (HEAD + "starting = 3\n" + TABLE, "x.toml: starting: 3; allowed: a table of keys"),
        (HEAD + "index_550 = 1.9\n" + LAW, "x.toml: index_550: 1.9; allowed: a table of keys"),
        (HEAD + LAW + INDEX.replace("0.1", "-0.1"), "x.toml: index_550.sigma: -0.1; allowed: greater than 0"),
        (HEAD + LAW + INDEX.replace("1.9", "0"), "x.toml: index_550.value: 0; allowed: greater than 0"),
        (HEAD + LAW + INDEX.replace('reference = "r"', ""),
         "x.toml: index_550.reference: missing or empty; allowed: a text"),
        (HEAD + "continuous_above_nm = -3\n" + LAW, "x.toml: continuous_above_nm: -3; allowed: greater than 0"),
        (HEAD + LAW.replace("2.25", "1" + 400 * "0"), f"x.toml: constant.epsilon: {'1' + 39 * '0'}; allowed: a finite number"),
        (HEAD + LAW.replace("value = 2.25, ", ""), "x.toml: constant.epsilon: missing; allowed: a finite number"),
        (HEAD + 'refrence = "r"\n' + LAW,
         "x.toml: refrence: unknown key; allowed: name, kind, description, valid_nm, reference, origin, laws, "
         "parameters, table, starting, index_550, effective_mass, continuous_above_nm, index_sigma; "
         "did you mean 'reference'?"),
    ],
)  # fmt: skip
def test_a_faulty_file_is_told_in_one_sentence(tmp_path, content, sentence):
    assert refusal(tmp_path, content) == sentence


@pytest.mark.parametrize("junk", ["[" * 5000, "valid_nm = 1" + 5000 * "0", 'name = "x'])
def test_what_the_parser_chokes_on_is_one_line_too(tmp_path, junk):
    told = refusal(tmp_path, junk)
    assert "not a readable TOML file" in told
    assert "\n" not in told


@pytest.mark.parametrize("key", ["name", "kind", "description", "valid_nm", "reference", "origin"])
def test_nothing_loads_without(tmp_path, key):
    kept = "".join(line + "\n" for line in HEAD.splitlines() if not line.startswith(f"{key} ="))
    assert refusal(tmp_path, kept + LAW).startswith(f"x.toml: {key}: missing")


@pytest.mark.parametrize("written", ["ito", "Ito", "SODA-LIME-GLASS"])
def test_a_name_in_other_letters_is_recognised(written):
    with pytest.raises(MaterialError, match=f"unknown material '{written}'; did you mean") as caught:
        material(written)
    assert caught.value.do.casefold() == f"did you mean '{written}'?".casefold()


def test_the_library_holds_what_run_files_name():
    # contract of the run file: like and material names, and the three models
    needed = {"air", "soda-lime-glass", "low-iron-glass", "fused-silica", "borosilicate-crown-517642", "silicon",
              "silicon-nitride", "titania", "magnesium-fluoride", "silver", "aluminium", "chromium",
              "generic-tco", "generic-dielectric", "generic-metal", "ITO", "AZO", "FTO"}  # fmt: skip
    assert needed <= set(library())
    assert list(library()) == sorted(library())


@pytest.mark.parametrize("name", library())
def test_every_start_leaves_room(name):
    one = material(name)
    for parameter, start in one.parameters.items():
        assert start.low <= start.value <= start.high
        if one.kind == "starting" or one.tables:
            assert start.low < start.high, parameter
