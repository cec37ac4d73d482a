"""The history of one ray: from hit to hit until it is caught, absorbed, gone or given up."""

from math import inf

from lumentrace.engine.emit import across_the_gap, find_inside, hops_max
from lumentrace.engine.inside import (
    acting_body,
    contains,
    index_of,
    medium_of,
    toggled,
)
from lumentrace.engine.query import Leaving, cosine_of, find_pair, hit_set, point_of
from lumentrace.engine.state import ARRIVALS, KEYS, LOSSES, STEPS, TRAIL, deposit
from lumentrace.engine.sums import (
    CUT_OFF,
    LOST_KEPT,
    NOT_INSIDE,
    STEPS_MAX,
    STUCK,
    TOO_DEEP,
    TOO_MANY_AT_ONCE,
)
from lumentrace.engine.surface import act, finish_of
from lumentrace.jit import kernel
from lumentrace.kernels.vectors import put, set_vector, vector
from lumentrace.models.dispatch import detector_bin_of, medium_advance
from lumentrace.world.arrays import AIR_ROW, DRY, SHEET, TRANSPARENT, UNCOATED_ROW

NO_UNIFORMS = (0.0, 0.0, 0.0, 0.0)


@kernel
def lose(tally, rows, ray, ray_number, reason, tag):
    """Count a ray that cannot be followed any further, and keep its number and place."""
    row = rows.cut_off if reason == CUT_OFF else rows.unresolved
    deposit(tally, row, ray.weight)
    n = tally.used[LOSSES]
    if n < LOST_KEPT:
        lost = tally.lost[n]
        lost.ray, lost.reason, lost.weight, lost.tag = ray_number, reason, ray.weight, tag
        lost.x, lost.y, lost.z = vector(ray.origin)
    tally.used[LOSSES] += 1


@kernel
def mark(tally, position):
    """Note a place on the way, where the way is wanted."""
    n = tally.used[TRAIL]
    if n < len(tally.trail):
        put(tally.trail, n, position)
        tally.used[TRAIL] = n + 1


@kernel
def arrive(world, tally, ray, ray_number, detector, cell, amount):
    """List an arrival with its path and with what was met on the way.

    Beyond the room of the lists it is only counted, so that the block can be done again with more.
    """
    n = tally.used[ARRIVALS]
    first_step, first_key = tally.used[STEPS], tally.used[KEYS]
    n_steps, n_met = min(ray.n_steps, STEPS_MAX), ray.n_met
    tally.used[ARRIVALS] += 1
    tally.used[STEPS] += n_steps
    tally.used[KEYS] += n_met
    if (
        n >= len(tally.arrival)
        or first_step + n_steps > len(tally.step)
        or first_key + n_met > len(tally.key)
    ):
        return
    arrival = tally.arrival[n]
    arrival.ray, arrival.detector, arrival.source = ray_number, detector, ray.source
    arrival.cell, arrival.amount = cell, amount
    arrival.optical, arrival.group = ray.optical, ray.group
    arrival.reflections, arrival.scatters = ray.reflections, ray.scatters
    arrival.marks = tally.used[TRAIL]
    arrival.too_long = ray.n_steps > STEPS_MAX
    arrival.last_step = first_step + n_steps
    arrival.last_key = first_key + n_met
    for i in range(n_steps):
        tally.step[first_step + i].step = ray.step[i]
        tally.step[first_step + i].run = ray.run[i]
    for i in range(n_met):
        key = tally.met[ray.branch, i]
        tally.key[first_key + i].key = key
        tally.key[first_key + i].repeats = tally.repeats[ray.branch, key]


