"""All rays start in one point."""

from lumentrace.jit import kernel

name = "point"


@kernel
def start(mesh, sources, s, u):
    """Origin, normal and emitting face (-1: none) of a ray of source s; u: four uniforms."""
    center, normal = sources.place[s, 0], sources.place[s, 1]
    return (center[0], center[1], center[2]), (normal[0], normal[1], normal[2]), -1
