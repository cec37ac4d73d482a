"""The history of one ray: from hit to hit until it is caught, absorbed, gone or given up."""

from math import inf

from lumentrace.engine.emit import starts_in_gap
from lumentrace.engine.inside import (
    AIR,
    acting_body,
    contains,
    index_of,
    medium_of,
    toggled,
)
from lumentrace.engine.query import Leaving, cosine_of, find_pair, hit_set, point_of
from lumentrace.engine.state import ARRIVALS, KEYS, LOST, STEPS, TRAIL, deposit
from lumentrace.engine.sums import (
    CUT_OFF,
    LOST_KEPT,
    NOT_INSIDE,
    STEPS_MAX,
    TOO_DEEP,
    TOO_MANY_AT_ONCE,
)
from lumentrace.engine.surface import act, finish_of
from lumentrace.jit import kernel
from lumentrace.kernels.vectors import put, take
from lumentrace.models.dispatch import detector_bin_of, medium_advance
from lumentrace.world.arrays import DRY, OPAQUE, TRANSPARENT

NO_UNIFORMS = (0.0, 0.0, 0.0, 0.0)


@kernel
def lose(tally, rows, ray, b, ray_number, reason, tag):
    """Count a ray that cannot be followed any further, and keep its number and place."""
    row = rows.cut_off if reason == CUT_OFF else rows.unresolved
    deposit(tally, row, ray.weight[b])
    n = tally.used[LOST]
    if n < LOST_KEPT:
        tally.lost_ray[n] = ray_number
        tally.lost_reason[n] = reason
        tally.lost_weight[n] = ray.weight[b]
        put(tally.lost_place, n, take(ray.origin, b))
        tally.lost_tag[n] = tag
    tally.used[LOST] += 1


@kernel
def mark(tally, position):
    """Note a place on the way, where the way is wanted."""
    n = tally.used[TRAIL]
    if n < len(tally.trail):
        put(tally.trail, n, position)
        tally.used[TRAIL] = n + 1


@kernel
def arrive(world, tally, ray, b, ray_number, detector, cell, amount):
    """List an arrival with its path and with what was met on the way.

    Beyond the room of the lists it is only counted, so that the block can be done again with more.
    """
    n = tally.used[ARRIVALS]
    first_step, first_key = tally.used[STEPS], tally.used[KEYS]
    n_steps, n_met = min(ray.n_steps[b], STEPS_MAX), ray.n_met[b]
    tally.used[ARRIVALS] += 1
    tally.used[STEPS] += n_steps
    tally.used[KEYS] += n_met
    if (
        n >= len(tally.ray)
        or first_step + n_steps > len(tally.step)
        or first_key + n_met > len(tally.key)
    ):
        return
    tally.ray[n] = ray_number
    tally.detector[n] = detector
    tally.source[n] = ray.source[b]
    tally.cell[n] = cell
    tally.amount[n] = amount
    tally.optical[n] = ray.optical[b]
    tally.group[n] = ray.group[b]
    tally.reflections[n] = ray.reflections[b]
    tally.scatters[n] = ray.scatters[b]
    tally.marks[n] = tally.used[TRAIL]
    tally.too_long[n] = ray.n_steps[b] > STEPS_MAX
    tally.last_step[n] = first_step + n_steps
    tally.last_key[n] = first_key + n_met
    for i in range(n_steps):
        tally.step[first_step + i] = ray.step[b, i]
        tally.run[first_step + i] = ray.run[b, i]
    for i in range(n_met):
        tally.key[first_key + i] = ray.met[b, i]
        tally.repeats[first_key + i] = ray.repeats[b, ray.met[b, i]]


@kernel
def detect(world, tally, rows, ray, b, ray_number, hits, count):
    """Let every detector of the event count the ray once; True where one catches it."""
    detectors = world.detectors
    caught = False
    for i in range(count):
        if hits.owner[i] >= 0:
            continue
        d = -1 - hits.owner[i]
        cell, response = detector_bin_of(
            detectors.model[d], detectors, d, hits.u[i], hits.v[i], hits.front[i],
            ray.wavelength[b], world.luminosity,
        )  # fmt: skip
        if cell < 0:
            continue
        arrive(world, tally, ray, b, ray_number, d, cell, ray.weight[b] * response)
        caught = caught or detectors.catches[d]
    if caught:
        deposit(tally, rows.detected, ray.weight[b])
    return caught


@kernel
def opaque_hit(bodies, hits, count):
    """The hit of the opaque part or sheet that acts, -1: none.

    The first in the file acts; of a closed part the face that is met from outside, since at its
    outline a face that is turned away may seem nearer.
    """
    best = -1
    for i in range(count):
        body = hits.owner[i]
        if body < 0 or bodies.kind[body] == TRANSPARENT:
            continue
        if best < 0 or body < hits.owner[best]:
            best = i
        elif body == hits.owner[best] and bodies.kind[body] == OPAQUE:
            if hits.front[i] and not hits.front[best]:
                best = i
    return best


