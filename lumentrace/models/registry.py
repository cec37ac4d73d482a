"""Every model of the program, one line each: the number of a kind is its place here.

A new model is a new file beside its siblings, with the functions that they have, and one line in
this file. Numbers are not stored in files, names are.
"""

from lumentrace.models.detectors import plane
from lumentrace.models.lobes import fresnel, lambertian, lambertian_through, mirror
from lumentrace.models.media import uniform
from lumentrace.models.patterns import collimated, cosine_power, isotropic
from lumentrace.models.patterns import lambertian as lambertian_pattern
from lumentrace.models.starts import disc, faces, point, rectangle

LOBES = (
    fresnel,
    mirror,
    lambertian,
    lambertian_through,
)
PATTERNS = (
    isotropic,
    lambertian_pattern,
    cosine_power,
    collimated,
)
STARTS = (
    point,
    faces,
    disc,
    rectangle,
)
MEDIA = (uniform,)
DETECTORS = (plane,)


def number(registry, name):
    """Place of the model of that name; ValueError where there is none."""
    return [model.name for model in registry].index(name)
