"""One surface event: a finish acts on a ray, the path and the account take note."""

from lumentrace.engine.state import deposit
from lumentrace.engine.sums import STEPS_MAX
from lumentrace.jit import kernel
from lumentrace.kernels import rng
from lumentrace.kernels.vectors import frame, set_vector, take, to_local, to_scene, vector
from lumentrace.models.dispatch import lobe_albedo, lobe_sample
from lumentrace.models.events import (
    EVENTS,
    MIRROR,
    REFLECT,
    SCATTER,
    SCATTER_THROUGH,
    TOTAL,
)

ROULETTE_FROM = 8  # surface events; before that no ray is ended by chance
ROULETTE_LEAST = 0.1  # smallest chance to survive
N_EVENTS = len(EVENTS)


@kernel
def finish_of(tags, tag, front):
    """Row of Finishes of a tag as seen from that side."""
    return tags.front[tag] if front else tags.back[tag]


@kernel
def choose_lobe(finishes, finish, incoming, n1, n2, u):
    """(lobe, its albedo, total): a lobe in proportion to its share, and what leaves of all.

    lobe is a row of the finish's lobes, -1 for a finish that absorbs everything.
    """
    first, last = finishes.lobe_first[finish], finishes.lobe_first[finish + 1]
    total = 0.0
    for i in range(first, last):
        total += finishes.lobe_share[i] * lobe_albedo(finishes.lobe_model[i], incoming, n1, n2)
    chosen, albedo = -1, 0.0
    below = u * total
    for i in range(first, last):
        here = lobe_albedo(finishes.lobe_model[i], incoming, n1, n2)
        part = finishes.lobe_share[i] * here
        if part > 0.0:
            chosen, albedo = i, here
            if below < part:
                break
        below -= part
    return chosen, albedo, total


@kernel
def take_step(ray, tally, tag, event):
    """Add an event at a tag to the path and to the counts of what was met."""
    code = (tag << 4) | event
    n = ray.n_steps
    collapses = event in (TOTAL, MIRROR, SCATTER, SCATTER_THROUGH)
    if collapses and 0 < n <= STEPS_MAX and ray.step[n - 1] == code:
        ray.run[n - 1] += 1
    elif n >= STEPS_MAX:
        ray.n_steps = STEPS_MAX + 1
    else:
        ray.step[n] = code
        ray.run[n] = 1
        ray.n_steps = n + 1
    if event == REFLECT:
        ray.reflections += 1
    if event in (SCATTER, SCATTER_THROUGH):
        ray.scatters += 1
    key = tag * N_EVENTS + event
    if tally.repeats[ray.branch, key] == 0:
        tally.met[ray.branch, ray.n_met] = key
        ray.n_met += 1
    tally.repeats[ray.branch, key] += 1


@kernel
def act(world, rows, ray, tally, face, finish, n1, n2, factor):
    """Let the finish of a face act on the ray, which is at that face.

    n1, n2: indices before and behind the surface. factor: what the segment before multiplied the
    weight by. Turns the direction, changes the weight, adds to path and account. Returns +1 where
    the light stays on its side, -1 where it goes through, 0 where nothing is left of the ray.
    """
    mesh = world.mesh
    dx, dy, dz = vector(ray.direction)
    nx, ny, nz = take(mesh.normal, face)
    if dx * nx + dy * ny + dz * nz > 0.0:
        nx, ny, nz = -nx, -ny, -nz
    tangent, bitangent = frame(nx, ny, nz)
    incoming = to_local(dx, dy, dz, tangent, bitangent, nx, ny, nz)

    seed, key = world.settings.seed, world.sources.key[ray.source]
    number, branch, event_number = ray.number, ray.branch, ray.events
    chances = rng.uniforms(seed, key, number, branch, event_number, rng.LOBE)
    u = rng.uniforms(seed, key, number, branch, event_number, rng.SURFACE)
    lobe, albedo, total = choose_lobe(world.finishes, finish, incoming, n1, n2, chances[0])
    tag = mesh.tag[face]
    part = world.tags.part[tag]
    weight = ray.weight
    absorbed = weight * (1.0 - total)
    deposit(tally, tag, absorbed)
    deposit(tally, rows.part + part, absorbed)
    ray.events += 1
    if lobe < 0:
        return 0
    out, gain, event = lobe_sample(world.finishes.lobe_model[lobe], incoming, n1, n2, u)
    gain *= total / albedo
    left = weight * gain
    if ray.events >= ROULETTE_FROM:
        survival = max(gain * factor, ROULETTE_LEAST)
        if survival < 1.0:
            left = left / survival if chances[1] < survival else 0.0
    deposit(tally, rows.sampling, weight * total - left)
    if left == 0.0:
        return 0
    ray.weight = left
    set_vector(ray.direction, to_scene(out, tangent, bitangent, nx, ny, nz))
    take_step(ray, tally, tag, event)
    return 1 if out[2] > 0.0 else -1
