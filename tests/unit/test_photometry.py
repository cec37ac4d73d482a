"""CIE V(lambda) and what follows from it."""

import numpy as np
import pytest

from lumentrace import photometry

# Source: CIE 1924 V(lambda), table of CIE 018:2019 and ISO/CIE 23539, as in colour-science.
PUBLISHED = {
    400: 0.000396,
    450: 0.038,
    500: 0.323,
    507: 0.4443096,
    550: 0.9949501,
    555: 1.0,
    600: 0.631,
    650: 0.107,
    700: 0.004102,
}
# Source: 683 V(lambda) of the same table.
LUMENS_OF_ONE_WATT = {
    400: 0.270468,
    450: 25.954,
    500: 220.609,
    507: 303.4634568,
    550: 679.5509183,
    555: 683.0,
    600: 430.973,
    650: 73.081,
    700: 2.801666,
}


@pytest.mark.parametrize("nm", PUBLISHED)
def test_luminosity_is_that_of_the_table(nm):
    assert photometry.luminosity(nm) == pytest.approx(PUBLISHED[nm], rel=1e-9)


@pytest.mark.parametrize("nm", LUMENS_OF_ONE_WATT)
def test_watts_of_lumens(nm):
    assert photometry.watts_of(LUMENS_OF_ONE_WATT[nm], nm) == pytest.approx(1.0, rel=1e-9)


def test_table():
    table = photometry.luminosity_table()
    assert table.shape == (471,)
    assert table.dtype == np.float64
    assert table[0] == 3.917e-06  # 360 nm; source as above
    assert table[-1] == 4.5181e-07  # 830 nm
    assert table.argmax() == 555 - 360
    # The integral of V, 106.857 nm: value from memory; all of it is the sum at 1 nm.
    assert table.sum() == pytest.approx(106.857, rel=1e-5)
    assert photometry.luminosity_table() is table
    with pytest.raises(ValueError, match="read-only"):
        table[0] = 1.0


def test_linear_between_whole_nm():
    table = photometry.luminosity_table()
    for nm in (360.25, 507.5, 555.75, 829.5):
        row = int(nm) - 360
        expected = np.interp(nm, [row + 360, row + 361], table[row : row + 2])
        assert photometry.luminosity(nm) == pytest.approx(expected, rel=1e-14)


def test_ends_of_the_table_belong_to_it():
    assert photometry.luminosity(360) == 3.917e-06
    assert photometry.luminosity(830) == 4.5181e-07


@pytest.mark.parametrize("nm", [100.0, 359.999, 830.001, 940.0, 1e5])
def test_invisible_light(nm):
    assert photometry.luminosity(nm) == 0.0
    with pytest.raises(ValueError, match="invisible"):
        photometry.watts_of(1.0, nm)
