"""A person's own tables: dialects written by hand as bytes, and files that are refused.

The values are invented. Every dialect holds the same three rows; the numbers wanted stand below.
"""

# ruff: noqa: E501 - whole messages

import numpy as np
import pytest

import filmstack as fs

WAVELENGTH = [400.0, 500.0, 800.0]
N = [2.41, 2.35, 2.29]
K = [0.002, 0.001, 0.0005]

DIALECTS = {
    "plain": (b"wavelength_nm,n,k\n400,2.41,0.002\n500,2.35,0.001\n800,2.29,0.0005\n", ""),
    "no_line_end_at_the_end": (b"wavelength_nm,n,k\n400,2.41,0.002\n500,2.35,0.001\n800,2.29,0.0005", ""),
    "windows_lines": (b"wavelength_nm,n,k\r\n400,2.41,0.002\r\n500,2.35,0.001\r\n800,2.29,0.0005\r\n", ""),
    "old_mac_lines": (b"wavelength_nm,n,k\r400,2.41,0.002\r500,2.35,0.001\r800,2.29,0.0005\r", ""),
    "blanks_around": (b"wavelength_nm , n , k\n 400 , 2.41 , 0.002\n500, 2.35, 0.001\n800,2.29,0.0005 \n", ""),
    "blank_lines": (b"\n\nwavelength_nm,n,k\n\n400,2.41,0.002\n500,2.35,0.001\n,,\n800,2.29,0.0005\n\n", ""),
    "quoted": (b'"wavelength_nm","n","k"\n"400","2.41","0.002"\n"500","2.35","0.001"\n"800","2.29","0.0005"\n', ""),
    "exponents": (b"wavelength_nm,n,k\n4e2,2.41,2e-3\n5.0E+02,2.35,1.0E-3\n8e2,2.29,5e-4\n", ""),
    "comma_at_the_end": (b"wavelength_nm,n,k\n400,2.41,0.002,\n500,2.35,0.001,\n800,2.29,0.0005,\n", ""),
    "spreadsheet": (
        b"sep=;\r\nwavelength_nm;n;k;\r\n400;2,41;0,002;\r\n500;2,35;0,001;\r\n800;2,29;0,0005;\r\n",
        ", separated by semicolons, decimal comma",
    ),
    "columns_swapped": (b"k,n,wavelength_nm\n0.002,2.41,400\n0.001,2.35,500\n0.0005,2.29,800\n", ""),
    "capitals_and_brackets": (b"Wavelength [nm],N,K\n400,2.41,0.002\n500,2.35,0.001\n800,2.29,0.0005\n", ""),
    "comments": (
        b"# evaporated on Monday\n% run 7\nwavelength_nm,n,k\n400,2.41,0.002\n// a pause\n500,2.35,0.001\n800,2.29,0.0005\n",
        ", 3 comment lines skipped",
    ),
    "semicolons": (
        b"wavelength_nm;n;k\n400;2.41;0.002\n500;2.35;0.001\n800;2.29;0.0005\n",
        ", separated by semicolons",
    ),
    "decimal_comma": (
        b"wavelength_nm;n;k\n400;2,41;0,002\n500;2,35;0,001\n800;2,29;0,0005\n",
        ", separated by semicolons, decimal comma",
    ),
    "quoted_decimal_comma": (
        b'wavelength_nm,n,k\n400,"2,41","0,002"\n500,"2,35","0,001"\n800,"2,29","0,0005"\n',
        ", decimal comma",
    ),
    "tabs": (b"wavelength_nm\tn\tk\n400\t2.41\t0.002\n500\t2.35\t0.001\n800\t2.29\t0.0005\n", ", separated by tabs"),
    "tabs_decimal_comma": (
        b"wavelength_nm\tn\tk\n400\t2,41\t0,002\n500\t2,35\t0,001\n800\t2,29\t0,0005\n",
        ", separated by tabs, decimal comma",
    ),
    "blanks": (b"wavelength_nm  n  k\n400  2.41  0.002\n500 2.35 0.001\n 800 2.29 0.0005\n", ", separated by blanks"),
    "bars": (b"wavelength_nm|n|k\n400|2.41|0.002\n500|2.35|0.001\n800|2.29|0.0005\n", ", separated by bars"),
    "byte_order_mark": (
        b"\xef\xbb\xbfwavelength_nm,n,k\n400,2.41,0.002\n500,2.35,0.001\n800,2.29,0.0005\n",
        ", byte-order mark",
    ),
    "utf_16_little": (
        b"\xff\xfe" + bytes(b for c in b"wavelength_nm;n;k\n400;2,41;0,002\n500;2,35;0,001\n800;2,29;0,0005\n" for b in (c, 0)),
        ", UTF-16, separated by semicolons, decimal comma",
    ),
    "utf_16_big": (
        b"\xfe\xff" + bytes(b for c in b"wavelength_nm,n,k\n400,2.41,0.002\n500,2.35,0.001\n800,2.29,0.0005\n" for b in (0, c)),
        ", UTF-16",
    ),
    "utf_16_unmarked": (
        bytes(b for c in b"wavelength_nm,n,k\n400,2.41,0.002\n500,2.35,0.001\n800,2.29,0.0005\n" for b in (c, 0)),
        ", UTF-16 without a byte-order mark",
    ),
    "latin_1": (
        b"# gemessen von J. M\xfcller\nwavelength_nm,n,k\n400,2.41,0.002\n500,2.35,0.001\n800,2.29,0.0005\n",
        ", letters beyond ASCII read as Latin-1, 1 comment line skipped",
    ),
    "descending": (
        b"wavelength_nm,n,k\n800,2.29,0.0005\n500,2.35,0.001\n400,2.41,0.002\n",
        ", descending order turned",
    ),
    "disordered": (b"wavelength_nm,n,k\n500,2.35,0.001\n800,2.29,0.0005\n400,2.41,0.002\n", ", rows put in order"),
    "micrometres": (
        b"wavelength_um,n,k\n0.4,2.41,0.002\n0.5,2.35,0.001\n0.8,2.29,0.0005\n",
        ", wavelength_um turned into nm",
    ),
    "micrometres_greek": (
        "wavelength (\N{GREEK SMALL LETTER MU}m),n,k\n0.4,2.41,0.002\n0.5,2.35,0.001\n0.8,2.29,0.0005\n".encode(),
        ", wavelength_um turned into nm",
    ),
    # hc/e = 1239.84198 eV nm (CODATA 2022): 3.099604961, 2.479683969 and 1.54980248 eV
    "photon_energy": (
        b"energy_ev,n,k\n1.54980248,2.29,0.0005\n2.479683969,2.35,0.001\n3.099604961,2.41,0.002\n",
        ", energy_ev turned into nm",
    ),
    "wavenumber": (
        b"Wavenumber (cm-1),n,k\n12500,2.29,0.0005\n20000,2.35,0.001\n25000,2.41,0.002\n",
        ", wavenumber_per_cm turned into nm",
    ),
    # (n + ik)^2 = n^2 - k^2 + 2ink, by hand
    "permittivity": (
        b"wavelength_nm,eps_real,eps_imag\n400,5.808096,0.00964\n500,5.522499,0.0047\n800,5.24409975,0.00229\n",
        ", n and k from eps_real and eps_imag, eps_imag > 0 taken as absorbing",
    ),
    "repeated_row": (
        b"wavelength_nm,n,k\n400,2.41,0.002\n500,2.35,0.001\n500,2.35,0.001\n800,2.29,0.0005\n",
        ", 1 repeated row dropped",
    ),
}  # fmt: skip


