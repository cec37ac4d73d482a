"""Rays start uniformly over the faces of a part."""

from lumentrace.jit import kernel
from lumentrace.kernels import sampling

name = "faces"


@kernel
def start(mesh, sources, s, u):
    """Origin, normal and emitting face of a ray of source s; u: four uniforms."""
    first, last = sources.face_first[s], sources.face_first[s + 1]
    chosen = sampling.find(sources.face_area, first, last, u[0] * sources.face_area[last - 1])
    face = sources.face[chosen]
    weights = sampling.triangle(u[1], u[2])
    a, b, c = mesh.corner[face]
    origin = (
        weights[0] * mesh.vertex[a, 0] + weights[1] * mesh.vertex[b, 0] + weights[2] * mesh.vertex[c, 0],
        weights[0] * mesh.vertex[a, 1] + weights[1] * mesh.vertex[b, 1] + weights[2] * mesh.vertex[c, 1],
        weights[0] * mesh.vertex[a, 2] + weights[1] * mesh.vertex[b, 2] + weights[2] * mesh.vertex[c, 2],
    )  # fmt: skip
    normal = mesh.normal[face]
    return origin, (normal[0], normal[1], normal[2]), face
