"""How a refusal is worded."""

import pytest

from filmfit.errors import (
    Faults,
    FilmfitError,
    MaterialError,
    RecordsError,
    RunFileError,
    SpectrumError,
    UsageError,
    nearest,
)


@pytest.mark.parametrize(
    ("parts", "sentence"),
    [
        (("a.toml:3: run.id", "''"), "a.toml:3: run.id: ''"),
        (("a.toml", "is empty", "", "write one"), "a.toml: is empty; write one"),
        (("a.toml", "7", "1, 2"), "a.toml: 7; allowed: 1, 2"),
        (("a.toml", "7", "1, 2", "write 1"), "a.toml: 7; allowed: 1, 2; write 1"),
        (("here", "two\nlines", "", "go\t on"), "here: two lines; go on"),
    ],
)
def test_a_sentence_is_composed_of_its_parts_on_one_line(parts, sentence):
    assert str(FilmfitError(*parts)) == sentence


def test_the_parts_stay_apart_for_machines():
    error = RunFileError("a.toml:3: run.id", "two\nlines", do="write one")
    assert error.as_dict() == {"where": "a.toml:3: run.id", "found": "two\nlines", "allowed": "", "do": "write one"}


@pytest.mark.parametrize("kind", [UsageError, RunFileError, SpectrumError, MaterialError, RecordsError])
def test_every_fault_of_a_user_is_of_one_family(kind):
    assert issubclass(kind, FilmfitError)
    assert not issubclass(Faults, FilmfitError)


def test_faults_keep_the_order_of_the_input():
    first, second = RunFileError("a.toml:9", "x"), SpectrumError("a.toml:2", "y")
    several = Faults(one for one in (first, second))
    assert several.errors == (first, second)
    assert str(several) == "a.toml:9: x\na.toml:2: y"


def test_the_nearest_known_word_is_named_and_no_far_one():
    assert nearest("thicknes", ["thickness_nm", "time_s"]) == "did you mean 'thickness_nm'?"
    assert nearest("zzz", ["thickness_nm"]) == ""
    assert nearest("a", []) == ""