@pytest.mark.parametrize("dialect", DIALECTS)
def test_dialects_are_read_and_every_assumption_is_told(tmp_path, dialect):
    content, told = DIALECTS[dialect]
    (tmp_path / "film.csv").write_bytes(content)
    table = fs.material(tmp_path / "film.csv")
    np.testing.assert_allclose(table.wavelength_nm, WAVELENGTH, rtol=1e-8)
    index = table.index(table.wavelength_nm)
    np.testing.assert_allclose(index.real, N, rtol=1e-8)
    np.testing.assert_allclose(index.imag, -np.array(K), rtol=1e-8)
    rows = 4 if dialect == "repeated_row" else 3
    note = f"read {rows} rows, 400 to 800 nm{told}"
    assert table.provenance.notes == (note,)
    assert table.reading_report == note
    assert "film.csv" in table.label
    assert str(tmp_path / "film.csv") in table.provenance.source


def test_a_missing_k_is_zero_and_told(tmp_path):
    (tmp_path / "film.csv").write_bytes(b"wavelength_nm;n\n320;1,52\n1100;1,48\n")
    table = fs.material(tmp_path / "film.csv")
    assert table.provenance.notes == (
        "read 2 rows, 320 to 1100 nm, separated by semicolons, decimal comma, k taken as 0",
    )
    assert np.all(table.index([320, 700, 1100]).imag == 0.0)


