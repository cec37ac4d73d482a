"""Units of length, and numbers as people read them."""

import math

_TENTHS_MM = {"mm": 10, "cm": 100, "m": 10_000, "in": 254, "ft": 3048}  # exact (ISO 80000-3)
LENGTHS = tuple(_TENTHS_MM)

_BYTES = {"B": 1, "KiB": 2**10, "MiB": 2**20, "GiB": 2**30, "TiB": 2**40}
MEMORY = tuple(_BYTES)


AIR_INDEX = 1.00027  # of air at 20 C and 101325 Pa against vacuum; indices and lengths go by air


def ratio(unit: str, other: str) -> float:
    """How many `other` are one `unit`, correctly rounded: ratio("in", "mm") is 25.4."""
    return _TENTHS_MM[unit] / _TENTHS_MM[other]


def metre(unit: str) -> float:
    """Metres in one unit of length."""
    return ratio(unit, "m")


def bytes_of(text: str) -> int:
    """Bytes of a memory size such as "2 GiB". Raises ValueError for any other text."""
    number, _, unit = text.partition(" ")
    if unit not in _BYTES or not number.replace(".", "", 1).isdecimal() or number[0] == ".":
        raise ValueError(f"not a memory size: {text}")
    return int(float(number) * _BYTES[unit])


def grouped(number: int) -> str:
    """A whole number with its digits in threes: 4 194 304."""
    return f"{number:,}".replace(",", " ")


_LARGE, _SMALL = 1e7, 1e-4  # beyond these a number is written with a power of ten
_DIGITS = 15  # of a float64 that mean anything


def plain(value: float) -> str:
    """A number that has no error to round it by, to six digits."""
    return f"{value:.6g}" if value else "0"


def format_with_error(value: float, error: float | None) -> tuple[str, str]:
    """Value and standard error, both rounded at the error's first digit, or at its second if the
    first is 1: ``format_with_error(612.234, 0.0512)`` is ``("612.23", "0.05")``.

    error None: unknown, the second text is empty; 0: exact. Both give the value to six digits.
    """
    if error is None:
        return plain(value), ""
    if error == 0 or not (math.isfinite(value) and math.isfinite(error)):
        return plain(value), plain(error)
    last = _last_place(error)
    if value:
        last = max(last, _exponent(value) - _DIGITS + 1)
    return _rounded(value, last), _rounded(error, _last_place(error))


def _exponent(number: float) -> int:
    """The power of ten of the first digit."""
    return int(f"{abs(number):e}".partition("e")[2])


def _last_place(error: float) -> int:
    """The power of ten of the last digit worth printing."""
    digits, _, exponent = f"{error:.15e}".partition("e")
    return int(exponent) - (digits[0] == "1")


def _rounded(number: float, last: int) -> str:
    """The number rounded to 10^last, with a power of ten only where it is very large or small."""
    number = round(number, -last)
    if number == 0:
        return f"{0:.{max(0, -last)}f}" if last > -5 else "0"
    if _SMALL <= abs(number) < _LARGE:
        return f"{number:.{max(0, -last)}f}"
    return f"{number:.{max(0, _exponent(number) - last)}e}"
