"""Configuration factors and illuminances in black surroundings.

Titles, values and sources are those of a collection of reference cases; units are in the names or
in the tests.
"""

from tests.reference.case import Case

VIE_01 = Case(
    title="Coaxial parallel discs r1=1, r2=1, distance 1",
    source=(
        "J. R. Howell, A Catalog of Radiation Heat Transfer Configuration Factors "
        "(thermalradiation.net), configuration C-41"
    ),
    source_status="confirmed in part by search",
    expected={
        "F12": 0.38196601125010515,
    },
)

VIE_02 = Case(
    title="Coaxial parallel discs r1=0.1, r2=0.2, distance 0.5",
    source=(
        "J. R. Howell, A Catalog of Radiation Heat Transfer Configuration Factors "
        "(thermalradiation.net), configuration C-41; a published worked example of this case "
        "gives 0.1339"
    ),
    source_status="confirmed in part by search",
    expected={
        "F12": 0.13393125268149447,
        "F21": 0.03348281317037362,
    },
)

VIE_04 = Case(
    title="Equal opposed rectangles 1 x 1 at 1",
    source=(
        "J. R. Howell, A Catalog of Radiation Heat Transfer Configuration Factors "
        "(thermalradiation.net), configuration C-11 (found by search)"
    ),
    source_status="confirmed by search",
    expected={
        "F12": 0.19982489569838738,
    },
)

VIE_06 = Case(
    title="Perpendicular rectangles with a common edge, 1 and 1 on edge 1",
    source=(
        "J. R. Howell, A Catalog of Radiation Heat Transfer Configuration Factors "
        "(thermalradiation.net), configuration C-14 (found by search)"
    ),
    source_status="confirmed by search",
    expected={
        "F12": 0.20004377607540316,
    },
)

VIE_08 = Case(
    title="Sphere to coaxial disc r=1, h=0.5",
    source=(
        "J. R. Howell, A Catalog of Radiation Heat Transfer Configuration Factors "
        "(thermalradiation.net), sphere to coaxial disc (number not confirmed); handbook "
        "worked example r=1,h=0.5 gives 0.2764"
    ),
    source_status="confirmed by search",
    expected={
        "F sphere to disc": 0.276393202250021,
    },
)

VIE_10 = Case(
    title="Element to disc, r=0.5, h=1: on axis, off axis, tilted",
    source=(
        "J. R. Howell, A Catalog of Radiation Heat Transfer Configuration Factors "
        "(thermalradiation.net), element to disc (section B; numbers B-12/B-13 not confirmed)"
    ),
    source_status="confirmed in part by search",
    expected={
        "F element to disc, offset 0 m": 0.2,
        "F element to disc, offset 0.3 m": 0.17840395678836335,
        "F element to disc, offset 1.2 m": 0.04517305613116198,
        "F element to disc, on axis, element tilted 40 deg": 0.1532088886237956,
    },
)

VIE_12 = Case(
    title="Element and point to rectangle 1 x 2 at 1.5",
    source=(
        "J. R. Howell, A Catalog of Radiation Heat Transfer Configuration Factors "
        "(thermalradiation.net), element to parallel / perpendicular rectangle (section B; "
        "numbers B-3, B-4 not confirmed)"
    ),
    source_status="value from memory",
    expected={
        "F parallel element to rectangle": 0.12235966164233307,
        "F perpendicular element to rectangle": 0.03671549014143971,
        "flux on the rectangle from an isotropic 1000 lm point source": 36.588946139465065,
    },
)

VIE_14 = Case(
    title="Inside of a closed cylinder r=1, h=2",
    source=(
        "J. R. Howell, A Catalog of Radiation Heat Transfer Configuration Factors "
        "(thermalradiation.net), cylinder interior (by factor algebra)"
    ),
    source_status="derived here",
    expected={
        "F base to base": 0.1715728752538099,
        "F base to side": 0.8284271247461901,
        "F side to one base": 0.20710678118654752,
        "F side to itself": 0.585786437626905,
    },
)

VIE_16 = Case(
    title="Concentric spheres r1=1, r2=2",
    source=(
        "J. R. Howell, A Catalog of Radiation Heat Transfer Configuration Factors "
        "(thermalradiation.net), concentric spheres"
    ),
    source_status="value from memory",
    expected={
        "F outer to inner": 0.25,
        "F outer to itself": 0.75,
    },
)

