"""Rays start uniformly over a rectangle."""

from lumentrace.jit import kernel

name = "rectangle"


@kernel
def start(mesh, sources, s, u):
    """Origin, normal and emitting face (-1: none) of a ray of source s; u: four uniforms."""
    center, normal, across, up = sources.place[s]
    x = (2.0 * u[0] - 1.0) * sources.size[s, 0]
    y = (2.0 * u[1] - 1.0) * sources.size[s, 1]
    return (
        (
            center[0] + x * across[0] + y * up[0],
            center[1] + x * across[1] + y * up[1],
            center[2] + x * across[2] + y * up[2],
        ),
        (normal[0], normal[1], normal[2]),
        -1,
    )
