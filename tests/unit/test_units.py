"""Units of length and numbers as people read them."""

import math

import pytest

from lumentrace import units


# Source: the inch is 25.4 mm and the foot 12 inches by definition (ISO 80000-3).
@pytest.mark.parametrize(
    ("unit", "metres"), [("mm", 0.001), ("cm", 0.01), ("m", 1.0), ("in", 0.0254), ("ft", 0.3048)]
)
def test_metres_in_a_unit(unit, metres):
    assert units.metre(unit) == metres


def test_ratio_is_correctly_rounded():
    assert units.ratio("in", "mm") == 25.4
    assert units.ratio("ft", "in") == 12.0
    assert units.ratio("mm", "m") == 0.001
    assert all(units.ratio(u, u) == 1.0 for u in units.LENGTHS)


@pytest.mark.parametrize(
    ("text", "size"),
    [("2 GiB", 2**31), ("512 MiB", 2**29), ("1.5 KiB", 1536), ("0 B", 0), ("1 TiB", 2**40)],
)
def test_bytes_of(text, size):
    assert units.bytes_of(text) == size


@pytest.mark.parametrize("text", ["", "2", "2GiB", "2 GB", "-2 GiB", "GiB", "1e3 B", ". B", "2  B"])
def test_bytes_of_refuses(text):
    with pytest.raises(ValueError, match="not a memory size"):
        units.bytes_of(text)


def test_grouped():
    assert units.grouped(4_194_304) == "4 194 304"
    assert units.grouped(999) == "999"
    assert units.grouped(-1000) == "-1 000"


@pytest.mark.parametrize(
    ("value", "error", "shown"),
    [
        (612.234, 0.0512, ("612.23", "0.05")),
        (612.234, 0.012, ("612.234", "0.012")),  # first digit 1: two digits
        (612.234, 0.0196, ("612.234", "0.020")),
        (612.234, 0.096, ("612.23", "0.10")),
        (423.4, 2.2, ("423", "2")),
        (12345.0, 321.0, ("12300", "300")),
        (12345.0, 121.0, ("12340", "120")),
        (0.691, 0.0031, ("0.691", "0.003")),
        (0.0, 0.001, ("0.0000", "0.0010")),
        (-0.001, 0.2, ("0.0", "0.2")),  # no minus before a zero
        (1.234e-10, 5e-13, ("1.234e-10", "5e-13")),
        (1e12, 3e8, ("1.0000e+12", "3e+08")),
        (1e-13, 5e-10, ("0", "5e-10")),
        (612.2, 1e-17, ("612.200000000000", "1.0e-17")),  # no digits that a float64 has not
        (1.0, 9.99, ("1", "10")),
        (2321.6, 0.0, ("2321.6", "0")),
        (0.1, None, ("0.1", "")),
        (0.0, 0.0, ("0", "0")),
        (math.nan, 1.0, ("nan", "1")),
        (1.0, math.inf, ("1", "inf")),
    ],
)
def test_format_with_error(value, error, shown):
    assert units.format_with_error(value, error) == shown


def test_rounding_loses_less_than_half_of_the_last_digit_of_the_error():
    for exponent in range(-12, 12):
        for digit in (1.0, 1.5, 2.4, 5.5, 9.4):
            error = digit * 10.0**exponent
            value, shown = units.format_with_error(123.456 * error, error)
            last = 10.0 ** (exponent - (digit < 2))
            assert abs(float(value) - 123.456 * error) <= 0.5001 * last
            assert abs(float(shown) - error) <= 0.5001 * last