@kernel
def detect(world, tally, rows, ray, ray_number, hits, count):
    """Let every detector of the event count the ray once; True where one catches it."""
    detectors = world.detectors
    caught = False
    for i in range(count):
        if hits[i].owner >= 0:
            continue
        d = -1 - hits[i].owner
        cell, response = detector_bin_of(
            detectors.model[d], detectors, d, hits[i].u, hits[i].v, hits[i].front,
            ray.wavelength, world.luminosity,
        )  # fmt: skip
        if cell < 0:
            continue
        arrive(world, tally, ray, ray_number, d, cell, ray.weight * response)
        caught = caught or detectors.catches[d]
    if caught:
        deposit(tally, rows.detected, ray.weight)
    return caught


@kernel
def opaque_hit(bodies, hits, count):
    """The hit of the opaque part or sheet that acts, -1: none.

    A sheet that lies on an opaque part is met before it; else the first in the file acts. Of a
    closed part it is the face that is met from outside, since at its outline a face that is turned
    away may seem nearer.
    """
    best = -1
    for i in range(count):
        body = hits[i].owner
        if body < 0 or bodies.kind[body] == TRANSPARENT:
            continue
        if best < 0:
            best = i
            continue
        chosen = hits[best].owner
        is_sheet, was_sheet = bodies.kind[body] == SHEET, bodies.kind[chosen] == SHEET
        if is_sheet != was_sheet:
            best = i if is_sheet else best
        elif body < chosen or (
            body == chosen and not is_sheet and hits[i].front > hits[best].front
        ):
            best = i
    return best


@kernel
def dry_partner(mesh, hits, count, acting, before):
    """The hit of a face that the acting one lies dry on, -1: none; of several that of `before`."""
    partner = -1
    for i in range(count):
        if hits[i].owner < 0 or (partner >= 0 and hits[i].owner != before):
            continue
        row = find_pair(mesh, hits[acting].prim, hits[i].prim)
        if row >= 0 and mesh.pair_kind[row] == DRY:
            partner = i
    return partner


@kernel
def comes_to_gap(bodies, hit):
    """Whether a ray that meets a dry pair comes from the side of its clear face.

    It does from within that part; and from beside it, at the outline of the pair, into the gap.
    """
    return bodies.kind[hit.owner] == TRANSPARENT and not hit.front


@kernel
def cross(bodies, ray, hits, count):
    """Fill ray.after: the bodies that the ray is inside once it is through the event's surfaces.

    Marks the hits at which a body is entered or left, and returns the first of them; -1: none;
    -2 - reason where that cannot be. Where both sides of a body are met in one place, at its
    outline, the one counts that fits whether the ray is inside.
    """
    first = -1
    n = ray.n_inside
    for i in range(n):
        ray.after[i] = ray.inside[i]
    for i in range(count):
        hits[i].crossed = False
        body = hits[i].owner
        if body < 0 or bodies.kind[body] != TRANSPARENT:
            continue
        if hits[i].front == contains(ray.inside, ray.n_inside, body):
            other_side = False
            for j in range(count):
                other_side = other_side or (j != i and hits[j].owner == body)
            if not other_side:
                return -2 - NOT_INSIDE
            continue
        hits[i].crossed = True
        n = toggled(ray.after, n, body)
        if n < 0:
            return -2 - TOO_DEEP
        if first < 0:
            first = i
    ray.n_after = n
    return first


@kernel
def meets_clear(bodies, hits, count):
    """Whether a surface of a transparent body is among the hits."""
    for i in range(count):
        if hits[i].owner >= 0 and bodies.kind[hits[i].owner] == TRANSPARENT:
            return True
    return False


@kernel
def pass_through(ray):
    """Make what lies behind the surface what the ray is inside."""
    for i in range(ray.n_after):
        ray.inside[i] = ray.after[i]
    ray.n_inside = ray.n_after


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
        if hits[i].crossed and hits[i].owner == first:
            chosen = i
        elif hits[i].crossed and (hits[i].owner == before or hits[i].owner == behind):
            other = i
    if other < 0:
        return chosen
    tag = world.mesh.tag
    plain = finish_of(world.tags, tag[hits[chosen].prim], hits[chosen].front) == UNCOATED_ROW
    named = finish_of(world.tags, tag[hits[other].prim], hits[other].front) != UNCOATED_ROW
    return other if plain and named else chosen


