"""A medium of one index that absorbs by the law of Beer and Lambert.

W. H. Beer and J. H. Lambert; Born and Wolf, Principles of Optics, section 14.1.
"""

from math import exp, inf

from lumentrace.jit import kernel

name = "uniform"


@kernel
def index(values):
    """Phase index relative to air."""
    return values[0]


@kernel
def transmittance(absorption, length):
    """exp(-absorption x length); one over an endless way where nothing absorbs."""
    if absorption == 0.0:
        return 1.0
    return exp(-absorption * length)


@kernel
def advance(values, wavelength, origin, direction, t_max, uniforms):
    """The segment inside the medium: straight, all the way.

    Returns (t, direction, weight factor, optical length, group length, event): how far it went,
    the direction there, what the weight is multiplied by, and the lengths relative to air; event
    is -1, since nothing happens on the way. One index for all wavelengths: the group index is
    the phase index.
    """
    factor = transmittance(values[1], t_max)
    length = values[0] * t_max if t_max < inf else 0.0
    return t_max, direction, factor, length, length, -1
