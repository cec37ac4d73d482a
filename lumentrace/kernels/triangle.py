"""Watertight intersection of a ray with a triangle.

Woop, Benthin, Wald: "Watertight ray/triangle intersection", JCGT 2 (2013), here in float64
throughout. The edge functions of two triangles that share an edge are exact negatives of each
other, so that no line passes between them; they must never be contracted to fused products.
"""

from math import inf

from lumentrace.jit import kernel


@kernel
def shear(dx, dy, dz):
    """What the test needs of a direction: axes (kx, ky, kz) and the shear (sx, sy, sz).

    z is the axis of the direction's largest component; x and y keep the winding.
    """
    ax, ay, az = abs(dx), abs(dy), abs(dz)
    if ax >= ay and ax >= az:
        kx, ky, kz = 1, 2, 0
        x, y, z = dy, dz, dx
    elif ay >= az:
        kx, ky, kz = 2, 0, 1
        x, y, z = dz, dx, dy
    else:
        kx, ky, kz = 0, 1, 2
        x, y, z = dx, dy, dz
    if z < 0.0:
        kx, ky = ky, kx
        x, y = y, x
    return kx, ky, kz, x / z, y / z, 1.0 / z


@kernel
def intersect(origin, sheared, vertex, a, b, c):
    """Distance t along the whole line, of either sign, and weights (u, v) of corners b and c.

    origin: (x, y, z). sheared: of `shear`. a, b, c: rows of the corners in vertex, (V, 3) float64.
    t is inf for a miss; an edge or a corner that is hit exactly counts as hit, for every triangle
    that has it.
    """
    kx, ky, kz, sx, sy, sz = sheared
    ox, oy, oz = origin[kx], origin[ky], origin[kz]
    az = vertex[a, kz] - oz
    bz = vertex[b, kz] - oz
    cz = vertex[c, kz] - oz
    ax = (vertex[a, kx] - ox) - sx * az
    ay = (vertex[a, ky] - oy) - sy * az
    bx = (vertex[b, kx] - ox) - sx * bz
    by = (vertex[b, ky] - oy) - sy * bz
    cx = (vertex[c, kx] - ox) - sx * cz
    cy = (vertex[c, ky] - oy) - sy * cz
    edge_a = cx * by - cy * bx
    edge_b = ax * cy - ay * cx
    edge_c = bx * ay - by * ax
    if (edge_a < 0.0 or edge_b < 0.0 or edge_c < 0.0) and (
        edge_a > 0.0 or edge_b > 0.0 or edge_c > 0.0
    ):
        return inf, 0.0, 0.0
    area = edge_a + edge_b + edge_c
    if area == 0.0:
        return inf, 0.0, 0.0
    t = sz * (edge_a * az + edge_b * bz + edge_c * cz) / area
    return t, edge_b / area, edge_c / area


@kernel
def drawn_back(u, v, margin):
    """Weights (u, v) of corners b and c of a hit, kept at least `margin` from every edge.

    A ray that restarts from the very edge of a face may, by rounding, start on the wrong side of
    the face behind that edge and leave a closed body. Moved along its own face by more than the
    rounding of the intersection it starts where the geometry is plain. margin: at most 1/4.
    """
    w = max(1.0 - u - v, margin)
    u = max(u, margin)
    v = max(v, margin)
    total = u + v + w
    return u / total, v / total
