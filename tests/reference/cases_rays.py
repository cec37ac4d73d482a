"""Directions and lengths of single rays, mirrors and traps.

Titles, values and sources are those of a collection of reference cases; units are in the names or
in the tests.
"""

from tests.reference.case import Case

POS_01 = Case(
    title="Optical path and transit time over 1 segment(s)",
    source=(
        "postulates of ray optics (B. E. A. Saleh and M. C. Teich, Fundamentals of Photonics, "
        "section 1.1); SI c0"
    ),
    source_status="value from memory",
    expected={
        "optical path length": 151.68,
        "transit time": 0.505950019596557,
    },
)

POS_03 = Case(
    title="Fermat at a plane refracting surface, 1 | 1.5",
    source="Fermat principle; Saleh and Teich section 1.1",
    source_status="value from memory",
    expected={
        "crossing point from the foot of A": 82.51447127029704,
        "incidence angle": 39.52756445860935,
        "refraction angle": 25.10633707631019,
        "optical path A to B (minimum)": 262.1683975395163,
        "optical path with the crossing moved by +1 mm": 262.1776750726726,
        "straight-line crossing, optical path": 264.4070935340259,
    },
)

POS_07 = Case(
    title="Vector refraction and reflection, 1 to 1.5",
    source="law of refraction in vector form (Born and Wolf section 3.2.2)",
    source_status="value from memory",
    expected={
        "refracted x": 0.4,
        "refracted y": 0.0,
        "refracted z": -0.916515138991168,
        "reflected x": 0.6,
        "reflected y": 0.0,
        "reflected z": 0.8,
        "incidence angle": 36.86989764584402,
        "refraction angle": 23.57817847820183,
    },
)

POS_10 = Case(
    title="Two plane mirrors at 45 deg: constant deviation",
    source="standard",
    source_status="common practice, no source",
    expected={
        "deviation": 90.0,
    },
)

POS_11 = Case(
    title="Two plane mirrors at 67.5 deg: constant deviation",
    source="standard",
    source_status="common practice, no source",
    expected={
        "deviation": 135.0,
    },
)

IMG_13 = Case(
    title="Corner cube (hollow, three mirrors), one dihedral error 0.0 arcsec",
    source="standard",
    source_status="common practice, no source",
    expected={
        "deviation from exact return, order (1, 2, 3)": 0.0,
        "deviation from exact return, order (1, 3, 2)": 0.0,
        "deviation from exact return, order (2, 1, 3)": 0.0,
        "deviation from exact return, order (2, 3, 1)": 0.0,
        "deviation from exact return, order (3, 1, 2)": 0.0,
        "deviation from exact return, order (3, 2, 1)": 0.0,
    },
)

IMG_17 = Case(
    title="Plane plate t=10 mm, n=1.5168, ray at 45 deg",
    source="standard",
    source_status="common practice, no source",
    expected={
        "lateral shift (perpendicular to the ray)": 3.344993914872836,
        "exact focus shift of that ray, plate perpendicular to the axis": 4.730535760468639,
        "optical path inside the plate": 17.14502407947711,
        "transit time inside": 57.189644442213115,
    },
)

IMG_18 = Case(
    title="Plane plate t=3.5 mm, n=1.65, ray at 28 deg",
    source="standard",
    source_status="common practice, no source",
    expected={
        "lateral shift (perpendicular to the ray)": 0.7259585106002414,
        "exact focus shift of that ray, plate perpendicular to the axis": 1.5463311692242478,
        "optical path inside the plate": 6.023985381244261,
        "transit time inside": 20.093852331816368,
    },
)

STR_11 = Case(
    title="Stray return of a cover glass: times, n=1.52",
    source="geometry; SI c0; postulates of geometrical optics",
    source_status="derived here",
    expected={
        "near-face path length (geometric = optical)": 3.605551275463989,
        "near-face arrival time": 12.026824488906886,
        "near-face incidence angle": 56.309932474020215,
        "near-face reflectance, unpolarised": 0.07710942485018042,
        "far-face optical path": 5.4240238005906525,
        "far-face arrival time": 18.09259591377263,
        "far-face incidence angle outside": 47.937562539408596,
        "far-face power factor (1-R)^2 R, unpolarised": 0.04593585901321702,
    },
)

STR_17 = Case(
    title="V-groove light trap, full angle 28.0 deg",
    source="unfolding of plane mirrors, common practice",
    source_status="derived here",
    expected={
        "number of reflections": 6,
        "power returned": 1.5625e-08,
    },
)

STR_18 = Case(
    title="V-groove light trap, full angle 20.5 deg",
    source="unfolding of plane mirrors, common practice",
    source_status="derived here",
    expected={
        "number of reflections": 9,
        "power returned": 1e-09,
    },
)

LGT_03 = Case(
    title="Step-index guide 1.4918/1: numerical aperture and trapped share",
    source=(
        "A. W. Snyder and J. D. Love, Optical Waveguide Theory, chapter 4 (bound and leaky "
        "rays); R. J. Potter, J. Opt. Soc. Am. 51, 1079 (1961)"
    ),
    source_status="value from memory",
    expected={
        "core-cladding critical angle": 42.092627768041176,
        "largest guided angle to the axis inside": 47.907372231958824,
    },
)

LGT_08 = Case(
    title="Mirror light pipe 10.0 x 10.0 x 100.0 mm, one ray",
    source="method of images",
    source_status="common practice, no source",
    expected={
        "number of reflections": 10,
        "path length": 123.28828005937953,
        "exit x": 2.0,
        "exit y": 7.0,
        "transmission": 0.8170728068875467,
        "transit time in air (n=1)": 411.245435865433,
    },
)

LGT_10 = Case(
    title="Square mirror pipe under Lambertian light: mean transmission",
    source="method of images",
    source_status="derived here",
    expected={
        "mean transmission": 0.6324012295482816,
    },
)
