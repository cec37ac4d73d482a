"""Patterns, photometry, Lambertian scattering, etendue.

Titles, values and sources are those of a collection of reference cases; units are in the names or
in the tests.
"""

from tests.reference.case import Case

CON_04 = Case(
    title="Thermodynamic concentration limit, half-angle 0.2667 deg, n=1",
    source=(
        "Winston et al., Nonimaging Optics; formula n^2/sin^2 seen in the search result on "
        "DTIRC concentrators (X. Ning, R. Winston, J. O'Gallagher, Appl. Opt. 26, 300 (1987))"
    ),
    source_status="confirmed by search",
    expected={
        "Cmax 3D": 46153.25867934236,
        "Cmax 2D": 214.83309493498052,
    },
)

VIE_43 = Case(
    title="Etendue is kept on refraction into n=1.5",
    source=(
        "R. Winston, J. C. Minano, P. Benitez, Nonimaging Optics, chapter 2; Born and Wolf "
        "section 4.8.3"
    ),
    source_status="value from memory",
    expected={
        "etendue in air": 29.608813203268078,
        "etendue inside, n^2 A pi sin^2": 29.608813203268078,
        "half-angle inside": 35.264389682754654,
        "radiance ratio inside/outside without Fresnel loss": 2.25,
        "radiance ratio along the normal with Fresnel loss": 2.16,
    },
)

VIE_44 = Case(
    title="Etendue is kept on refraction into n=1.8",
    source=(
        "R. Winston, J. C. Minano, P. Benitez, Nonimaging Optics, chapter 2; Born and Wolf "
        "section 4.8.3"
    ),
    source_status="value from memory",
    expected={
        "etendue in air": 4.67568064026801,
        "etendue inside, n^2 A pi sin^2": 4.67568064026801,
        "half-angle inside": 18.58151838433969,
        "radiance ratio inside/outside without Fresnel loss": 3.24,
        "radiance ratio along the normal with Fresnel loss": 2.975510204081633,
    },
)

VIE_19 = Case(
    title="Five-times rule: disc source against the inverse-square law",
    source="five-times rule: common practice (IES Lighting Handbook)",
    source_status="common practice, no source",
    expected={
        "exact / inverse-square at 1 x largest dimension": 0.8,
        "exact / inverse-square at 2 x largest dimension": 0.9411764705882353,
        "exact / inverse-square at 5 x largest dimension": 0.9900990099009901,
        "exact / inverse-square at 10 x largest dimension": 0.9975062344139651,
    },
)

VIE_20 = Case(
    title="Five-times rule: square source against the inverse-square law",
    source="five-times rule: common practice (IES Lighting Handbook)",
    source_status="common practice, no source",
    expected={
        "exact / inverse-square at 1 x largest dimension": 0.7522746884541075,
        "exact / inverse-square at 2 x largest dimension": 0.9233471909206831,
        "exact / inverse-square at 5 x largest dimension": 0.9868506319717104,
        "exact / inverse-square at 10 x largest dimension": 0.9966782906402174,
    },
)

PHO_01 = Case(
    title=(
        "V(lambda) and monochromatic efficacy at 400, 450, 500, 507, 550, 555, 600, 650, 700 nm"
    ),
    source="CIE 018:2019 / CIE 1924 V(lambda), ISO 23539; table as in the colour-science package",
    source_status="confirmed in part by search",
    expected={
        "V(400 nm)": 0.0003960000000000002,
        "V(450 nm)": 0.038,
        "V(500 nm)": 0.3230000000000002,
        "V(507 nm)": 0.4443096000000005,
        "V(550 nm)": 0.9949500999999998,
        "V(555 nm)": 1.0,
        "V(600 nm)": 0.6310000000000002,
        "V(650 nm)": 0.10699999999999996,
        "V(700 nm)": 0.004101999999999994,
        "lumens of 1 W at 400 nm (Km=683)": 0.27046800000000015,
        "lumens of 1 W at 450 nm (Km=683)": 25.954,
        "lumens of 1 W at 500 nm (Km=683)": 220.60900000000012,
        "lumens of 1 W at 507 nm (Km=683)": 303.46345680000036,
        "lumens of 1 W at 550 nm (Km=683)": 679.5509182999999,
        "lumens of 1 W at 555 nm (Km=683)": 683.0,
        "lumens of 1 W at 600 nm (Km=683)": 430.9730000000002,
        "lumens of 1 W at 650 nm (Km=683)": 73.08099999999997,
        "lumens of 1 W at 700 nm (Km=683)": 2.8016659999999955,
    },
)

