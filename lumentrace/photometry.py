"""From watts to lumens: the CIE spectral luminous efficiency of photopic vision, V(lambda)."""

from functools import cache
from pathlib import Path

EFFICACY = 683.0  # lm/W: K_m, the efficacy of photopic vision (CIE 018:2019)
FIRST_NM, LAST_NM = 360, 830


@cache
def _values() -> tuple[float, ...]:
    """V(lambda) at every whole nm from 360 to 830; the file's head names its source."""
    text = (Path(__file__).parent / "data" / "cie_v_lambda.csv").read_text(encoding="utf-8")
    rows = [line.split(",") for line in text.splitlines() if line[:1].isdigit()]
    return tuple(float(value) for _, value in rows)


@cache
def luminosity_table():
    """V(lambda), (471,) float64, from 360 nm to 830 nm by 1 nm; read-only."""
    import numpy as np  # not needed to read a scene

    table = np.array(_values(), dtype=np.float64)
    table.flags.writeable = False
    return table


def luminosity(wavelength_nm: float) -> float:
    """V(lambda), linear between whole nm, 0 outside 360 nm to 830 nm."""
    if not FIRST_NM <= wavelength_nm <= LAST_NM:
        return 0.0
    row = min(int(wavelength_nm) - FIRST_NM, LAST_NM - FIRST_NM - 1)
    share = wavelength_nm - FIRST_NM - row
    return (1.0 - share) * _values()[row] + share * _values()[row + 1]


def watts_of(lumens: float, wavelength_nm: float) -> float:
    """Radiant flux of monochromatic light in W: lumens / (683 V(lambda)).

    Raises ValueError where V(lambda) is 0: invisible light has no lumens.
    """
    v = luminosity(wavelength_nm)
    if v == 0.0:
        raise ValueError(f"light of {wavelength_nm:g} nm is invisible")
    return lumens / (EFFICACY * v)