VIE_17 = Case(
    title="Isotropic point source 1000 cd at 2 m over a plane",
    source=(
        "inverse-square and cosine laws (ISO 23539 / CIE S 010); CIE 171:2006 has a point- "
        "source test of this kind (section 5.2 as remembered)"
    ),
    source_status="value from memory",
    expected={
        "horizontal illuminance at 0 m": 250.0,
        "vertical illuminance (facing the foot point) at 0 m": 0.0,
        "horizontal illuminance at 1 m": 178.88543819998318,
        "vertical illuminance (facing the foot point) at 1 m": 89.44271909999159,
        "horizontal illuminance at 3 m": 42.66924586347916,
        "vertical illuminance (facing the foot point) at 3 m": 64.00386879521875,
        "flux inside radius 3 m": 2797.9011843675935,
    },
)

VIE_18 = Case(
    title="Isotropic point source 750 cd at 3.2 m over a plane",
    source=(
        "inverse-square and cosine laws (ISO 23539 / CIE S 010); CIE 171:2006 has a point- "
        "source test of this kind (section 5.2 as remembered)"
    ),
    source_status="value from memory",
    expected={
        "horizontal illuminance at 0 m": 73.2421875,
        "vertical illuminance (facing the foot point) at 0 m": 0.0,
        "horizontal illuminance at 1.5 m": 54.37103298391924,
        "vertical illuminance (facing the foot point) at 1.5 m": 25.486421711212145,
        "horizontal illuminance at 4 m": 17.855231923240023,
        "vertical illuminance (facing the foot point) at 4 m": 22.31903990405003,
        "flux inside radius 4 m": 1768.5829221883312,
    },
)

VIE_24 = Case(
    title="White Lambertian sphere in a collimated beam, far-field intensity",
    source="Lambert sphere phase law (E. Schoenberg 1929; van de Hulst section 8.42)",
    source_status="value from memory",
    expected={
        "intensity at phase angle 0 deg (0 = back to the source)": 0.6666666666666666,
        "intensity at phase angle 60 deg (0 = back to the source)": 0.4059985206961529,
        "intensity at phase angle 90 deg (0 = back to the source)": 0.2122065907891938,
        "intensity at phase angle 135 deg (0 = back to the source)": 0.032201589161759754,
    },
)

VIE_25 = Case(
    title="Mirror sphere scatters a collimated beam uniformly",
    source="van de Hulst, Light Scattering by Small Particles, section 12.2 / geometric optics",
    source_status="value from memory",
    expected={
        "intensity in every direction": 5.0,
        "total reflected flux": 62.83185307179586,
    },
)

VIE_39 = Case(
    title="Diffuse reflection from a lit square, with and without an obstruction (4 m)",
    source=(
        "kind of test: CIE 171:2006 light reflection over diffuse surfaces and with "
        "obstruction (sections 5.6, 5.7 as remembered; tables not obtained)"
    ),
    source_status="derived here",
    expected={
        "(a) illuminance": 143.07389865210249,
        "(b) illuminance": 76.67501787597838,
        "(c) illuminance with obstruction": 93.74686288971986,
    },
)

VIE_41 = Case(
    title="Lambertian ceiling panel 1 m square at 2 m",
    source="kind of test: CIE 171:2006 area light source (its tables not obtained)",
    source_status="derived here",
    expected={
        "illuminance at ('0', '0')": 230.83679773017076,
        "illuminance at ('1', '0')": 155.5774353085024,
        "illuminance at ('1.5', '1.5')": 56.633435747571205,
        "total flux of the panel": 3141.5926535897934,
    },
)

POS_14 = Case(
    title="Shadow of a disc in front of a Lambertian disc source",
    source="rectilinear propagation",
    source_status="common practice, no source",
    expected={
        "umbra radius (negative: antumbra of that size)": 2.0,
        "penumbra outer radius": 22.0,
        "centre irradiance / unobstructed": 0.0,
    },
)

STR_01 = Case(
    title="Single scatter off a diffuse disc onto a detector: PST, rho=0.05",
    source=(
        "PST definition: common practice in stray-light analysis (point source "
        "transmittance); form factor: element to disc"
    ),
    source_status="common practice, no source",
    expected={
        "PST (disc, on axis)": 0.00019159854066027403,
    },
)

STR_03 = Case(
    title="Lit ring on a tube wall seen from the base centre",
    source="Howell catalogue, element to disc, by subtraction",
    source_status="derived here",
    expected={
        "factor detector to ring": 0.03179650238473768,
    },
)

STR_05 = Case(
    title="Oblique beam into a baffle tube: single-scatter PST at the base centre",
    source="PST: common practice; integral derived here",
    source_status="derived here",
    expected={
        "PST single scatter at the base centre": 0.0001674034743742738,
    },
)
