"""Rays start uniformly over the faces of a part."""

from lumentrace.jit import kernel
from lumentrace.kernels import sampling
from lumentrace.kernels.vectors import take

name = "faces"


@kernel
def start(mesh, sources, s, u):
    """Origin, normal and emitting face of a ray of source s; u: four uniforms."""
    first, last = sources.face_first[s], sources.face_first[s + 1]
    chosen = sampling.find(sources.face_area, first, last, u[0] * sources.face_area[last - 1])
    face = sources.face[chosen]
    weights = sampling.triangle(u[1], u[2])
    a = take(mesh.vertex, mesh.corner[face, 0])
    b = take(mesh.vertex, mesh.corner[face, 1])
    c = take(mesh.vertex, mesh.corner[face, 2])
    origin = (
        weights[0] * a[0] + weights[1] * b[0] + weights[2] * c[0],
        weights[0] * a[1] + weights[1] * b[1] + weights[2] * c[1],
        weights[0] * a[2] + weights[1] * b[2] + weights[2] * c[2],
    )
    return origin, take(mesh.normal, face), face
