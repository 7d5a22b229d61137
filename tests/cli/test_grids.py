"""Wavelengths and angles as a person writes them."""

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from filmstack.cli.grids import angles, wavelengths

# SI Brochure (9th edition, 2019): c = 299792458 m/s, h = 6.62607015e-34 J s, e = 1.602176634e-19 C, all exact.
PHOTON_ENERGY_EV_NM = float(Fraction("6.62607015e-34") * 299792458 * Fraction(10) ** 9 / Fraction("1.602176634e-19"))


def test_the_stop_lies_on_the_grid():
    assert wavelengths("400:700:100") == (400.0, 500.0, 600.0, 700.0)
    assert wavelengths("400:699:100") == (400.0, 500.0, 600.0)
    assert wavelengths("0.1:0.7:0.2") == (0.1, 0.3, 0.5, 0.7)  # in doubles 0.1 + 3 x 0.2 is above 0.7


@given(start=st.integers(1, 9999), step=st.integers(1, 999), count=st.integers(0, 50), digits=st.integers(0, 4))
def test_every_point_is_the_double_that_a_person_would_type(start, step, count, digits):
    def typed(number):
        return f"{number // 10**digits}.{number % 10**digits:0{digits}d}" if digits else str(number)

    text = f"{typed(start)}:{typed(start + count * step)}:{typed(step)}"
    assert wavelengths(text) == tuple(float(typed(start + number * step)) for number in range(count + 1))


def test_units_become_vacuum_wavelengths_in_nm():
    assert wavelengths("0.4:0.7:0.1um") == (400.0, 500.0, 600.0, 700.0)
    assert wavelengths("0.55,1.064 um") == (550.0, 1064.0)
    assert wavelengths("550,1064nm") == (550.0, 1064.0)
    assert wavelengths("1:3:1eV") == pytest.approx([PHOTON_ENERGY_EV_NM / e for e in (1, 2, 3)], rel=3e-16)
    assert wavelengths("800:1200:200cm-1") == (12500.0, 10000.0, float(Fraction(10**7, 1200)))


def test_order_and_repeats_are_kept():
    assert wavelengths("650,550,650") == (650.0, 550.0, 650.0)
    assert wavelengths("500:400:-50") == (500.0, 450.0, 400.0)
    assert angles("45,0,45") == (45.0, 0.0, 45.0)
    assert angles("0:90:45") == (0.0, 45.0, 90.0)


@pytest.mark.parametrize(
    "content",
    [
        "550\n1064\n",
        "\ufeff550\r\n1064\r\n",
        "# two lines of a laser\n550 # green\n\n1064\n",
        "wavelength_nm\n550\n1064\n",
        "n,Wavelength_um\n1.5,0.55\n1.4,1.064\n",
        "550,R\n1064,R\n",
        "wavenumber_per_cm\n18181.818181818181818\n9398.496240601503759\n",
    ],
)
def test_a_file_of_wavelengths(content, tmp_path):
    path = tmp_path / "lines.csv"
    path.write_bytes(content.encode())
    assert wavelengths(str(path)) == pytest.approx((550.0, 1064.0), rel=1e-15)
