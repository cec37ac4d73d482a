"""Vectors as three floats in and out: what the compiler keeps in registers."""

from math import sqrt

from lumentrace.jit import kernel


@kernel
def dot(ax, ay, az, bx, by, bz):
    return ax * bx + ay * by + az * bz


@kernel
def normalised(x, y, z):
    """The unit vector along (x, y, z)."""
    scale = 1.0 / sqrt(x * x + y * y + z * z)
    return x * scale, y * scale, z * scale


@kernel
def frame(nx, ny, nz):
    """Two unit vectors that make a right-handed frame (tangent, bitangent, n) with a unit n.

    Duff et al.: "Building an orthonormal basis, revisited", JCGT 6 (2017), listing 3.
    """
    sign = 1.0 if nz >= 0.0 else -1.0
    a = -1.0 / (sign + nz)
    b = nx * ny * a
    return (
        (1.0 + sign * nx * nx * a, sign * b, -sign * nx),
        (b, sign + ny * ny * a, -ny),
    )


@kernel
def to_scene(local, tangent, bitangent, nx, ny, nz):
    """Turn a local direction (+z along the normal) into the scene's frame."""
    x, y, z = local
    return (
        x * tangent[0] + y * bitangent[0] + z * nx,
        x * tangent[1] + y * bitangent[1] + z * ny,
        x * tangent[2] + y * bitangent[2] + z * nz,
    )


@kernel
def to_local(dx, dy, dz, tangent, bitangent, nx, ny, nz):
    """Turn a direction of the scene's frame into the local one (+z along the normal)."""
    return (
        dot(dx, dy, dz, tangent[0], tangent[1], tangent[2]),
        dot(dx, dy, dz, bitangent[0], bitangent[1], bitangent[2]),
        dot(dx, dy, dz, nx, ny, nz),
    )


@kernel
def reflect(dx, dy, dz, nx, ny, nz):
    """Mirrored direction d - 2 (d.n) n; Born and Wolf, Principles of Optics, section 3.2.2."""
    twice = 2.0 * dot(dx, dy, dz, nx, ny, nz)
    return dx - twice * nx, dy - twice * ny, dz - twice * nz


@kernel
def refracted_cosine_squared(n1, n2, cos_1):
    """cos^2 of the angle of refraction, negative beyond the critical angle.

    1 - (n1/n2)^2 (1 - cos_1^2) by Snell's law, written without the cancellation that would make a
    boundary of equal indices reflect grazing light.
    """
    ratio = n1 / n2
    return (1.0 - ratio) * (1.0 + ratio) + ratio * ratio * cos_1 * cos_1


@kernel
def refract(dx, dy, dz, nx, ny, nz, n1, n2):
    """Refracted unit direction from index n1 into n2; n is the unit normal against d.

    t = (n1/n2) d + ((n1/n2) c - sqrt(1 - (n1/n2)^2 (1 - c^2))) n with c = -d.n; Born and Wolf,
    Principles of Optics, section 3.2.2. Not a number beyond the critical angle.
    """
    ratio = n1 / n2
    cosine = -dot(dx, dy, dz, nx, ny, nz)
    along = ratio * cosine - sqrt(refracted_cosine_squared(n1, n2, cosine))
    return normalised(ratio * dx + along * nx, ratio * dy + along * ny, ratio * dz + along * nz)


@kernel
def put(array, row, vector):
    """array[row] = vector, for (n, 3) arrays."""
    array[row, 0], array[row, 1], array[row, 2] = vector


@kernel
def take(array, row):
    """array[row] as three floats, for (n, 3) arrays."""
    return array[row, 0], array[row, 1], array[row, 2]


@kernel
def vector(array):
    """A (3,) array as three floats."""
    return array[0], array[1], array[2]


@kernel
def set_vector(array, x):
    """array[:] = x for a (3,) array and three floats."""
    array[0], array[1], array[2] = x
