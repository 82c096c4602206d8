"""Spectra in the layouts that benches and spreadsheets write."""

import re

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from filmfit.errors import SpectrumError
from filmfit.spectra.read import read_spectrum

X = np.arange(400.0, 500.0, 10.0)
T = 0.80 + 0.001 * np.arange(10)


def written(delimiter=",", decimal=".", percent=True, header=True, rows=None, order=1, unit="nm", end="\n"):
    scale = 100 if percent else 1
    lines = ["Some instrument", "Date 2026-04-17", ""] if header else []
    lines.append(delimiter.join([f"Wavelength ({unit})", "T (%)" if percent else "T"]))
    for x, y in list(zip(X, T, strict=True))[::order]:
        lines.append(delimiter.join(f"{v:.4f}".replace(".", decimal) for v in (x, scale * y)))
    return end.join(lines + (rows or [])) + end


def check(path, **keys):
    found = read_spectrum(path, "T", **keys)
    np.testing.assert_allclose(found.wavelength_nm, X, atol=1e-9)
    np.testing.assert_allclose(found.values, T, atol=1e-9)
    return found


@pytest.mark.parametrize("delimiter", [",", ";", "\t", "|"])
@pytest.mark.parametrize("decimal", [".", ","])
@pytest.mark.parametrize("percent", [True, False])
@pytest.mark.parametrize("order", [1, -1])
def test_layouts(tmp_path, delimiter, decimal, percent, order):
    if delimiter == decimal:
        return
    path = tmp_path / "a.csv"
    path.write_text(written(delimiter, decimal, percent, order=order))
    found = check(path)
    assert ("in percent" in found.notes[2]) is percent


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252", "cp932"])
@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_encodings_and_line_ends(tmp_path, encoding, end):
    word = {"cp932": "測定日 分光光度計 試料"}.get(encoding, "Gerät Größe µ")
    path = tmp_path / "a.csv"
    path.write_bytes((f"{word}{end}" + written(";", ",", end=end)).encode(encoding))
    check(path)


def test_blanks_and_exponents(tmp_path):
    path = tmp_path / "a.txt"
    path.write_text("\n".join(f"  {x:.1f}    {y:.4E}" for x, y in zip(X, T, strict=True)))
    found = check(path)
    assert found.notes[0].startswith("blank-delimited")


def test_blank_aligned_headings_keep_their_units(tmp_path):
    path = tmp_path / "a.txt"
    for above in ("Wavelength (nm)   T (%)", "nm T (%)", "# Wavelength [nm] T [%]", "Wavelength, nm    T, %"):
        path.write_text(above + "\n" + "\n".join(f"{x:7.1f}    {y:7.4f}" for x, y in zip(X, T, strict=True)))
        found = read_spectrum(path, "T")
        np.testing.assert_allclose(found.values, T / 100)  # below 1.5, and in percent all the same
        assert "in percent" in found.notes[2]


