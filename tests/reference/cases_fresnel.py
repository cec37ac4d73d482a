"""Reflection and refraction at smooth boundaries, plates and piles of plates.

Titles, values and sources are those of a collection of reference cases; units are in the names or
in the tests.
"""

from tests.reference.case import Case

FRE_01 = Case(
    title="Air to glass, n=1.5: s, p and unpolarised reflectance",
    source="Born and Wolf, Principles of Optics, section 1.5 (Fresnel formulae)",
    source_status="value from memory",
    expected={
        "Rs(0 deg)": 0.04,
        "Rp(0 deg)": 0.04,
        "Runpolarised(0 deg)": 0.04,
        "Rs(15 deg)": 0.0438350830799345,
        "Rp(15 deg)": 0.036326451225800284,
        "Runpolarised(15 deg)": 0.04008076715286739,
        "Rs(30 deg)": 0.057796105403213095,
        "Rp(30 deg)": 0.025249146548429986,
        "Runpolarised(30 deg)": 0.04152262597582154,
        "Rs(45 deg)": 0.0920133630455244,
        "Rp(45 deg)": 0.008466458978947477,
        "Runpolarised(45 deg)": 0.05023991101223594,
        "Rs(60 deg)": 0.17657148808284054,
        "Rp(60 deg)": 0.0018019375215850362,
        "Runpolarised(60 deg)": 0.08918671280221278,
        "Rs(75 deg)": 0.39935602700039496,
        "Rp(75 deg)": 0.10676509898024435,
        "Runpolarised(75 deg)": 0.25306056299031965,
        "Rs(85 deg)": 0.7323454787108015,
        "Rp(85 deg)": 0.4932538118188533,
        "Runpolarised(85 deg)": 0.6127996452648273,
    },
)

FRE_02 = Case(
    title="Glass to air, n=1.5: internal reflection up to and past the critical angle",
    source="Born and Wolf, Principles of Optics, section 1.5 (Fresnel formulae)",
    source_status="value from memory",
    expected={
        "Rs(0 deg)": 0.04,
        "Rp(0 deg)": 0.04,
        "Runpolarised(0 deg)": 0.04,
        "Rs(10 deg)": 0.043887869960806423,
        "Rp(10 deg)": 0.03627804834933372,
        "Runpolarised(10 deg)": 0.040082959155070076,
        "Rs(20 deg)": 0.05906322552450053,
        "Rp(20 deg)": 0.02439381085674396,
        "Runpolarised(20 deg)": 0.04172851819062224,
        "Rs(30 deg)": 0.10577279114504319,
        "Rp(30 deg)": 0.004607543445708644,
        "Runpolarised(30 deg)": 0.055190167295375916,
        "Rs(40 deg)": 0.3905181085628936,
        "Rp(40 deg)": 0.10006430001092707,
        "Runpolarised(40 deg)": 0.24529120428691034,
        "Rs(41.5 deg)": 0.6750526961969533,
        "Rp(41.5 deg)": 0.40818728683375893,
        "Runpolarised(41.5 deg)": 0.5416199915153561,
        "Rs(45 deg)": 1.0,
        "Rp(45 deg)": 1.0,
        "Runpolarised(45 deg)": 1.0,
        "Rs(60 deg)": 1.0,
        "Rp(60 deg)": 1.0,
        "Runpolarised(60 deg)": 1.0,
    },
)

FRE_05 = Case(
    title="Brewster and critical angles, 1 | 1.5",
    source="Born and Wolf, Principles of Optics, section 1.5 (Fresnel formulae)",
    source_status="value from memory",
    expected={
        "Brewster angle, n1 side": 56.309932474020215,
        "Rs at Brewster angle": 0.14792899408284024,
        "Rp at Brewster angle": 0.0,
        "R unpolarised at Brewster angle": 0.07396449704142012,
        "degree of polarisation of reflected light at Brewster angle": 1.0,
        "critical angle in the denser medium": 41.810314895778596,
        "internal Brewster angle in the denser medium": 33.690067525979785,
    },
)

FRE_06 = Case(
    title="Brewster and critical angles, 1.333 | 1.7",
    source="Born and Wolf, Principles of Optics, section 1.5 (Fresnel formulae)",
    source_status="value from memory",
    expected={
        "Brewster angle, n1 side": 51.89937947334171,
        "Rs at Brewster angle": 0.056888175591901645,
        "Rp at Brewster angle": 0.0,
        "R unpolarised at Brewster angle": 0.028444087795950822,
        "degree of polarisation of reflected light at Brewster angle": 1.0,
        "critical angle in the denser medium": 51.639144892172105,
        "internal Brewster angle in the denser medium": 38.10062052665829,
    },
)

