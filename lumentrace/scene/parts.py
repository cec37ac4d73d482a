"""[[part]] tables -> parts: every name resolved, every length in the study's unit."""

from collections.abc import Mapping

from lumentrace import units
from lumentrace.errors import nearest
from lumentrace.scene.forms import GridForm, PartForm, PickForm, RingForm, SidesForm, TubeForm
from lumentrace.scene.model import (
    BULK,
    DEFAULT,
    OPAQUE,
    SHEET,
    UNCOATED,
    Finish,
    Grid,
    Medium,
    Part,
    Pick,
    Ring,
    SideFinish,
    TagRule,
    Tube,
)
from lumentrace.scene.names import check_name
from lumentrace.scene.place import Place
from lumentrace.scene.vectors import scaled, turns, unit

COPIES_MAX = 1_000_000


def part_of(
    form: PartForm,
    place: Place,
    tag_places: tuple[Place, ...],
    media: Mapping[str, Medium],
    finishes: Mapping[str, Finish],
    file_unit: str,
    study_unit: str,
) -> Part:
    """The part that a [[part]] table describes. Raises UserError."""
    known = {OPAQUE, SHEET, *media}
    if form.medium not in known:
        raise place.error(
            "medium", f'no medium is named "{form.medium}"; {nearest(form.medium, known)}'
        )
    scale = units.ratio(file_unit, study_unit)
    return Part(
        name=form.name,
        mesh=place.file.parent / form.mesh,
        medium=form.medium,
        finish=_finish_by_tag(form, place, finishes),
        turn=turns(form.turn),
        at=scaled(form.at, scale),
        repeat=_copies(form.repeat, scale, place),
        take=form.take,
        scale=units.ratio(form.length or file_unit, study_unit),
        use=form.use,
        priority=form.priority,
        flip=form.flip,
        tags=_tag_rules(form, place, tag_places),
        place=place,
    )


def _copies(form: GridForm | RingForm | None, scale: float, place: Place) -> Grid | Ring | None:
    if form is None:
        return None
    if isinstance(form, RingForm):
        copies = form.count
        repeat = Ring(form.count, unit(form.axis), form.degrees, scaled(form.center, scale))
    else:
        copies = form.count[0] * form.count[1] * form.count[2]
        repeat = Grid(form.count, scaled(form.step, scale))
    if copies > COPIES_MAX:
        most = units.grouped(COPIES_MAX)
        raise place.error("repeat.count", f"found {units.grouped(copies)} copies; at most {most}")
    return repeat


def _finish_by_tag(
    form: PartForm, place: Place, finishes: Mapping[str, Finish]
) -> dict[str, SideFinish]:
    """Finishes by tag, always with one for the default tag."""
    written = form.finish
    if written is None:
        by_tag = {}
    elif isinstance(written, str) or (form.medium == SHEET and _names_sides(written)):
        by_tag = {DEFAULT: ("finish", written)}
    else:
        by_tag = {tag: (f"finish.{tag}", one) for tag, one in written.items()}
    if BULK in by_tag:
        raise place.error(f"finish.{BULK}", f'"{BULK}" is the inside of a part and has no finish')
    if DEFAULT not in by_tag and form.medium in (OPAQUE, SHEET):
        kind = "an opaque part" if form.medium == OPAQUE else "a sheet"
        where = f"finish.{DEFAULT}" if by_tag else "finish"
        sides = "; front and back are for sheets" if _names_sides(by_tag) else ""
        raise place.error(where, f"is missing; {kind} needs a finish for all its faces{sides}")
    by_tag = {DEFAULT: ("finish", UNCOATED), **by_tag}
    return {
        tag: _sides(one, key, form.medium, place, finishes) for tag, (key, one) in by_tag.items()
    }


def _names_sides(written: Mapping) -> bool:
    """Whether a table under `finish` names sides: a sheet's tags would need a default besides."""
    return bool(written) and set(written) <= {"front", "back"}


