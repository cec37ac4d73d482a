"""Absorption and path lengths in media, trapping by total reflection.

Titles, values and sources are those of a collection of reference cases; units are in the names or
in the tests.
"""

from tests.reference.case import Case

VOL_01 = Case(
    title="Absorbing slab alpha=0.02/mm, 50 mm",
    source=(
        "Beer-Lambert law; Chandrasekhar, Radiative Transfer, appendix I (exponential integrals)"
    ),
    source_status="value from memory",
    expected={
        "internal transmittance, normal": 0.36787944117144233,
        "internal transmittance, oblique": 0.3306250755682564,
        "absorbance log10, normal": 0.4342944819032518,
        "attenuation": 4.342944819032518,
        "mean free path": 50.0,
        "diffuse (Lambertian inside) internal transmittance 2 E3(tau)": 0.21938393439552029,
    },
)

VOL_02 = Case(
    title="Absorbing slab alpha=0.013/mm, 27 mm",
    source=(
        "Beer-Lambert law; Chandrasekhar, Radiative Transfer, appendix I (exponential integrals)"
    ),
    source_status="value from memory",
    expected={
        "internal transmittance, normal": 0.703983753855621,
        "internal transmittance, oblique": 0.6531695838932647,
        "absorbance log10, normal": 0.1524373631480414,
        "attenuation": 1.524373631480414,
        "mean free path": 76.92307692307692,
        "diffuse (Lambertian inside) internal transmittance 2 E3(tau)": 0.5544860172279628,
    },
)

VOL_03 = Case(
    title="Absorption from the imaginary index k=6.9658E-9 at 0.546 um",
    source=(
        "Born and Wolf section 14.1; k row of N-BK7 / N-SF11 from the public refractive-index "
        "database"
    ),
    source_status="confirmed in part by search",
    expected={
        "alpha": 0.00016032019125550024,
        "internal transmittance over 25 mm": 0.9960000165496868,
    },
)

VOL_04 = Case(
    title="Absorption from the imaginary index k=5.1628E-7 at 0.405 um",
    source=(
        "Born and Wolf section 14.1; k row of N-BK7 / N-SF11 from the public refractive-index "
        "database"
    ),
    source_status="confirmed in part by search",
    expected={
        "alpha": 0.0160191748661268,
        "internal transmittance over 10 mm": 0.8519804072000873,
    },
)

VOL_19 = Case(
    title="Mean path length under isotropic illumination: sphere radius 3 mm",
    source=(
        "S. Blanco and R. Fournier, An invariance property of diffusive random walks, "
        "Europhys. Lett. 61, 168 (2003); A. Cauchy (1832)"
    ),
    source_status="value from memory",
    expected={
        "mean path length": 4.0,
    },
)

VOL_21 = Case(
    title="Absorption in a sphere under isotropic illumination, alpha R=1.0",
    source=(
        "van de Hulst, Light Scattering by Small Particles, section 11.23 (anomalous "
        "absorption) / Case, de Hoffmann, Placzek escape probability"
    ),
    source_status="value from memory",
    expected={
        "transmitted share": 0.29699707514508095,
        "absorbed share": 0.703002924854919,
    },
)

LGT_04 = Case(
    title="Isotropic emission trapped by total reflection, n=1.5",
    source=(
        "luminescent concentrator theory (Weber and Lambe, Appl. Opt. 15, 2299 (1976)) for the slab"
    ),
    source_status="value from memory",
    expected={
        "slab trapped share": 0.7453559924999299,
        "square rod trapped share": 0.4907119849998598,
        "cube trapped share": 0.2360679774997897,
    },
)