@kernel
def leave(ray, face, side, hits, count, acting):
    """The ray goes on from a face, on that side of it; the event's other bodies are behind it."""
    ray.face = face
    ray.side = side
    ray.fresh = False
    n = 0
    for i in range(count):
        if hits[i].owner != hits[acting].owner:
            ray.skipped[n] = hits[i].prim
            n += 1
    ray.n_skipped = n


@kernel
def act_in_gap(world, rows, ray, ray_number, tally, factor):
    """One event in a dry gap, or at its clear face from inside; False where the ray ends.

    The two faces lie in one place, with air between. Light in the gap meets the one that it goes
    toward, until it leaves by one of them. (Light that is emitted into the gap of two opaque faces
    stays there.)
    """
    mesh, bodies = world.mesh, world.bodies
    body = mesh.body[ray.near]
    is_clear = bodies.kind[body] == TRANSPARENT
    inside = is_clear and contains(ray.inside, ray.n_inside, body)
    direction = vector(ray.direction)
    off_far = cosine_of(mesh, world.detectors, ray.far, direction) * ray.side > 0.0
    at_near = inside or off_far
    face, other = (ray.near, ray.far) if at_near else (ray.far, ray.near)
    front = cosine_of(mesh, world.detectors, face, direction) < 0.0
    n_air = index_of(world.media, AIR_ROW)
    n_near = index_of(world.media, medium_of(bodies, body)) if is_clear else n_air
    n1 = n_near if inside else n_air
    n2 = (n_air if inside else n_near) if at_near else n_air
    finish = finish_of(world.tags, mesh.tag[face], front)
    side = act(world, rows, ray, tally, face, finish, n1, n2, factor)
    if side == 0:
        return False
    if at_near and side < 0 and is_clear:
        ray.n_inside = toggled(ray.inside, ray.n_inside, body)
        if ray.n_inside < 0:
            lose(tally, rows, ray, ray_number, TOO_DEEP, mesh.tag[face])
            return False
    stays_in_gap = side < 0 if inside else side > 0
    if not stays_in_gap:
        ray.face = face
        ray.side = float(side) if front else -float(side)
        ray.fresh = side < 0 and not (at_near and is_clear)  # through a sheet: another gap, perhaps
        ray.skipped[0] = other
        ray.n_skipped = 1
        ray.near = -1
    return True