FRE_07 = Case(
    title="Plane-parallel plate n=1.5, lossless, all inter-reflections",
    source=(
        "Stokes, On the intensity of the light reflected from or transmitted through a pile "
        "of plates, Proc. R. Soc. 11 (1862); also Born and Wolf section 1.5/7.6"
    ),
    source_status="value from memory",
    expected={
        "Ts(0 deg)": 0.9230769230769231,
        "Tp(0 deg)": 0.9230769230769231,
        "Tunpolarised(0 deg)": 0.9230769230769231,
        "Runpolarised(0 deg)": 0.07692307692307693,
        "Ts(45 deg)": 0.8314794192830981,
        "Tp(45 deg)": 0.9832092403201598,
        "Tunpolarised(45 deg)": 0.9073443298016289,
        "Runpolarised(45 deg)": 0.09265567019837107,
        "Ts(60 deg)": 0.6998542122237652,
        "Tp(60 deg)": 0.9964026072338351,
        "Tunpolarised(60 deg)": 0.8481284097288002,
        "Runpolarised(60 deg)": 0.15187159027119984,
    },
    reject={
        "T from averaging R first (45 deg)": 0.9043267914588886,
        "T from averaging R first (60 deg)": 0.8362324627101684,
    },
)

FRE_08 = Case(
    title="Plane-parallel plate n=1.5, internal transmittance 0.8, all inter-reflections",
    source=(
        "Stokes, On the intensity of the light reflected from or transmitted through a pile "
        "of plates, Proc. R. Soc. 11 (1862); also Born and Wolf section 1.5/7.6"
    ),
    source_status="value from memory",
    expected={
        "Ts(0 deg)": 0.7380357486065732,
        "Tp(0 deg)": 0.7380357486065732,
        "Tunpolarised(0 deg)": 0.7380357486065732,
        "Runpolarised(0 deg)": 0.06361714395541034,
        "Aunpolarised(0 deg)": 0.19834710743801653,
    },
)

FRE_10 = Case(
    title="Plane-parallel plate n=1.62, lossless, all inter-reflections",
    source=(
        "Stokes, On the intensity of the light reflected from or transmitted through a pile "
        "of plates, Proc. R. Soc. 11 (1862); also Born and Wolf section 1.5/7.6"
    ),
    source_status="value from memory",
    expected={
        "Ts(0 deg)": 0.8939410661074937,
        "Tp(0 deg)": 0.8939410661074937,
        "Tunpolarised(0 deg)": 0.8939410661074937,
        "Runpolarised(0 deg)": 0.10605893389250634,
        "Ts(50 deg)": 0.7487814157822666,
        "Tp(50 deg)": 0.986210669991074,
        "Tunpolarised(50 deg)": 0.8674960428866704,
        "Runpolarised(50 deg)": 0.13250395711332966,
        "Ts(70 deg)": 0.48573496727601556,
        "Tp(70 deg)": 0.9300775135252546,
        "Tunpolarised(70 deg)": 0.7079062404006351,
        "Runpolarised(70 deg)": 0.2920937595993649,
    },
    reject={
        "T from averaging R first (50 deg)": 0.8599494873037449,
        "T from averaging R first (70 deg)": 0.6790053128003966,
    },
)

FRE_11 = Case(
    title="Pile of 3 lossless plates, n=1.5, normal incidence",
    source="Stokes, Proc. R. Soc. 11 (1862), pile of plates",
    source_status="value from memory",
    expected={
        "T": 0.8,
        "R": 0.2,
    },
)

FRE_12 = Case(
    title="Pile of 6 lossless plates, n=1.52, normal incidence",
    source="Stokes, Proc. R. Soc. 11 (1862), pile of plates",
    source_status="value from memory",
    expected={
        "T": 0.6520247083047358,
        "R": 0.34797529169526425,
    },
)

FRE_13 = Case(
    title="Two-bounce ghost of a plate n=1.5 at 0 deg",
    source="derived from Fresnel; common practice",
    source_status="derived here",
    expected={
        "direct transmitted share of incident power (unpolarised)": 0.9216,
        "two-bounce ghost share of incident power (unpolarised)": 0.00147456,
        "ghost/direct": 0.0016,
        "ghost/direct for s": 0.0016,
        "ghost/direct for p": 0.0016,
        "share left after 4 or more internal reflections": 2.363076923076923e-06,
    },
)

FRE_14 = Case(
    title="Two-bounce ghost of a plate n=1.5 at 30 deg",
    source="derived from Fresnel; common practice",
    source_status="derived here",
    expected={
        "direct transmitted share of incident power (unpolarised)": 0.9189437026489586,
        "two-bounce ghost share of incident power (unpolarised)": 0.001785578576352649,
        "ghost/direct": 0.0019430772213852904,
        "ghost/direct for s": 0.003340389799779318,
        "ghost/direct for p": 0.0006375194014240939,
        "perpendicular separation of ghost and direct beams": 3.0618621784789726,
        "share left after 4 or more internal reflections": 5.162643690245164e-06,
    },
)

