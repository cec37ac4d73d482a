"""scene -> world: reads the meshes, says what is wrong with them, and lays out flat arrays."""

from collections.abc import Sequence
from pathlib import Path

import numpy as np

from lumentrace.errors import Notice, nearest
from lumentrace.photometry import luminosity_table
from lumentrace.scene.measures import part_and_tag
from lumentrace.scene.model import BULK, Faces, Scene, Source
from lumentrace.world.arrays import TRANSPARENT, Bodies, Settings, WorldArrays
from lumentrace.world.bodies import Body, BuiltPart, placed
from lumentrace.world.buried import buried_detector, buried_source
from lumentrace.world.contacts import touch_distances
from lumentrace.world.detectors import detector_table
from lumentrace.world.doubts import detector_doubts, rounding_doubts, stack_doubts, start_doubts
from lumentrace.world.facts import part_facts, tag_facts
from lumentrace.world.frames import corners, detector_frame, extent, source_frame
from lumentrace.world.geometry import largest
from lumentrace.world.hierarchy import NO_TREE
from lumentrace.world.materials import finish_tables, medium_table
from lumentrace.world.meshes import MeshFile, part_mesh, read_file
from lumentrace.world.nesting import ranks
from lumentrace.world.scene_mesh import Joined, joined, mesh_arrays, touching
from lumentrace.world.shared import shared_room
from lumentrace.world.sources import Lit, emitting_faces, source_table, watts
from lumentrace.world.start_media import shown, start_media
from lumentrace.world.tags import part_tags
from lumentrace.world.world import ContactFacts, World


def build_world(scene: Scene) -> World:
    """The world of a scene: every part placed, every face tagged, every contact found.

    What `use` leaves out is left out. Raises UserError for what is wrong with a mesh, a tag, a
    nesting, a contact or the number of sources.
    """
    parts, notices = _built_parts(scene)
    _check_measures(scene, parts)
    bodies = placed(parts)
    whole = joined(parts, bodies)
    detectors = [detector for detector in scene.detectors if detector.use]
    frames = [detector_frame(detector) for detector in detectors]
    lit = [_lit(s, parts, bodies, whole) for s in scene.sources if s.use]
    outlines = [corners(*frame) for frame in frames]
    outlines += [_outline(one, whole) for one in lit]
    size = max([largest(whole.vertex), *(largest(outline) for outline in outlines)])
    touch = touch_distances(bodies, scene.study.touch, size)
    rank = ranks(parts, bodies, touch)
    detector_rows = detector_table(detectors, frames, size)
    pairs, contacts = touching(scene, parts, bodies, whole, detector_rows, touch)
    closed = np.array([parts[body.part].mesh.closed for body in bodies], bool)
    mesh = mesh_arrays(whole, closed, pairs, size)
    media, medium_rows = medium_table(scene, parts)
    tags, finishes = finish_tables(scene, parts)
    flux = np.array([watts(one.source, parts, scene.study.metre) for one in lit], np.float64)
    immersed = np.array(
        [_immersed(_outline(one, whole), parts, bodies, touch) for one in lit], bool
    )
    sources, groups = source_table(lit, flux, immersed, whole.facets.area)
    around = scene.study.surroundings
    starts = [start_media(one, parts, bodies, rank, mesh, touch, around) for one in lit]
    for one, there in zip(lit, starts, strict=True):
        notices += start_doubts(scene, one.source, there)
        notices += buried_source(one, parts, bodies, touch)
    notices += stack_doubts(scene, parts, bodies)
    notices += rounding_doubts(parts, bodies, whole.facets.altitude)
    for detector, frame in zip(detectors, frames, strict=True):
        notices += detector_doubts(detector, *frame, mesh, bodies, float(touch.max(initial=0.0)))
        notices += buried_detector(detector, *frame, parts, bodies, float(touch.max(initial=0.0)))
    return World(
        scene=scene,
        tables=WorldArrays(
            mesh=mesh,
            tree=NO_TREE,
            bodies=Bodies(
                part=np.array([body.part for body in bodies], np.int32),
                kind=np.array([parts[body.part].kind for body in bodies], np.int32),
                rank=rank,
                medium=np.array([medium_rows[body.part] for body in bodies], np.int32),
            ),
            tags=tags,
            finishes=finishes,
            media=media,
            sources=sources,
            detectors=detector_rows,
            settings=Settings(scene.study.seed, scene.trace.events_max, len(groups)),
            luminosity=luminosity_table(),
        ),
        part_names=tuple(built.part.name for built in parts),
        tag_names=tuple(f"{b.part.name}:{tag}" for b in parts for tag in b.tags.names),
        body_names=tuple(body.name for body in bodies),
        source_names=tuple(one.source.name for one in lit),
        group_names=groups,
        detector_names=tuple(detector.name for detector in detectors),
        source_flux=flux,
        source_start=tuple(shown(scene, start) for start in starts),
        parts=tuple(part_facts(built) for built in parts),
        tags=tuple(fact for built in parts for fact in tag_facts(built)),
        contacts=_in_order(parts, (*contacts, *shared_room(parts, bodies, touch))),
        notices=tuple(notices),
        touch=(float(min(touch, default=0.0)), float(max(touch, default=0.0))),
    )


