"""A medium of one index that absorbs by the law of Beer and Lambert.

A. Beer (1852) and J. H. Lambert (1760); Born and Wolf, Principles of Optics, section 14.1.
"""

from math import exp

from lumentrace.jit import kernel
from lumentrace.models.events import ARRIVED

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

    Returns (position, direction, weight factor, optical length, group length, event): where the
    ray is then, its direction there, what the weight is multiplied by, and the lengths relative to
    air; the event is ARRIVED. One index for all wavelengths: the group index is the phase index.
    With t_max inf the ray leaves for good, and only the weight factor has a meaning.
    """
    position = (
        origin[0] + t_max * direction[0],
        origin[1] + t_max * direction[1],
        origin[2] + t_max * direction[2],
    )
    length = values[0] * t_max
    return position, direction, transmittance(values[1], t_max), length, length, ARRIVED