def _sides(
    written: str | SidesForm | Mapping[str, str | SidesForm],
    key: str,
    medium: str,
    place: Place,
    finishes: Mapping[str, Finish],
) -> SideFinish:
    """Finishes of both sides; the names must exist and suit what lies behind the face."""
    if isinstance(written, str):
        _check_finish(written, key, medium, place, finishes)
        return SideFinish(written, written)
    if medium != SHEET:
        raise place.error(key, "front and back are for sheets; name one finish")
    by_side = dict(written)
    for side in ("front", "back"):
        if not isinstance(by_side.get(side), str):
            raise place.error(f"{key}.{side}", "the name of a finish is needed for either side")
        _check_finish(by_side[side], f"{key}.{side}", medium, place, finishes)
    return SideFinish(**by_side)


def _check_finish(
    name: str, key: str, medium: str, place: Place, finishes: Mapping[str, Finish]
) -> None:
    if name not in finishes:
        raise place.error(key, f'no finish is named "{name}"; {nearest(name, finishes)}')
    finish = finishes[name]
    if finish.uncoated and medium == OPAQUE:
        raise place.error(key, f'"{name}" lets light in, and an opaque part has no light inside')
    if finish.uncoated and medium == SHEET:
        raise place.error(key, f'"{name}" is for the face of a medium, and a sheet has no inside')
    if finish.diffuse_through > 0 and medium == OPAQUE:
        raise place.error(
            key,
            f'"{name}" has diffuse_through = {finish.diffuse_through:g}, and an opaque part has '
            "no light inside",
        )


def _tag_rules(form: PartForm, place: Place, places: tuple[Place, ...]) -> tuple[TagRule, ...]:
    rules: dict[str, TagRule] = {}
    for tag, at in zip(form.tag, places, strict=True):
        check_name("tag", tag.name, at)
        if tag.name in rules:
            first = rules[tag.name].place.at("name")
            raise at.error(
                "name", f'"{tag.name}" stands twice, first at {first}; a pick may be a list'
            )
        single = isinstance(tag.pick, PickForm)
        picks = {"pick": tag.pick} if single else {f"pick.{i}": p for i, p in enumerate(tag.pick)}
        if not picks:
            raise at.error("pick", "found an empty list; a pick is needed")
        rules[tag.name] = TagRule(
            tag.name, tuple(_pick(pick, key, at) for key, pick in picks.items()), at
        )
    return tuple(rules.values())


def _pick(form: PickForm, key: str, place: Place) -> Pick:
    """A pick whose keys go together."""
    if not form.model_fields_set:
        allowed = ", ".join(PickForm.model_fields)
        raise place.error(key, f"is empty; allowed: {allowed}")
    for one, other in (("facing", "within"), ("grow_from", "over")):
        for given, needed in ((one, other), (other, one)):
            if getattr(form, given) is not None and getattr(form, needed) is None:
                raise place.error(key, f"has {given} and no {needed}; they go together")
    if form.box and any(low > high for low, high in zip(*form.box, strict=True)):
        raise place.error(f"{key}.box", "the first corner must be the smaller one, in x, y and z")
    return Pick(
        facing=unit(form.facing) if form.facing else None,
        within=form.within,
        box=form.box,
        grow_from=form.grow_from,
        over=form.over,
        tube=_tube(form.tube, f"{key}.tube", place) if form.tube else None,
        tag=form.tag,
    )


def _tube(form: TubeForm, key: str, place: Place) -> Tube:
    inner, outer = form.radius
    if inner >= outer:
        raise place.error(
            f"{key}.radius", f"found [{inner:g}, {outer:g}]; the inner radius comes first"
        )
    if form.from_ == form.to:
        raise place.error(f"{key}.to", "is the same point as from; the tube has no length")
    return Tube(form.from_, form.to, inner, outer)