def _built_parts(scene: Scene) -> tuple[list[BuiltPart], list[Notice]]:
    """The parts in use with their meshes and tags; a mesh file that several share is read once."""
    files: dict[Path, MeshFile] = {}
    parts: list[BuiltPart] = []
    notices: list[Notice] = []
    first_tag = 0
    for part in scene.parts:
        if not part.use:
            continue
        if part.mesh not in files:
            files[part.mesh] = read_file(part)
        mesh, changed = part_mesh(part, files[part.mesh])
        notices += changed
        tags = part_tags(part, mesh)
        parts.append(BuiltPart(part, mesh, tags, first_tag))
        first_tag += len(tags.names)
    return parts, notices


def _in_order(parts: Sequence[BuiltPart], contacts) -> tuple[ContactFacts, ...]:
    """By the parts' order in the file; of one pair what touches comes first."""
    row = {built.part.name: i for i, built in enumerate(parts)}
    return tuple(sorted(contacts, key=lambda c: [row[name] for name in c.parts]))


def _check_measures(scene: Scene, parts: Sequence[BuiltPart]) -> None:
    """Raises UserError for a limit or an `until` on a tag that no face has."""
    asked = [(limit.measure, "measure", limit.place) for limit in scene.limits]
    if scene.trace.until is not None:
        asked.append((scene.trace.until.measure, "until.measure", scene.trace.place))
    for measure, key, place in asked:
        at = part_and_tag(measure)
        if at is None or at[1] == BULK:
            continue
        tags = next(built.tags.names for built in parts if built.part.name == at[0])
        if at[1] not in tags:
            raise place.error(
                key,
                f'"{measure}": no face of "{at[0]}" has the tag "{at[1]}"; {nearest(at[1], tags)}',
            )


def _lit(source: Source, parts, bodies, whole: Joined) -> Lit:
    faces = emitting_faces(source, parts, bodies, whole.tag, whole.facets.area)
    return Lit(source, *source_frame(source), faces)


def _outline(lit: Lit, whole: Joined):
    """(n, 3) points whose box holds all that a source starts rays from."""
    if isinstance(lit.source.shape, Faces):
        return whole.vertex[whole.corner[lit.faces]].reshape(-1, 3)
    return extent(lit.source, lit.place, lit.size)


def _immersed(outline, parts: Sequence[BuiltPart], bodies: Sequence[Body], touch) -> bool:
    """Whether a source may start inside a transparent body, or against one: their boxes meet."""
    lower, upper = outline.min(axis=0), outline.max(axis=0)
    return any(
        parts[body.part].kind == TRANSPARENT
        and bool(((body.upper + reach >= lower) & (body.lower - reach <= upper)).all())
        for body, reach in zip(bodies, touch, strict=True)
    )
