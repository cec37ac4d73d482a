"""The transparent bodies that a ray is inside, and which of them acts.

Nested and overlapping media by an integer priority: Schmidt and Budge, "Simple nested dielectrics
in ray traced images", Journal of Graphics Tools 7 (2002). The world has turned priority, nesting
and order of the file into one rank, different for every body; the largest acts.
"""

from lumentrace.jit import kernel
from lumentrace.models.dispatch import medium_index
from lumentrace.world.arrays import SURROUNDINGS_ROW


@kernel
def contains(inside, n, body):
    for i in range(n):
        if inside[i] == body:
            return True
    return False


@kernel
def toggled(inside, n, body):
    """Leave the body if it is among the n, else enter it; returns the new n, -1: no room."""
    for i in range(n):
        if inside[i] == body:
            inside[i] = inside[n - 1]
            return n - 1
    if n == len(inside):
        return -1
    inside[n] = body
    return n + 1


@kernel
def acting_body(inside, n, rank):
    """The body of the largest rank, -1 where the ray is in the surroundings."""
    best = -1
    for i in range(n):
        if best < 0 or rank[inside[i]] > rank[best]:
            best = inside[i]
    return best


@kernel
def medium_of(bodies, body):
    """Row of Media inside a body, or of the surroundings for -1."""
    return bodies.medium[body] if body >= 0 else SURROUNDINGS_ROW


@kernel
def index_of(media, medium):
    """Index of a row of Media relative to air."""
    return medium_index(media.model[medium], media.values[medium])