PHO_03 = Case(
    title="Definition constant Kcd",
    source="SI Brochure, 9th edition (2019)",
    source_status="value from memory",
    expected={
        "luminous efficacy (exact)": 683.0,
        "vacuum wavelength": 555.1712185185185,
        "1 cd source: radiant intensity at 540e12 Hz": 0.0014641288433382138,
    },
)

PHO_07 = Case(
    title="cos^n luminaire n=3",
    source="elementary; common practice",
    source_status="derived here",
    expected={
        "flux": 1884.9555921538758,
        "beam angle (50 % of peak, full)": 74.93462242187275,
        "field angle (10 % of peak, full)": 124.68840000180857,
        "share of flux inside the beam": 0.6031497370079502,
        "share of flux inside the field": 0.9535841116638722,
        "illuminance 3 m below": 133.33333333333334,
        "flux in the zone 0-30 deg": 824.6680715673207,
        "flux in the zone 30-60 deg": 942.4777960769379,
    },
)

PHO_09 = Case(
    title="cos^n luminaire n=1",
    source="elementary; common practice",
    source_status="derived here",
    expected={
        "flux": 1000.0000000000001,
        "beam angle (50 % of peak, full)": 120.0,
        "field angle (10 % of peak, full)": 168.52165904546644,
        "share of flux inside the beam": 0.75,
        "share of flux inside the field": 0.99,
        "illuminance 3 m below": 35.3677651315323,
        "flux in the zone 0-30 deg": 250.00000000000003,
        "flux in the zone 30-60 deg": 500.00000000000006,
    },
)

PHO_12 = Case(
    title="Grid spacing and uniformity, d=1,5,10,50",
    source=(
        "EN 12464-1:2021 (grid clause); formula, sample table (1 m: 0.2, 5 m: 0.6, 10 m: 1.0, "
        "50 m: 3.0, 100 m: 5.0 m) and Uo definition found by search in secondary sources"
    ),
    source_status="confirmed by search",
    expected={
        "mean illuminance of the table": 486.9375,
        "Uo=Emin/Eavg": 0.8317289179822872,
        "Emin/Emax": 0.7232142857142857,
    },
)

SCA_01 = Case(
    title="Lambertian reflector, rho=0.8",
    source=(
        "F. E. Nicodemus et al., Geometrical considerations and nomenclature for reflectance, "
        "NBS Monograph 160 (1977)"
    ),
    source_status="value from memory",
    expected={
        "BRDF": 0.25464790894703254,
        "directional-hemispherical reflectance": 0.8,
        "share of incident power inside 10 deg of the normal": 0.024122951685636645,
        "share of incident power inside 30 deg of the normal": 0.2,
        "share of incident power inside 60 deg of the normal": 0.6,
        "mean cos of exit angle (of scattered power)": 0.6666666666666666,
        "mean exit angle": 45.0,
    },
)

SCA_02 = Case(
    title="Lambertian reflector, rho=0.35",
    source=(
        "F. E. Nicodemus et al., Geometrical considerations and nomenclature for reflectance, "
        "NBS Monograph 160 (1977)"
    ),
    source_status="value from memory",
    expected={
        "BRDF": 0.11140846016432673,
        "directional-hemispherical reflectance": 0.35,
        "share of incident power inside 25 deg of the normal": 0.06251216830485562,
        "share of incident power inside 50 deg of the normal": 0.20538843109171281,
        "share of incident power inside 75 deg of the normal": 0.32655444566227676,
        "mean cos of exit angle (of scattered power)": 0.6666666666666666,
        "mean exit angle": 45.0,
    },
)
