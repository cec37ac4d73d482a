"""A flat rectangle of cells."""

from math import inf

from lumentrace.jit import kernel
from lumentrace.kernels.vectors import dot

name = "plane"


@kernel
def intersect(detectors, d, origin, direction):
    """Distance t along the line, of either sign, and place (u, v) in [0, 1); t is inf for a miss.

    u runs along `across`, v along `up`. The upper edges do not belong to the rectangle.
    """
    center, normal, across, up = detectors.place[d]
    cosine = dot(direction[0], direction[1], direction[2], normal[0], normal[1], normal[2])
    if cosine == 0.0:
        return inf, 0.0, 0.0
    x, y, z = center[0] - origin[0], center[1] - origin[1], center[2] - origin[2]
    t = dot(x, y, z, normal[0], normal[1], normal[2]) / cosine
    x, y, z = t * direction[0] - x, t * direction[1] - y, t * direction[2] - z
    u = 0.5 * (1.0 + dot(x, y, z, across[0], across[1], across[2]) / detectors.size[d, 0])
    v = 0.5 * (1.0 + dot(x, y, z, up[0], up[1], up[2]) / detectors.size[d, 1])
    if not (0.0 <= u < 1.0 and 0.0 <= v < 1.0):
        return inf, 0.0, 0.0
    return t, u, v


@kernel
def bin_of(detectors, d, u, v, front, wavelength, luminosity):
    """Cell and response for a ray that hits detector d at (u, v); cell -1: not counted.

    front: the light arrives against the normal. The response is 1, or 683 lm/W V(wavelength).
    """
    if not (front or detectors.two_sided[d]):
        return -1, 0.0
    across, up = detectors.cells[d]
    cell = detectors.cell_first[d] + min(int(u * across), across - 1)
    cell += across * min(int(v * up), up - 1)
    response = efficacy(wavelength, luminosity) if detectors.photometric[d] else 1.0
    return cell, response


@kernel
def efficacy(wavelength, luminosity):
    """683 lm/W V(wavelength in nm), V linear between the table's steps of 1 nm from 360 nm on.

    CIE 018:2019, "The basis of physical photometry".
    """
    place = wavelength - 360.0
    step = int(place)
    if place < 0.0 or place > len(luminosity) - 1:
        return 0.0
    if step == len(luminosity) - 1:
        return 683.0 * luminosity[step]
    share = place - step
    return 683.0 * ((1.0 - share) * luminosity[step] + share * luminosity[step + 1])