FRE_21 = Case(
    title="Diffuse (Lambertian) Fresnel reflectance, n=1.5",
    source=(
        "J. W. T. Walsh (1926); S. Q. Duntley, The optical properties of diffusing materials, "
        "J. Opt. Soc. Am. 32, 61 (1942)"
    ),
    source_status="value from memory",
    expected={
        "external diffuse reflectance": 0.09177795934235121,
        "internal diffuse reflectance": 0.5963457597077116,
        "diffuse transmittance of lossless plate": 0.8509383008955905,
    },
)

POS_05 = Case(
    title="Reversibility (Stokes relations) at 35 deg, 1 | 1.5",
    source="G. G. Stokes (1849); Born and Wolf section 1.5",
    source_status="value from memory",
    expected={
        "r_s (p sign: n2 cos i - n1 cos t)": -0.25705788796372664,
        "t_s": 0.7429421120362734,
        "t t' (s)": 0.9339212422356281,
        "power transmittance (s) n2 cos t/(n1 cos i) t^2": 0.9339212422356281,
        "r_p (p sign: n2 cos i - n1 cos t)": 0.14155257596444457,
        "t_p": 0.7610350506429631,
        "t t' (p)": 0.9799628682378302,
        "power transmittance (p) n2 cos t/(n1 cos i) t^2": 0.9799628682378302,
    },
)

POS_06 = Case(
    title="Reversibility (Stokes relations) at 40 deg, 1.7 | 1.45",
    source="G. G. Stokes (1849); Born and Wolf section 1.5",
    source_status="value from memory",
    expected={
        "r_s (p sign: n2 cos i - n1 cos t)": 0.1548133395185462,
        "t_s": 1.1548133395185463,
        "t t' (s)": 0.9760328299071154,
        "power transmittance (s) n2 cos t/(n1 cos i) t^2": 0.9760328299071154,
        "r_p (p sign: n2 cos i - n1 cos t)": -0.002996437587368276,
        "t_p": 1.1689007283458441,
        "t t' (p)": 0.999991021361785,
        "power transmittance (p) n2 cos t/(n1 cos i) t^2": 0.999991021361785,
    },
)

VIE_32 = Case(
    title="Directional transmittance of clear glass, 6 mm, n=1.52",
    source=(
        "physics: Fresnel; kind of test: CIE 171:2006 directional transmittance of clear "
        "glass (its tabulated values not obtained)"
    ),
    source_status="derived here",
    expected={
        "T(0 deg)": 0.8646617547759192,
        "T(0)/T(0)": 1.0,
        "T(10 deg)": 0.8642957759627694,
        "T(10)/T(0)": 0.9995767375957959,
        "T(20 deg)": 0.8628975648582556,
        "T(20)/T(0)": 0.9979596762457468,
        "T(30 deg)": 0.8593462840504573,
        "T(30)/T(0)": 0.993852543267813,
        "T(40 deg)": 0.850848513468757,
        "T(40)/T(0)": 0.9840246879998272,
        "T(50 deg)": 0.8306894661827506,
        "T(50)/T(0)": 0.9607103142870329,
        "T(60 deg)": 0.7825737376874726,
        "T(60)/T(0)": 0.9050634347650545,
        "T(70 deg)": 0.6677643192357735,
        "T(70)/T(0)": 0.772283861923357,
        "T(80 deg)": 0.4111552719397847,
        "T(80)/T(0)": 0.47550995481040714,
        "hemispherical diffuse transmittance": 0.7893322722380077,
    },
)

STR_07 = Case(
    title="Veiling glare index of 1 plane window(s) n=1.5 before an ideal camera",
    source=(
        "ISO 9358:1994 (defines VGI and the glare spread function; scope found by search); "
        "case derived here"
    ),
    source_status="confirmed in part by search",
    expected={
        "VGI = spot irradiance / bright-field irradiance": 0.0016,
        "bright field transmittance": 0.9230769230769231,
        "direct transmittance": 0.9216,
    },
)

STR_13 = Case(
    title="Ghost budget of 4 surfaces, R=0.04 each",
    source="pile of plates (Stokes 1862); ghost counting: common practice",
    source_status="derived here",
    expected={
        "number of two-bounce ghosts": 6,
        "direct power": 0.84934656,
        "sum of all two-bounce ghosts": 0.007735911741401333,
        "total transmitted power": 0.8571428571428571,
        "strongest single ghost / direct": 0.0016,
        "weakest single ghost / direct": 0.001358954496,
    },
)

STR_14 = Case(
    title="Ghost budget of 6 surfaces, R=0.015 each",
    source="pile of plates (Stokes 1862); ghost counting: common practice",
    source_status="derived here",
    expected={
        "number of two-bounce ghosts": 15,
        "direct power": 0.9133082548301407,
        "sum of all two-bounce ghosts": 0.0029627438023718342,
        "total transmitted power": 0.9162790697674419,
        "strongest single ghost / direct": 0.000225,
        "weakest single ghost / direct": 0.00019937576284707897,
    },
)
