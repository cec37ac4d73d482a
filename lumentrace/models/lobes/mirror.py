"""Specular reflection: the angle of reflection is the angle of incidence.

A single direction: as a function of directions it is zero but there, where it has no value.
"""

from lumentrace.jit import kernel
from lumentrace.models.events import MIRROR

name = "mirror"


@kernel
def sample(incoming, n1, n2, u):
    """Direction that leaves, the factor on the weight, and the event."""
    return (incoming[0], incoming[1], -incoming[2]), 1.0, MIRROR


@kernel
def value(incoming, out, n1, n2):
    """Scattering function per steradian away from the one direction."""
    return 0.0


@kernel
def pdf(incoming, out, n1, n2):
    """Density of `sample` per steradian away from the one direction."""
    return 0.0


@kernel
def albedo(incoming, n1, n2):
    """Share of the light that leaves again."""
    return 1.0
