"""Inter-reflections in cavities and integrating spheres.

Titles, values and sources are those of a collection of reference cases; units are in the names or
in the tests.
"""

from tests.reference.case import Case

VIE_22 = Case(
    title="Integrating sphere rho=0.97, port fraction 0.03",
    source=(
        "D. G. Goebel, Generalized integrating-sphere theory, Appl. Opt. 6, 125 (1967); "
        "integrating-sphere application notes"
    ),
    source_status="confirmed in part by search",
    expected={
        "share of the input leaving through the ports": 0.49238578680203043,
    },
)

VIE_27 = Case(
    title="Closed Lambertian box 1.0 x 1.0 x 1.0 m, inter-reflections",
    source=(
        "C. M. Goral et al., Modeling the interaction of light between diffuse surfaces, "
        "SIGGRAPH 1984 (radiosity equation); CIE 171:2006 has internal-reflection tests of "
        "this kind"
    ),
    source_status="derived here",
    expected={
        "mean total irradiance on face x=0": 0.33913486072304777,
        "mean total irradiance on face x=L": 0.3391348607230478,
        "mean total irradiance on face y=0": 0.33913486072304805,
        "mean total irradiance on face y=W": 0.3391348607230481,
        "mean total irradiance on face floor": 0.33400829412477817,
        "mean total irradiance on face ceiling": 0.181745477513602,
        "total irradiance at floor point (0.5, 0.5)": 0.390744785035317,
        "total irradiance at floor point (0.25, 0.25)": 0.3480431061482313,
    },
)

VIE_29 = Case(
    title=(
        "Closed uniform-reflectance cavity (sphere of radius 2 m): internally reflected component"
    ),
    source="CIE 171:2006 internal reflected component test (section 5.8 as remembered); P. Moon",
    source_status="value from memory",
    expected={
        "area-mean total illuminance": 397.8873577297383,
        "area-mean indirect illuminance": 198.94367886486916,
        "area-mean direct illuminance": 198.94367886486916,
    },
)

VIE_31 = Case(
    title="Uniformly emitting uniform grey cube has uniform radiosity",
    source="enclosure theory (Siegel and Howell)",
    source_status="derived here",
    expected={
        "irradiance at every point of every face": 2.5,
    },
)

STR_15 = Case(
    title="Black spherical cavity: effective reflectance, wall 0.1, opening 0.02",
    source="A. Gouffe (1945), sphere case; integrating-sphere theory",
    source_status="value from memory",
    expected={
        "effective reflectance": 0.0022172949002217295,
    },
)

STR_16 = Case(
    title="Black spherical cavity: effective reflectance, wall 0.25, opening 0.01",
    source="A. Gouffe (1945), sphere case; integrating-sphere theory",
    source_status="value from memory",
    expected={
        "effective reflectance": 0.0033222591362126247,
    },
)
