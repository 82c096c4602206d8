"""Printed answers compared whole with kept texts.

To keep a changed text: FILMFIT_KEEP=1 pytest tests/reports, then read the difference.
"""

import os
from pathlib import Path

import pytest

from filmfit.report.plain import plain
from filmfit.report.text import fit_text, number, one_line, quantity
from filmfit.result import Quantity

KEPT = Path(__file__).parent / "kept"


@pytest.mark.parametrize("answer", ["usable", "check", "unusable"])
def test_printed_answer(answer, made_up):
    text = fit_text(made_up(answer), ["filed as fit 1 of run K2-0417, revision 1"]) + "\n"
    path = KEPT / f"fit-{answer}.txt"
    if os.environ.get("FILMFIT_KEEP"):
        path.write_text(text)
    assert text == path.read_text()


def test_an_unusable_answer_shows_no_result(made_up):
    text = fit_text(made_up("unusable"))
    assert "251.3" not in text
    assert "deposition rate" not in text


def test_one_line(made_up):
    assert one_line(made_up("check")) == "K2-0417: check, 251.30 nm   (95 %: 250.10 to 252.50); rival-thickness"
    assert one_line(made_up("unusable")) == "K2-0417: unusable, -; poor-fit"


@pytest.mark.parametrize(
    ("value", "sigma", "text"),
    [
        (251.3456, 0.61, "251.35"),
        (251.3456, 12.0, "251"),
        (251.3456, 130.0, "250"),
        (7.3123e20, 1.1e19, "7.31e+20"),
        (2.9134e-5, 6e-7, "2.913e-05"),
        (0.0021, 0.00034, "0.00210"),
        (3.66, None, "3.66"),
        (0.0, 0.1, "0.00"),
        (0.0, 1e-9, "0.0e+00"),
        (-0.001, 0.2, "0.00"),
        (0.00094, 0.00083, "0.00094"),
        (0.00003, 0.01, "0.000"),
        (2.57e-4, 2.5e-6, "2.570e-04"),
        (1.7, 1e-7, "1.70000000"),
    ],
)
def test_digits_follow_the_uncertainty(value, sigma, text):
    assert number(value, sigma) == text


def test_bounds_and_gaps():
    assert quantity(Quantity.at_least(3.66), "eV") == "at least 3.66 eV"
    assert quantity(Quantity(value=None, sigma=None, low=None, high=8.0), "nm") == "at most 8 nm"
    assert quantity(None, "nm") == "-"
    assert quantity(Quantity.between(1.0e7, 9.6e6, 1.04e7), "ohm") == "1.000e+07 ohm   (95 %: 9.60e+06 to 1.040e+07)"


def test_every_line_is_one_line_whatever_the_run_file_holds(made_up):
    odd = made_up("usable").model_copy(update={"film": "a\nb\x1b[2J\u202e"})
    text = fit_text(odd)
    assert text.splitlines()[0] == "K2-0417   a b?[2J?   USABLE: the numbers below may be used"
    assert "\x1b" not in one_line(odd)
    assert plain("\u00c5 \u9178 \t.") == "\u00c5 \u9178  ."
