"""Rays start uniformly over a disc."""

from lumentrace.jit import kernel
from lumentrace.kernels import sampling

name = "disc"


@kernel
def start(mesh, sources, s, u):
    """Origin, normal and emitting face (-1: none) of a ray of source s; u: four uniforms."""
    center, normal, across, up = sources.place[s]
    x, y = sampling.disc(sources.size[s, 0], u[0], u[1])
    return (
        (
            center[0] + x * across[0] + y * up[0],
            center[1] + x * across[1] + y * up[1],
            center[2] + x * across[2] + y * up[2],
        ),
        (normal[0], normal[1], normal[2]),
        -1,
    )