@kernel
def dry_partner(mesh, bodies, hits, count, opaque):
    """The hit of a clear face that the opaque hit lies dry on, -1: none."""
    for i in range(count):
        if hits.owner[i] >= 0 and bodies.kind[hits.owner[i]] == TRANSPARENT:
            row = find_pair(mesh, hits.prim[opaque], hits.prim[i])
            if row >= 0 and mesh.pair_kind[row] == DRY:
                return i
    return -1


@kernel
def cross(bodies, ray, b, hits, count):
    """Fill ray.after: the bodies that the ray is inside once it is through the event's surfaces.

    Marks the hits at which a body is entered or left, and returns the first of them; -1: none;
    -2 - reason where that cannot be. Where both sides of a body are met in one place, at its
    outline, the one counts that fits whether the ray is inside.
    """
    first = -1
    n = ray.n_inside[b]
    for i in range(n):
        ray.after[b, i] = ray.inside[b, i]
    for i in range(count):
        hits.crossed[i] = False
        body = hits.owner[i]
        if body < 0 or bodies.kind[body] != TRANSPARENT:
            continue
        if hits.front[i] == contains(ray.inside[b], ray.n_inside[b], body):
            other_side = False
            for j in range(count):
                other_side = other_side or (j != i and hits.owner[j] == body)
            if not other_side:
                return -2 - NOT_INSIDE
            continue
        hits.crossed[i] = True
        n = toggled(ray.after[b], n, body)
        if n < 0:
            return -2 - TOO_DEEP
        if first < 0:
            first = i
    ray.n_after[b] = n
    return first


@kernel
def pass_through(ray, b):
    """Make what lies behind the surface what the ray is inside."""
    for i in range(ray.n_after[b]):
        ray.inside[b, i] = ray.after[b, i]
    ray.n_inside[b] = ray.n_after[b]


@kernel
def acting_hit(world, hits, count, before, behind):
    """The crossed hit whose face acts between two bodies, of which -1 is the surroundings.

    That of the larger rank; but a finish that is named on the other, in contact, goes before an
    uncoated face.
    """
    rank = world.bodies.rank
    first = before if behind < 0 or (before >= 0 and rank[before] > rank[behind]) else behind
    chosen, other = -1, -1
    for i in range(count):
        if hits.crossed[i] and hits.owner[i] == first:
            chosen = i
        elif hits.crossed[i] and (hits.owner[i] == before or hits.owner[i] == behind):
            other = i
    tag = world.mesh.tag
    if other >= 0 and finish_of(world.tags, tag[hits.prim[chosen]], hits.front[chosen]) == 0:
        if finish_of(world.tags, tag[hits.prim[other]], hits.front[other]) != 0:
            return other
    return chosen


@kernel
def leave(ray, b, face, side, hits, count, acting):
    """The ray goes on from a face, on that side of it; the event's other bodies are behind it."""
    ray.face[b] = face
    ray.side[b] = side
    ray.fresh[b] = False
    n = 0
    for i in range(count):
        if hits.owner[i] != hits.owner[acting]:
            ray.skipped[b, n] = hits.prim[i]
            n += 1
    ray.n_skipped[b] = n


@kernel
def act_in_gap(world, rows, ray, b, tally, factor):
    """One event in a dry gap, or at its clear face from inside; False where the ray ends.

    The clear face and the opaque one or sheet lie in one place, with air between. Light in the gap
    meets the one that it goes toward, until it leaves by one of them. (Light that is emitted into
    the gap of two opaque faces stays there.)
    """
    mesh, bodies = world.mesh, world.bodies
    clear, cover = ray.clear[b], ray.cover[b]
    body = mesh.body[clear]
    inside = contains(ray.inside[b], ray.n_inside[b], body)
    direction = take(ray.direction, b)
    at_clear = inside or cosine_of(mesh, world.detectors, clear, direction) < 0.0
    face = clear if at_clear else cover
    front = cosine_of(mesh, world.detectors, face, direction) < 0.0
    n_air = index_of(world.media, AIR)
    n_clear = n_air
    if bodies.kind[body] == TRANSPARENT:
        n_clear = index_of(world.media, medium_of(bodies, body))
    n1 = n_clear if inside else n_air
    n2 = (n_air if inside else n_clear) if at_clear else n_air
    side = act(world, rows, ray, b, tally, face, finish_of(world.tags, mesh.tag[face], front), n1, n2, factor)
    if side == 0:
        return False
    stays_in_gap = side < 0 if inside else side > 0
    if at_clear and side < 0:
        ray.n_inside[b] = toggled(ray.inside[b], ray.n_inside[b], body)
    if not stays_in_gap:
        ray.face[b] = face
        ray.side[b] = float(side) if front else -float(side)
        ray.fresh[b] = False
        ray.skipped[b, 0] = cover if at_clear else clear
        ray.n_skipped[b] = 1
        ray.clear[b] = -1
    return True


