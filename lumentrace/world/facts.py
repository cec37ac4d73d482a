"""What `check` tells of parts and tags."""

from lumentrace.world.bodies import BuiltPart
from lumentrace.world.geometry import signed_volume
from lumentrace.world.materials import tag_finish
from lumentrace.world.placement import n_copies
from lumentrace.world.world import PartFacts, TagFacts


def part_facts(built: BuiltPart) -> PartFacts:
    """Facts of one copy, before it is turned and moved."""
    part, mesh = built.part, built.mesh
    vertex = mesh.vertex * part.scale
    return PartFacts(
        name=part.name,
        copies=n_copies(part),
        size=vertex.max(axis=0) - vertex.min(axis=0),
        faces=len(mesh.corner),
        medium=part.medium,
        closed=mesh.closed,
        area=float(mesh.facets.area.sum()) * part.scale**2,
        volume=signed_volume(vertex, mesh.corner) if mesh.closed else None,
        mesh_digest=mesh.digest,
    )


def tag_facts(built: BuiltPart) -> list[TagFacts]:
    """Facts of the tags of one copy, in their order."""
    facts = []
    area = built.mesh.facets.area
    for row, name in enumerate(built.tags.names):
        mine = built.tags.row == row
        finish = tag_finish(built, name)
        same = finish.front == finish.back
        facts.append(
            TagFacts(
                name=f"{built.part.name}:{name}",
                faces=int(mine.sum()),
                area=float(area[mine].sum()) * built.part.scale**2,
                share=float(area[mine].sum() / area.sum()),
                finish=finish.front if same else f"front {finish.front}, back {finish.back}",
            )
        )
    return facts
