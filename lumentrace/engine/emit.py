"""The start of a ray: its source, place, direction, and what it is inside."""

from lumentrace.engine.inside import toggled
from lumentrace.engine.query import Leaving, cosine_of, find_pair, hit_set, point_of
from lumentrace.engine.sums import STUCK, TOO_DEEP, TOO_MANY_AT_ONCE
from lumentrace.jit import kernel
from lumentrace.kernels import rng
from lumentrace.kernels.vectors import frame, set_vector, to_scene, vector
from lumentrace.models.dispatch import pattern_emit, start_of
from lumentrace.world.arrays import BLOCK_RAYS, DRY, TRANSPARENT


@kernel
def source_of(sources, place):
    """Source of the ray at that place of a block."""
    s = 0
    while sources.ray_first[s + 1] <= place:
        s += 1
    return s


@kernel
def start(world, ray, ray_number, tally):
    """Set the ray to the start of ray `ray_number` of the run, outside all bodies for now."""
    sources = world.sources
    block, place = ray_number // BLOCK_RAYS, ray_number % BLOCK_RAYS
    s = source_of(sources, place)
    first, last = sources.ray_first[s], sources.ray_first[s + 1]
    number = block * (last - first) + place - first
    seed, key = world.settings.seed, sources.key[s]
    where = rng.uniforms(seed, key, number, 0, 0, rng.PLACE)
    origin, normal, face = start_of(sources.start[s], world.mesh, sources, s, where)
    whither = rng.uniforms(seed, key, number, 0, 0, rng.DIRECTION)
    local = pattern_emit(sources.pattern[s], sources.pattern_values[s], whither[0], whither[1])
    tangent, bitangent = frame(normal[0], normal[1], normal[2])
    direction = to_scene(local, tangent, bitangent, normal[0], normal[1], normal[2])
    begin(ray, tally, origin, direction, face)
    ray.source = s
    ray.number = number
    ray.wavelength = sources.wavelength[s]
    ray.weight = sources.ray_flux[s]


@kernel
def begin(ray, tally, origin, direction, face):
    """Set the ray to a fresh one in the surroundings; face: what emits it, -1: nothing."""
    set_vector(ray.origin, origin)
    set_vector(ray.direction, direction)
    ray.optical = 0.0
    ray.group = 0.0
    ray.events = 0
    ray.n_inside = 0
    ray.face = face
    ray.side = 1.0
    ray.fresh = face >= 0
    ray.n_skipped = 0
    ray.near = -1
    ray.far = -1
    ray.n_steps = 0
    ray.reflections = 0
    ray.scatters = 0
    for i in range(ray.n_met):
        tally.repeats[0, tally.met[0, i]] = 0
    ray.branch = 0
    ray.n_met = 0


@kernel
def hops_max(world):
    """Queries from one surface event to the next that are allowed: far more than can be."""
    return 1000 + 100 * (len(world.bodies.part) + len(world.detectors.model))


@kernel
def find_inside(world, ray, hits):
    """Fill in which transparent bodies the ray's place lies in, by what a line from there leaves.

    A body that the line crosses an odd number of times holds the start. The line is the ray's own
    direction, which no mesh is aligned with. Returns -1, or why the ray cannot be followed.
    """
    mesh, bodies = world.mesh, world.bodies
    direction = vector(ray.direction)
    origin = vector(ray.origin)
    leaving = Leaving(ray.face, ray.side, ray.fresh)
    n_inside, n_skipped, crossed = 0, 0, 0
    for _ in range(hops_max(world)):
        count = hit_set(
            mesh, world.tree, world.detectors, origin, direction, leaving,
            ray.skipped, n_skipped, hits,
        )  # fmt: skip
        if count < 0:
            return TOO_MANY_AT_ONCE
        if count == 0:
            break
        face = -1
        for i in range(count):
            ray.skipped[(crossed + i) % len(ray.skipped)] = hits.hit[i].prim
            body = hits.hit[i].owner
            if body < 0:
                continue
            if face < 0:
                face = i
            if bodies.kind[body] == TRANSPARENT:
                n_inside = toggled(ray.inside, n_inside, body)
                if n_inside < 0:
                    return TOO_DEEP
        crossed += count
        n_skipped = min(crossed, len(ray.skipped))
        if face >= 0:
            origin = point_of(mesh, hits.hit[face])
            hit = hits.hit[face]
            leaving = Leaving(hit.prim, -1.0 if hit.front else 1.0, False)
        else:
            t = hits.hit[0].t
            origin = (
                origin[0] + t * direction[0],
                origin[1] + t * direction[1],
                origin[2] + t * direction[2],
            )
            leaving = Leaving(leaving.face, leaving.side, leaving.fresh)
    else:
        return STUCK
    ray.n_inside = n_inside
    return -1


@kernel
def across_the_gap(world, ray, hits, count):
    """The hit of the face that a fresh ray's own face lies dry on, if it comes first; -1: none.

    A detector in the gap does not count: no light is counted between two faces in contact.
    """
    for i in range(count):
        hit = hits[i]
        if hit.owner < 0:
            continue
        row = find_pair(world.mesh, ray.face, hit.prim)
        if row >= 0 and world.mesh.pair_kind[row] == DRY:
            cosine = cosine_of(world.mesh, world.detectors, hit.prim, vector(ray.direction))
            if hit.t <= hit.reach + world.mesh.pair_gap[row] / abs(cosine):
                return i
        return -1
    return -1