@kernel
def follow(world, rows, ray, b, ray_number, hits, tally):
    """Follow branch b of a ray to its end; everything goes to the tally."""
    mesh, bodies, media = world.mesh, world.bodies, world.media
    factor = 1.0
    mark(tally, take(ray.origin, b))
    while True:
        if ray.events[b] >= world.settings.events_max:
            lose(tally, rows, ray, b, ray_number, CUT_OFF, -1)
            return
        if ray.clear[b] >= 0:
            if not act_in_gap(world, rows, ray, b, tally, factor):
                return
            factor = 1.0
            continue

        origin = take(ray.origin, b)
        direction = take(ray.direction, b)
        leaving = Leaving(ray.face[b], ray.side[b], ray.fresh[b])
        count = hit_set(
            mesh, world.tree, world.detectors, origin, direction, leaving,
            ray.skipped[b], ray.n_skipped[b], hits,
        )  # fmt: skip
        if count < 0:
            lose(tally, rows, ray, b, ray_number, TOO_MANY_AT_ONCE, -1)
            return
        if count > 0 and ray.fresh[b] and starts_in_gap(world, ray, hits):
            ray.clear[b], ray.cover[b], ray.fresh[b] = hits.prim[0], ray.face[b], False
            continue

        before = acting_body(ray.inside[b], ray.n_inside[b], bodies.rank)
        medium = medium_of(bodies, before)
        position, direction, factor, optical, group, _ = medium_advance(
            media.model[medium], media.values[medium], ray.wavelength[b], origin, direction,
            hits.t[0] if count > 0 else inf, NO_UNIFORMS,
        )  # fmt: skip
        absorbed = ray.weight[b] * (1.0 - factor)
        if absorbed > 0.0:
            if before >= 0:
                deposit(tally, rows.bulk + bodies.part[before], absorbed)
                deposit(tally, rows.part + bodies.part[before], absorbed)
            else:
                deposit(tally, rows.surroundings, absorbed)
            ray.weight[b] *= factor
        if count == 0:
            deposit(tally, rows.escaped, ray.weight[b])
            mark(tally, far_point(world.tree, origin, direction))
            return
        ray.optical[b] += optical
        ray.group[b] += group
        mark(tally, position)
        if detect(world, tally, rows, ray, b, ray_number, hits, count):
            return

        opaque = opaque_hit(bodies, hits, count)
        first = cross(bodies, ray, b, hits, count) if opaque < 0 else -1
        if first < -1:
            lose(tally, rows, ray, b, ray_number, -2 - first, tag_of(mesh, hits, count))
            return
        n1 = index_of(media, medium)
        if opaque >= 0:
            partner = dry_partner(mesh, bodies, hits, count, opaque)
            if partner >= 0 and hits.owner[partner] == before:
                put(ray.origin, b, point_of(mesh, hits, partner))
                ray.clear[b], ray.cover[b] = hits.prim[partner], hits.prim[opaque]
                continue
            acting, n2 = opaque, n1
        elif first >= 0:
            behind = acting_body(ray.after[b], ray.n_after[b], bodies.rank)
            if behind == before:  # hidden inside a part that outranks what is crossed
                pass_through(ray, b)
                put(ray.origin, b, point_of(mesh, hits, first))
                side = -1.0 if hits.front[first] else 1.0
                leave(ray, b, hits.prim[first], side, hits, count, first)
                continue
            acting = acting_hit(world, hits, count, before, behind)
            partner = -1
            n2 = index_of(media, medium_of(bodies, behind))
        else:  # only detectors, and they let pass
            put(ray.origin, b, position)
            for i in range(count):
                ray.skipped[b, i] = hits.prim[i]
            ray.n_skipped[b] = count
            ray.fresh[b] = False
            continue

        face, front = hits.prim[acting], hits.front[acting]
        finish = finish_of(world.tags, mesh.tag[face], front)
        side = act(world, rows, ray, b, tally, face, finish, n1, n2, factor)
        if side == 0:
            return
        put(ray.origin, b, point_of(mesh, hits, acting))
        leave(ray, b, face, float(side) if front else -float(side), hits, count, acting)
        if side < 0 and opaque < 0:
            pass_through(ray, b)
        if side < 0 and partner >= 0:  # through a sheet that lies dry on a clear face
            ray.clear[b], ray.cover[b] = hits.prim[partner], face


@kernel
def tag_of(mesh, hits, count):
    """Tag of the nearest face of an event, -1: none."""
    for i in range(count):
        if hits.owner[i] >= 0:
            return mesh.tag[hits.prim[i]]
    return -1


@kernel
def far_point(tree, origin, direction):
    """A place on the way of a ray that leaves the scene: a quarter of the scene's size on."""
    x = tree.upper[0, 0] - tree.lower[0, 0]
    y = tree.upper[0, 1] - tree.lower[0, 1]
    z = tree.upper[0, 2] - tree.lower[0, 2]
    length = 0.25 * max(x, max(y, z))
    return (
        origin[0] + length * direction[0],
        origin[1] + length * direction[1],
        origin[2] + length * direction[2],
    )