@kernel
def follow(world, rows, ray, ray_number, scratch, tally):
    """Follow a branch of a ray to its end; everything goes to the tally."""
    mesh, bodies, media = world.mesh, world.bodies, world.media
    hits = scratch.hit
    factor = 1.0  # of the whole way since the last surface event
    hops = 0
    mark(tally, vector(ray.origin))
    while hops < hops_max(world):
        hops += 1
        if ray.events >= world.settings.events_max:
            lose(tally, rows, ray, ray_number, CUT_OFF, mesh.tag[ray.face] if ray.face >= 0 else -1)
            return
        if ray.near >= 0:
            if not act_in_gap(world, rows, ray, ray_number, tally, factor):
                return
            factor, hops = 1.0, 0
            continue

        origin, direction = vector(ray.origin), vector(ray.direction)
        leaving = Leaving(ray.face, ray.side, ray.fresh)
        count = hit_set(
            mesh, world.tree, world.detectors, origin, direction, leaving,
            ray.skipped, ray.n_skipped, scratch,
        )  # fmt: skip
        if count < 0:
            lose(tally, rows, ray, ray_number, TOO_MANY_AT_ONCE, -1)
            return
        across = across_the_gap(world, ray, hits, count) if ray.fresh else -1
        if across >= 0:
            ray.near, ray.far, ray.fresh = hits[across].prim, ray.face, False
            continue

        before = acting_body(ray.inside, ray.n_inside, bodies.rank)
        medium = medium_of(bodies, before)
        # All media let the ray through to the end: the event that is returned is ARRIVED.
        position, direction, passed, optical, group, _ = medium_advance(
            media.model[medium], media.values[medium], ray.wavelength, origin, direction,
            hits[0].t if count > 0 else inf, NO_UNIFORMS,
        )  # fmt: skip
        factor *= passed
        absorbed = ray.weight * (1.0 - passed)
        if absorbed > 0.0:
            if before >= 0:
                deposit(tally, rows.bulk + bodies.part[before], absorbed)
                deposit(tally, rows.part + bodies.part[before], absorbed)
            else:
                deposit(tally, rows.surroundings, absorbed)
            ray.weight *= passed
        if count == 0:
            deposit(tally, rows.escaped, ray.weight)
            mark(tally, far_point(world.tree, origin, direction))
            return
        ray.optical += optical
        ray.group += group
        mark(tally, position)
        if detect(world, tally, rows, ray, ray_number, hits, count):
            return

        opaque = opaque_hit(bodies, hits, count)
        first = cross(bodies, ray, hits, count) if opaque < 0 else -1
        if first < -1:
            lose(tally, rows, ray, ray_number, -2 - first, tag_of(mesh, hits, count))
            return
        n1 = index_of(media, medium)
        if opaque >= 0:
            partner = dry_partner(mesh, hits, count, opaque, before)
            if partner >= 0 and comes_to_gap(bodies, hits[partner]):
                set_vector(ray.origin, point_of(mesh, hits[partner]))
                ray.near, ray.far = hits[partner].prim, hits[opaque].prim
                ray.side = 1.0 if hits[opaque].front else -1.0
                continue
            acting, n2 = opaque, n1
        elif first >= 0:
            behind = acting_body(ray.after, ray.n_after, bodies.rank)
            if behind == before:  # hidden inside a part that outranks what is crossed
                pass_through(ray)
                set_vector(ray.origin, point_of(mesh, hits[first]))
                side = -1.0 if hits[first].front else 1.0
                leave(ray, hits[first].prim, side, hits, count, first)
                continue
            acting = acting_hit(world, hits, count, before, behind)
            partner = -1
            n2 = index_of(media, medium_of(bodies, behind))
        else:  # only detectors, and they let pass
            set_vector(ray.origin, position)
            for i in range(count):
                ray.skipped[i] = hits[i].prim
            ray.n_skipped = count
            continue

        beside = ray.face >= 0 and hits[acting].t <= 64.0 * hits[acting].reach  # next to its start
        face, front = hits[acting].prim, hits[acting].front
        finish = finish_of(world.tags, mesh.tag[face], front)
        side = act(world, rows, ray, tally, face, finish, n1, n2, factor)
        if side == 0:
            return
        set_vector(ray.origin, point_of(mesh, hits[acting]))
        leave(ray, face, float(side) if front else -float(side), hits, count, acting)
        if side < 0 and opaque < 0:
            pass_through(ray)
        if side < 0 and partner >= 0:  # through a sheet that lies dry on another face
            ray.near, ray.far = hits[partner].prim, face
        elif opaque >= 0 and (beside or meets_clear(bodies, hits, count)):
            # Where an opaque face meets the outline of a clear part only the restart itself tells
            # whether it lies in that part.
            ray.n_skipped = 0
            why = find_inside(world, ray, scratch)
            if why >= 0:
                lose(tally, rows, ray, ray_number, why, mesh.tag[face])
                return
        factor, hops = 1.0, 0
    lose(tally, rows, ray, ray_number, STUCK, mesh.tag[ray.face] if ray.face >= 0 else -1)


@kernel
def tag_of(mesh, hits, count):
    """Tag of the nearest face of an event, -1: none."""
    for i in range(count):
        if hits[i].owner >= 0:
            return mesh.tag[hits[i].prim]
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