def test_units_in_a_line_of_their_own(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("Wavelength;T;R\nnm;%;%\n" + "".join(f"{x};{100 * y};9\n" for x, y in zip(X, T, strict=True)))
    assert check(path, column="T").column == "T (%)"


def test_quoted_cells_with_decimal_commas(tmp_path):
    path = tmp_path / "a.csv"
    rows = [f'"{x:.1f}","{100 * y:.4f}"'.replace(".", ",") for x, y in zip(X, T, strict=True)]
    path.write_text('"Wavelength, nm","T, %"\n' + "\n".join(rows))
    assert check(path).column == "T, %"


def test_double_spaced_lines(tmp_path):
    path = tmp_path / "a.csv"
    path.write_bytes(written(end="\r\r\n").encode())
    check(path)


def test_utf_16_without_a_mark(tmp_path):
    path = tmp_path / "a.csv"
    for encoding in ("utf-16-le", "utf-16-be"):
        path.write_bytes(written(";", ",").encode(encoding))
        check(path)


def test_foreign_letters_far_down(tmp_path):
    path = tmp_path / "a.csv"
    path.write_bytes((2000 * ("plain words " * 6 + "\n") + written(";", ",") + "\nGerät Größe µ\n").encode("cp1252"))
    check(path)


def test_each_ordinate_with_its_own_wavelengths(tmp_path):
    path = tmp_path / "a.csv"
    rows = [f"{x},{100 * y},{x + 5},{50 * y}" for x, y in zip(X, T, strict=True)]
    path.write_text("Wavelength (nm),A (%),Wavelength (nm),B (%)\n" + "\n".join(rows))
    check(path, column="A")
    found = read_spectrum(path, "T", "B")
    np.testing.assert_allclose(found.wavelength_nm, X + 5)
    np.testing.assert_allclose(found.values, T / 2)


def test_a_column_of_row_numbers_is_no_wavelength(tmp_path):
    path = tmp_path / "a.csv"
    rows = [f"{n},{x},{100 * y}" for n, (x, y) in enumerate(zip(X, T, strict=True))]
    path.write_text("No.,Wavelength (nm),T (%)\n" + "\n".join(rows))
    check(path)


def test_a_lone_row_of_column_numbers_above_a_falling_table(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("1,2\n" + written(header=False, percent=False, order=-1).partition("\n")[2])
    check(path)


def test_a_further_table_is_said(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text(written() + "Peaks\n" + "".join(f"{n},{400 + n}\n" for n in range(1, 7)))
    assert "a further table from line 16 left out" in check(path).notes


def test_words_for_gaps_and_fortran_exponents(tmp_path):
    path = tmp_path / "a.csv"
    rows = [f"{x},{y:.6E}".replace("E", "D") for x, y in zip(X, T, strict=True)]
    path.write_text("nm,T\n" + "\n".join([*rows, "500,#N/A", "510,1.#QNAN", "520,***", "530,-inf"]))
    assert "4 gaps left out" in check(path).notes


def test_header_and_footer_blocks_of_numbers_are_not_the_table(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("Slit,2\nLamp,1\n\n" + written(header=False) + "\nStatistics\n1,2\n2,3\n3,4\n")
    check(path)


def test_gaps_are_left_out_and_said(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text(written() + "500,--\n510,OVER\n520,\n")
    assert "3 gaps left out" in check(path).notes


def test_repeated_wavelengths_are_averaged_and_said(tmp_path):
    path = tmp_path / "a.csv"
    lines = written().splitlines()
    lines.append(lines[-1])
    path.write_text("\n".join(lines))
    assert "1 repeated wavelengths averaged" in check(path).notes


@pytest.mark.parametrize(
    ("unit", "convert"),
    [
        ("um", lambda x: x / 1000), ("µm", lambda x: x / 1000), ("Å", lambda x: 10 * x), ("cm-1", lambda x: 1e7 / x),
        ("cm⁻¹", lambda x: 1e7 / x),
        ("eV", lambda x: 1239.8419843320026 / x),  # h c / e by the exact constants of the 2019 SI
    ],
)  # fmt: skip
def test_other_units_of_the_first_column(tmp_path, unit, convert):
    path = tmp_path / "a.csv"
    rows = [f"{convert(x):.9f},{y:.6f}" for x, y in zip(X, T, strict=True)]
    path.write_text(f"x [{unit}],T\n" + "\n".join(rows), encoding="utf-8")
    found = read_spectrum(path, "T")
    np.testing.assert_allclose(found.wavelength_nm, X, rtol=1e-7)


@pytest.mark.parametrize(("heading", "factor"), [("Wavelength", 1.0), ("x", 1.0), ("Wavelength", 1e-3)])
def test_an_unstated_unit_is_told_where_one_reading_is_possible(tmp_path, heading, factor):
    path = tmp_path / "a.csv"
    path.write_text(f"{heading},T\n" + "\n".join(f"{x * factor:.4f},{y}" for x, y in zip(X, T, strict=True)))
    assert check(path).notes[1].endswith("by its range")


def test_percent_without_a_unit_is_told_by_its_size_and_said(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text(written().replace("T (%)", "T"))
    assert "by its size" in check(path).notes[2]


@pytest.mark.parametrize("column", ["T (%)", "T", 2, None])
def test_the_column_by_heading_name_number_or_quantity(tmp_path, column):
    path = tmp_path / "a.csv"
    rows = [f"{x},{100 * y},9.0" for x, y in zip(X, T, strict=True)]
    path.write_text("nm,T (%),R (%)\n" + "\n".join(rows))
    check(path, column=column)


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    st.lists(st.floats(0.0, 1.0), min_size=6, max_size=40), st.sampled_from([";", "\t", "|", " "]),
    st.sampled_from([".", ","]), st.booleans(), st.integers(0, 4),
)  # fmt: skip
def test_what_is_written_in_any_layout_is_read_back(tmp_path, values, delimiter, decimal, percent, extra):
    path = tmp_path / "a.csv"
    x = 300.0 + 5.0 * np.arange(len(values))
    y = np.array(values)
    lines = [f"comment {n}" for n in range(extra)] + [delimiter.join(["nm", "T(%)" if percent else "T"])]
    shown = 100 * y if percent else y
    lines += [delimiter.join(f"{v:.6f}".replace(".", decimal) for v in row) for row in zip(x, shown, strict=True)]
    path.write_text("\n".join(lines))
    found = read_spectrum(path, "T")
    np.testing.assert_allclose(found.wavelength_nm, x)
    np.testing.assert_allclose(found.values, y, atol=1e-6)


def sentence_or_reading(path):
    try:
        found = read_spectrum(path, "T")
    except SpectrumError as error:
        assert "\n" not in str(error)
    else:
        assert np.all(np.diff(found.wavelength_nm) > 0)
        assert np.all(np.isfinite(found.values))


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.binary(max_size=400))
def test_any_bytes_end_in_a_reading_or_a_sentence(tmp_path, content):
    path = tmp_path / "a.csv"
    path.write_bytes(content)
    sentence_or_reading(path)


@settings(max_examples=200, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    st.sampled_from([",", ";", "\t", " "]), st.integers(0, 250), st.integers(0, 40),
    st.text(alphabet="0123456789.,;-+eE\"\t\r\n %Tnmcm\x00µ", max_size=20),
)  # fmt: skip
def test_any_mangled_table_ends_in_a_reading_or_a_sentence(tmp_path, delimiter, at, cut, put):
    path = tmp_path / "a.csv"
    text = written(delimiter, "," if delimiter == ";" else ".")
    path.write_bytes((text[:at] + put + text[at + cut :]).encode("utf-8"))
    sentence_or_reading(path)


def test_every_practice_file_is_read(practice):
    files = sorted(practice.glob("*/*.csv"))
    assert len({path.parent for path in files}) == 47
    for path in files:
        lines = path.read_text().splitlines()
        at = next(number for number, line in enumerate(lines) if line.startswith("Wavelength"))
        heads = re.split("[,;\t]", lines[at])
        for quantity in [head[0] for head in heads[1:]]:
            found = read_spectrum(path, quantity, quantity)
            assert found.column in (quantity, f"{quantity} (%)")
            assert found.wavelength_nm.size == len(lines) - at - 1
            first = re.split("[;\t]" if ";" in lines[at] or "\t" in lines[at] else ",", lines[at + 1])
            wanted = [float(cell.replace(",", ".")) for cell in (first[0], first[heads.index(found.column)])]
            place = int(np.argmin(abs(found.wavelength_nm - wanted[0])))
            assert found.wavelength_nm[place] == wanted[0]
            assert found.values[place] == pytest.approx(wanted[1] / (100 if "%" in found.column else 1))


def test_measured_files_are_read(measured):
    found = read_spectrum(measured / "fto-coated.csv", "R", "R_film_side")
    assert (found.wavelength_nm[0], found.wavelength_nm[-1]) == (300.0, 2500.0)
