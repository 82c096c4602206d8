"""What a spectrum file is refused for, in whole sentences."""

import os

import pytest

from filmfit.errors import SpectrumError
from filmfit.spectra.read import check_sum, read_spectrum

ROWS = "".join(f"{x},{0.5 + x / 1e4:.4f}\n" for x in range(400, 500, 10))
TWO = "nm,T (%),R (%)\n" + "".join(f"{x},80.0,9.0\n" for x in range(400, 500, 10))

REFUSED = [
    (b"", None, "w: 'a.csv' is empty; export the spectrum again"),
    (b"\n \n", None, "w: 'a.csv' is empty; export the spectrum again"),
    (b"one line of words\nand another\n", None,
     "w: 'a.csv' holds no table of numbers with at least 5 rows; allowed: a wavelength column and columns of R or T; "
     "export the spectrum as delimited text"),
    (b"nm,T\n400,0.5\n410,0.5\n", None,
     "w: 'a.csv' holds no table of numbers with at least 5 rows; allowed: a wavelength column and columns of R or T; "
     "export the spectrum as delimited text"),
    (b"PK\x03\x04rest", None, "w: 'a.csv' is a workbook: not supported yet; save the sheet as CSV"),
    (b"\xd0\xcf\x11\xe0rest", None, "w: 'a.csv' is a workbook: not supported yet; save the sheet as CSV"),
    (b"##TITLE=scan\n##END=\n", None, "w: 'a.csv' is JCAMP-DX: not supported yet; export it as delimited text"),
    (b"\x00\x01\x02" * 50, None, "w: 'a.csv' is not a text file; export the spectrum as delimited text"),
    (b"\xff\xfe1", None, "w: 'a.csv' says it is utf-16 but is not; export it again"),
    (TWO.replace("T (%)", "S1 (%)").encode(), None,
     "w: 'a.csv' holds 2 spectra; allowed: 'S1 (%)', 'R (%)'; name one as column"),
    (TWO.encode(), "A", "w: no column 'A' in 'a.csv'; allowed: 'T (%)', 'R (%)'"),
    (TWO.encode(), 4, "w: no column 4 in 'a.csv'; allowed: 2 to 3"),
    (TWO.encode(), 1, "w: no column 1 in 'a.csv'; allowed: 2 to 3"),
    (TWO.replace("R (%)", "T").encode(), "T ", "w: 2 columns 'T ' in 'a.csv'; give its number instead"),
    (("x,T\n" + "".join(f"{x},0.5\n" for x in range(100, 108))).encode(), None,
     "w: 'a.csv' does not say the unit of its first column (100 to 107); allowed: nm, um, cm-1 or eV in its heading"),
    (("eV,T\n" + "".join(f"{x},0.5\n" for x in range(-2, 6))).encode(), None,
     "w: 'a.csv' has -2 eV; allowed: positive numbers"),
    (("nm,T\n" + ROWS.replace("0.54", "-0.2")).encode(), None,
     "w: 'a.csv' holds -0.29 as a fraction of 1; allowed: -0.05 to 1.5; check column and unit"),
    (("nm,T (%)\n" + "".join(f"{x},180\n" for x in range(400, 500, 10))).encode(), None,
     "w: 'a.csv' holds 1.8 as a fraction of 1; allowed: -0.05 to 1.5; check column and unit"),
    (("nm,T\n" + "".join(f"{x},--\n" for x in range(400, 500, 10))).encode(), None,
     "w: 'a.csv' has 0 points in column 'T'; allowed: at least 5"),
    (("nm,T\n" + "".join(f"{x},10,{x % 7}\n" for x in range(300, 400, 10))).encode(), None,
     "w: a.csv:2: '300,10,6' under 2 headings is 3 numbers, or 2 with a decimal comma; export it with semicolons or a "
     "decimal point"),
    (("nm,T\n" + ROWS).encode() + b"\xff\xfe\x00\x00", None,
     "w: 'a.csv' is not a text file; export the spectrum as delimited text"),
    (("".join(f"{x},0,{x % 7}\n" for x in range(300, 400, 10))).encode(), 2,
     "w: a.csv:1: '300,0,6' is 3 numbers, or fewer with a decimal comma; export it with semicolons or a decimal point"),
    (("nm,T\n" + ROWS + ROWS).encode(), None,
     "w: a.csv:12: the first column turns round here; allowed: ascending or descending; sort the rows, or export each "
     "scan to its own file"),
    (("nm,T\n" + "".join(f"{x},0.5\n" for x in (400, 500, 410, 490, 420, 480, 430, 470, 440, 460))).encode(), None,
     "w: a.csv:3: the first column turns round here; allowed: ascending or descending; sort the rows, or export each "
     "scan to its own file"),
    (("nm,T\n" + ROWS).encode(), "R", "w: no column 'R' in 'a.csv'; allowed: 'T'"),
    (("nm,R (%)\n" + ROWS).encode(), None, "w: 'a.csv' holds 'R (%)', not T; set the quantity, or name the column"),
    (("nm,Absorbance\n" + ROWS).encode(), None,
     "w: 'Absorbance' in 'a.csv' is absorbance: not supported yet; export it as R or T"),
    (("nm,T,R\n" + "".join(f"{x},0.9,63\n" for x in range(400, 500, 10))).encode(), "T",
     "w: 'T' in 'a.csv' goes to 0.9 and 'R' to 63: one in percent, one not; state '%' in the headings of columns in "
     "percent"),
    (("x,T\n" + "".join(f"{x / 1000},0.5\n" for x in range(400, 500, 10))).encode(), None,
     "w: 'a.csv' does not say the unit of its first column (0.4 to 0.49); allowed: nm, um, cm-1 or eV in its heading"),
    (("x,T\n" + "".join(f"{x},0.5\n" for x in range(400, 4001, 100))).encode(), None,
     "w: 'a.csv' does not say the unit of its first column (400 to 4000); allowed: nm, um, cm-1 or eV in its heading"),
    (("Wavelength (um),T\n" + ROWS).encode(), None,
     "w: 'a.csv' has wavelengths of 400000 to 490000 nm, read in um by 'Wavelength (um)'; allowed: 100 to 100000 nm; check "
     "the unit of its first column"),
    (("nm,T\n" + "".join(f"{x},{y}\n" for x in range(400, 450, 10) for y in (0.5, 0.6))).encode(), None,
     "w: 'a.csv' has 2 values at 400 nm that differ by 0.1; allowed: at most 0.05; export each scan to its own column or "
     "file"),
    (b"nm,T\n" + 6 * b"400,0.5\n", None, "w: 'a.csv' has 1 different wavelengths; allowed: at least 5"),
]  # fmt: skip