def test_the_description_in_the_file_is_shown(tmp_path):
    (tmp_path / "film.csv").write_bytes(
        b"# label: TiO2, our plant\n# source: run 12\n# form: evaporated film\nwavelength_nm,n\n400,2.4\n800,2.3\n"
    )
    provenance = fs.material(tmp_path / "film.csv").provenance
    assert provenance.label == "TiO2, our plant"
    assert provenance.source == f"your file {tmp_path / 'film.csv'}: run 12"
    assert provenance.form == "evaporated film"


def test_gain_is_read_where_it_is_asked_for(tmp_path):
    (tmp_path / "film.csv").write_bytes(b"wavelength_nm,n,k\n400,2.4,-0.001\n800,2.3,-0.002\n")
    table = fs.material(tmp_path / "film.csv", allow_gain=True)
    np.testing.assert_allclose(table.index([400, 800]).imag, [0.001, 0.002])


def test_the_smoothing_is_told(tmp_path):
    wavelength = np.arange(400, 901, 20)
    rows = "".join(f"{w},{1.45 + 3500.0 / w**2:.3f}\n" for w in wavelength)
    (tmp_path / "film.csv").write_text(f"wavelength_nm,n\n{rows}")
    table = fs.material(tmp_path / "film.csv")
    moved = np.abs(table.index(wavelength).real - table.n)
    assert 1e-5 < moved.max() <= 0.0005
    assert table.provenance.notes == (table.reading_report,)
    assert table.reading_report.endswith(f"n drawn smoothly, at most {moved.max():.1g} from the rows")


def test_scatter_above_the_printed_digits_is_told(tmp_path):
    wavelength = np.linspace(400.0, 900.0, 300)
    n = 1.45 + 3500.0 / wavelength**2 + np.random.default_rng(1).normal(size=300) * 1e-3
    rows = "".join(f"{w:.2f},{x:.6f}\n" for w, x in zip(wavelength, n, strict=True))
    (tmp_path / "film.csv").write_text(f"wavelength_nm,n\n{rows}")
    table = fs.material(tmp_path / "film.csv")
    assert table.derivative_order == 1
    assert table.provenance.notes == (table.reading_report,)
    assert table.reading_report == (
        "read 300 rows, 400 to 900 nm, k taken as 0, n drawn from row to row without a smooth second derivative "
        "(its rows scatter or jump by more than their last digit: give n with the digits that are certain)"
    )


@pytest.mark.parametrize("ending", [".txt", ".dat", ".tsv", ".CSV"])
def test_other_endings_of_text_files_are_read(tmp_path, ending):
    path = tmp_path / f"film{ending}"
    path.write_bytes(b"wavelength_nm\tn\n400\t2.4\n800\t2.3\n")
    assert fs.material(path).index(800.0) == 2.3


