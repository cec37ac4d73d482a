"""Amplitudes at a smooth boundary of two media, and the powers that follow from them.

Born and Wolf, Principles of Optics, section 1.5.2 (equations 20 and 21).
"""

from cmath import sqrt

from lumentrace.jit import kernel
from lumentrace.kernels.vectors import refracted_cosine_squared


@kernel
def fresnel(n1, n2, cos_1):
    """Complex amplitudes (r_s, r_p, t_s, t_p) for light from index n1 on index n2.

    cos_1 is the cosine of the angle of incidence, in (0, 1]. Beyond the critical angle the cosine
    of refraction is imaginary: the reflected amplitudes then have modulus one.
    The sign of r_p is that of (n2 cos_1 - n1 cos_2) / (n2 cos_1 + n1 cos_2).
    """
    cos_2 = sqrt(complex(refracted_cosine_squared(n1, n2, cos_1), 0.0))
    s = n1 * cos_1 + n2 * cos_2
    p = n2 * cos_1 + n1 * cos_2
    return (
        (n1 * cos_1 - n2 * cos_2) / s,
        (n2 * cos_1 - n1 * cos_2) / p,
        2.0 * n1 * cos_1 / s,
        2.0 * n1 * cos_1 / p,
    )


@kernel
def power(n1, n2, cos_1):
    """Shares of the incident power (R_s, R_p, T_s, T_p); R + T = 1 for each polarisation.

    The one place where reflectance and transmittance are derived from amplitudes:
    R = |r|^2, T = Re(n2 cos_2) / (n1 cos_1) |t|^2; Born and Wolf, section 1.5.3.
    """
    r_s, r_p, t_s, t_p = fresnel(n1, n2, cos_1)
    cos_2 = sqrt(complex(refracted_cosine_squared(n1, n2, cos_1), 0.0))
    widening = (n2 * cos_2).real / (n1 * cos_1)
    return (
        _square(r_s),
        _square(r_p),
        widening * _square(t_s),
        widening * _square(t_p),
    )


@kernel
def _square(amplitude):
    """|amplitude|^2"""
    return amplitude.real * amplitude.real + amplitude.imag * amplitude.imag


@kernel
def unpolarised_reflectance(n1, n2, cos_1):
    """Mean of the reflectances for s and p: unpolarised light, each event on its own."""
    r_s, r_p, _, _ = power(n1, n2, cos_1)
    return 0.5 * (r_s + r_p)


@kernel
def is_total(n1, n2, cos_1):
    """Whether all light is reflected: n1 sin >= n2."""
    return n1 > n2 and refracted_cosine_squared(n1, n2, cos_1) <= 0.0