@pytest.mark.parametrize(("content", "column", "sentence"), REFUSED)
def test_sentence(tmp_path, content, column, sentence):
    path = tmp_path / "a.csv"
    path.write_bytes(content)
    with pytest.raises(SpectrumError) as caught:
        read_spectrum(path, "T", column, "w")
    assert str(caught.value) == sentence


def test_missing_file_and_folder(tmp_path):
    (tmp_path / "scan.csv").write_text(TWO)
    with pytest.raises(SpectrumError) as caught:
        read_spectrum(tmp_path / "scam.csv", "T", None, "w")
    assert str(caught.value) == f"w: no file 'scam.csv' in {tmp_path}; did you mean 'scan.csv'?"
    with pytest.raises(SpectrumError) as caught:
        read_spectrum(tmp_path, "T", None, "w")
    assert str(caught.value) == f"w: '{tmp_path.name}' is a folder; name the file in it"


def test_names_that_no_file_can_have_and_files_that_are_none(tmp_path):
    with pytest.raises(SpectrumError) as caught:
        read_spectrum(tmp_path / (300 * "x"), "T", None, "w")
    assert str(caught.value) == f"w: '{300 * 'x'}' cannot be read: File name too long"
    with pytest.raises(SpectrumError, match="no file"):
        read_spectrum(tmp_path / "a\0b", "T", None, "w")
    os.mkfifo(tmp_path / "pipe")
    with pytest.raises(SpectrumError) as caught:
        read_spectrum(tmp_path / "pipe", "T", None, "w")
    assert str(caught.value) == "w: 'pipe' is no plain file; save the spectrum to a file"


def pair(tmp_path, reflected, transmitted):
    found = []
    for name, rows in (("R", reflected), ("T", transmitted)):
        path = tmp_path / f"{name}.csv"
        path.write_text(f"nm,{name}\n" + "".join(f"{x},{y}\n" for x, y in rows))
        found.append(read_spectrum(path, name))
    return found


def test_scans_that_do_not_overlap(tmp_path):
    R, T = pair(tmp_path, [(x, 0.1) for x in range(400, 500, 10)], [(x, 0.8) for x in range(600, 700, 10)])
    with pytest.raises(SpectrumError) as caught:
        check_sum(R, T, "w")
    assert str(caught.value) == "w: R (400-490 nm) and T (600-690 nm) do not overlap; measure both over one range"


def test_sum_far_above_one(tmp_path):
    R, T = pair(tmp_path, [(x, 0.3) for x in range(400, 500, 10)], [(x, 0.8) for x in range(400, 500, 10)])
    with pytest.raises(SpectrumError) as caught:
        check_sum(R, T, "w")
    assert str(caught.value) == (
        "w: R + T is above 1.05 on 100 % of the points, up to 1.10; allowed: at most 5 %; check units, columns and the "
        "100 % line"
    )


def test_sum_little_above_one_is_no_refusal(tmp_path):
    R, T = pair(tmp_path, [(x, 0.22) for x in range(400, 500, 10)], [(x, 0.8) for x in range(400, 500, 10)])
    check_sum(R, T, "w")