HEAD = b"wavelength_nm,n,k\n"
COLUMNS = "wavelength_nm, wavelength_um, energy_ev, wavenumber_per_cm, n, k, eps_real, eps_imag"
SPECTRAL = "wavelength_nm, wavelength_um, energy_ev, wavenumber_per_cm"
REFLECTANCE = (
    "which look like reflectance or transmittance in {}. "
    "Give n and k; if these are a medium's, give them as eps_real and eps_imag"
)
COMMAS = "Commas can not both separate and mark decimals: separate the columns by semicolons"
SIZE = "Correct the cell; give no percent of reflectance or transmittance"
BAD = {
    "empty": (b"", "{f}: expected a header such as wavelength_nm,n,k and rows below it, found no line of data. Fill in the table"),
    "comments_only": (b"# to do\n\n", "{f}: expected a header such as wavelength_nm,n,k and rows below it, found no line of data. Fill in the table"),
    "header_only": (HEAD, "{f}: expected at least two rows below the header, found none. For an index without dispersion write it twice, at the ends of its range"),
    "one_row": (HEAD + b"550,1.46,0\n", "{f}: expected at least two rows below the header, found one row. For an index without dispersion write it twice, at the ends of its range"),
    "no_header": (b"400,2.41,0\n500,2.35,0\n", "{f}: line 1: expected a header such as wavelength_nm,n,k, found numbers (400, 2.41, 0). Write a first line that names the columns and their unit"),
    "spreadsheet": (b"PK\x03\x04\x14\0\x06\0", "{f}: expected a text file, found bytes that are no text. Save the table as CSV (UTF-8)"),
    "picture": (b"\x89PNG\r\n\x1a\n\0\0\0\rIHDR", "{f}: expected a text file, found bytes that are no text. Save the table as CSV (UTF-8)"),
    "half_utf_16": (b"\xff\xfew\0a\0v", "{f}: expected a text file, found bytes that are no text. Save the table as CSV (UTF-8)"),
    "misspelt_column": (b"wavelenght_nm,n,k\n400,2.4,0\n500,2.3,0\n", "{f}: line 1: unknown column 'wavelenght_nm'. Did you mean wavelength_nm?"),
    "strange_column": (b"wavelength_nm,n,k,operator\n400,2.4,0,A\n500,2.3,0,A\n", "{f}: line 1: unknown column 'operator'. The columns are " + COLUMNS),
    "two_faults_in_the_header": (b"wavelenth_nm,n,kk\n400,2.4,0\n", "{f}: line 1: unknown column 'wavelenth_nm'. Did you mean wavelength_nm?\n{f}: line 1: unknown column 'kk'. Did you mean k?"),
    "no_unit": (b"wavelength,n,k\n400,2.4,0\n500,2.3,0\n", "{f}: line 1: expected a column with its unit, found 'wavelength'. Name it wavelength_nm or wavelength_um"),
    "energy_without_unit": (b"# x\nEnergy;n\n2;2.4\n3;2.3\n", "{f}: line 2: expected a column with its unit, found 'Energy'. Name it energy_ev"),
    "no_wavelength": (b"n,k\n2.4,0\n2.3,0\n", "{f}: line 1: expected one column of " + SPECTRAL + ", found none. Name or keep one"),
    "two_axes": (b"wavelength_nm,energy_ev,n\n400,3.1,2.4\n500,2.48,2.3\n", "{f}: line 1: expected one column of " + SPECTRAL + ", found wavelength_nm and energy_ev. Name or keep one"),
    "column_twice": (b"wavelength_nm,n,n\n400,2.4,2.4\n500,2.3,2.3\n", "{f}: line 1: column n stands twice. Keep one"),
    "no_n": (b"wavelength_nm,k\n400,0\n500,0\n", "{f}: line 1: expected a column n, found wavelength_nm, k. Add it"),
    "half_a_permittivity": (b"wavelength_nm,eps_real\n400,5.8\n500,5.5\n", "{f}: line 1: expected a column eps_imag, found wavelength_nm, eps_real. Add it"),
    "both_pairs": (b"wavelength_nm,n,k,eps_real,eps_imag\n400,2.4,0,5.76,0\n500,2.3,0,5.29,0\n", "{f}: line 1: expected n and k, or eps_real and eps_imag, found both. Keep one pair"),
    "text_in_a_cell": (HEAD + b"400,2.41,0\n500,approx 2.35,0\n", "{f}: line 3: n: expected a number, found 'approx 2.35'. Correct the cell or delete the row"),
    "nan": (HEAD + b"400,NaN,0\n500,2.35,0\n", "{f}: line 2: n: expected a number, found 'NaN'. Correct the cell or delete the row"),
    "infinite": (HEAD + b"400,2.41,inf\n500,2.35,0\n", "{f}: line 2: k: expected a number, found 'inf'. Correct the cell or delete the row"),
    "empty_cell": (HEAD + b"400,2.41,0\n\n# pause\n500,,0\n", "{f}: line 5: n: expected a number, found nothing. Correct the cell or delete the row"),
    "two_bad_cells": (HEAD + b"400,x,0\n500,2.35,y\n", "{f}: line 2: n: expected a number, found 'x'. Correct the cell or delete the row\n{f}: line 3: k: expected a number, found 'y'. Correct the cell or delete the row"),
    "short_row": (HEAD + b"400,2.41,0\n500,2.35\n", "{f}: line 3: expected 3 cells as in the header, found 2. Correct the row"),
    "long_row": (HEAD + b"400,2.41,0,7\n500,2.35,0\n", "{f}: line 2: expected 3 cells as in the header, found 4. Correct the row"),
    "commas_for_all": (HEAD + b"400,0,2,41,0,0\n500,0,2,35,0,0\n", "{f}: line 2: expected 3 cells as in the header, found 6. Commas can not both separate and mark decimals: separate the columns by semicolons\n{f}: line 3: expected 3 cells as in the header, found 6. Commas can not both separate and mark decimals: separate the columns by semicolons"),
    "thousands": (b"wavelength_nm;n;k\n900;2.41;0\n1,064;2.35;0\n", "{f}: line 3: expected one decimal sign, found '1,064' beside numbers with a decimal point. Write no thousands separators, and one decimal sign throughout"),
    "zero_wavelength": (HEAD + b"0,2.41,0\n500,2.35,0\n", "{f}: line 2: wavelength_nm: expected a number > 0 nm, found 0. Correct the cell"),
    "negative_energy": (b"energy_ev,n\n-1,2.41\n2,2.35\n", "{f}: line 2: energy_ev: expected a number > 0 eV, found -1. Correct the cell"),
    "micrometres_as_nm": (HEAD + b"0.55,2.41,0\n1.1,2.35,0\n", "{f}: line 2: wavelength_nm: expected numbers in nm, found 0.55 to 1.1. If they are of another unit, name the column wavelength_um"),
    "nm_as_micrometres": (b"wavelength_um,n\n400,2.41\n1100,2.35\n", "{f}: line 2: wavelength_um: expected numbers in um, found 400 to 1100. If they are of another unit, name the column wavelength_nm"),
    "nm_as_energy": (b"energy_ev,n\n400,2.41\n1100,2.35\n", "{f}: line 2: energy_ev: expected numbers in eV, found 400 to 1100. If they are of another unit, name the column wavelength_nm"),
    "energy_as_wavenumber": (b"wavenumber_per_cm,n\n1.1,2.41\n3.1,2.35\n", "{f}: line 2: wavenumber_per_cm: expected numbers in cm^-1, found 1.1 to 3.1. If they are of another unit, name the column energy_ev or wavelength_um"),
    "metres_as_micrometres": (b"wavelength_um,n\n4e-7,2.41\n11e-7,2.35\n", "{f}: line 2: wavelength_um: expected numbers in um, found 4e-07 to 1.1e-06. Write them in um"),
    "infrared_micrometres_as_nm": (HEAD + b"2.5,4.02,0\n14,4.00,0.0001\n", "{f}: line 2: n: expected n near 1 below 25 nm, found 4.02 at 2.5 nm. If the column wavelength_nm is of another unit, name it wavelength_um"),
    "two_units": (HEAD + b"400,2.41,0\n0.5,2.35,0\n600,2.3,0\n700,2.3,0\n", "{f}: line 3: wavelength_nm: expected numbers of one unit, found 0.5 beside 400. Correct the cell, or write all rows in one unit"),
    "decimal_sign_lost": (HEAD + b"400,2.41,0\n500,235,0\n600,2.3,0\n", "{f}: line 3: n: expected n below 10 at wavelengths below 3000 nm, found 235. " + SIZE),
    "percent_with_absorptance": (HEAD + b"400,30.5,20.1\n500,31.5,22.1\n", "{f}: line 2: n: expected n below 10 at wavelengths below 3000 nm, found 30.5. " + SIZE + "\n{f}: line 3: n: expected n below 10 at wavelengths below 3000 nm, found 31.5. " + SIZE),
    "k_too_large": (HEAD + b"400,1.5,0\n500,1.5,100\n", "{f}: line 3: k: expected k below 60 at wavelengths below 3000 nm, found 100. " + SIZE),
    "decimal_comma_taken_for_k": (HEAD + b"400,1,46\n500,1,45\n", "{f}: line 2: expected n and k, found 1 and 46, which look like one number with a decimal comma. " + COMMAS),
    "decimal_comma_without_k": (b"wavelength_nm,n\n400,1,46\n500,1,45\n", "{f}: line 2: expected 2 cells as in the header, found 3. " + COMMAS + "\n{f}: line 3: expected 2 cells as in the header, found 3. " + COMMAS),
    "title_line": (b"Our film, evaporated\n" + HEAD + b"400,2.41,0\n500,2.35,0\n", "{f}: line 1: expected a header such as wavelength_nm,n,k, found 'Our film evaporated'. Name the columns in the first line; lines of comment begin with #"),
    "column_of_row_numbers": (b",wavelength_nm,n\n0,400,2.41\n1,500,2.35\n", "{f}: line 1: column 1 has no name. Name it or delete it"),
    "other_words": (b"lambda (nm),Refractive index,eps2\n400,2.41,0\n500,2.35,0\n", "{f}: line 1: unknown column 'lambda (nm)'. Name it wavelength_nm\n{f}: line 1: unknown column 'Refractive index'. Name it n\n{f}: line 1: unknown column 'eps2'. Name it eps_imag"),
    "many_faults": (HEAD + b"400,x,0\n" * 12, "\n".join(f"{{f}}: line {line}: n: expected a number, found 'x'. Correct the cell or delete the row" for line in range(2, 12)) + "\n2 more faults in the file"),
    "negative_n": (HEAD + b"400,-2.41,0\n500,2.35,0\n", "{f}: line 2: n: expected a number >= 0, found -2.41. Correct the cell"),
    "one_negative_k": (HEAD + b"400,2.41,0.001\n500,2.35,-0.0002\n", "{f}: line 3: k: expected a number >= 0, found -0.0002. Absorption is positive; a medium with gain needs allow_gain=True"),
    "all_k_negative": (HEAD + b"400,2.41,-0.001\n500,2.35,-0.0002\n", "{f}: line 2: k: expected a number >= 0, found -0.001. Every k is negative: write absorption as a positive number"),
    "negative_eps_imag": (b"wavelength_nm,eps_real,eps_imag\n400,5.8,0.01\n500,5.5,-0.01\n", "{f}: line 3: eps_imag: expected a number >= 0, found -0.01. Absorption is positive; a medium with gain needs allow_gain=True"),
    "disagreeing_rows": (HEAD + b"400,2.41,0\n500,2.35,0\n500,2.36,0\n", "{f}: line 4: expected one row for wavelength_nm 500, found another in line 3 that disagrees. Keep one of them"),
    "reflectance_fractions": (HEAD + b"400,0.041,0.955\n500,0.043,0.953\n", "{f}: expected optical constants, found n from 0.041 to 0.043, k from 0.953 to 0.955, " + REFLECTANCE.format("fractions")),
    "reflectance_percent": (HEAD + b"400,4.1,95.5\n500,4.3,95.3\n", "{f}: expected optical constants, found n from 4.1 to 4.3, k from 95.3 to 95.5, " + REFLECTANCE.format("percent")),
    "transmittance_as_n": (b"wavelength_nm,n\n400,0.915\n500,0.922\n", "{f}: expected optical constants, found n from 0.915 to 0.922, " + REFLECTANCE.format("fractions")),
}  # fmt: skip


@pytest.mark.parametrize("name", BAD)
def test_bad_files_are_refused_with_the_whole_message(tmp_path, name):
    content, message = BAD[name]
    path = tmp_path / "film.csv"
    path.write_bytes(content)
    with pytest.raises(fs.MaterialFileError) as caught:
        fs.material(path)
    assert str(caught.value) == message.replace("{f}", str(path))


def test_silver_and_x_ray_indices_are_not_taken_for_reflectance(tmp_path):
    (tmp_path / "silver.csv").write_bytes(HEAD + b"500,0.05,3.1\n600,0.06,4.1\n")
    (tmp_path / "soft.csv").write_bytes(HEAD + b"12,0.97,0.01\n14,0.95,0.02\n")
    for name in ("silver.csv", "soft.csv"):
        assert fs.material(tmp_path / name).n[0] < 1.0
