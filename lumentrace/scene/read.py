"""A scene file -> a checked Scene: every name resolved, every default filled, no mesh read."""

import os
from collections.abc import Iterator
from pathlib import Path

from lumentrace import units
from lumentrace.errors import Notice, nearest
from lumentrace.photometry import luminosity
from lumentrace.scene.detectors import CELLS_MAX, detector_of
from lumentrace.scene.files import Files, SceneFile, read_files
from lumentrace.scene.forms import Form
from lumentrace.scene.lights import source_of
from lumentrace.scene.measures import check_measure
from lumentrace.scene.model import (
    Detector,
    Limit,
    Medium,
    Part,
    Scene,
    Source,
    Study,
    TraceSettings,
    Until,
)
from lumentrace.scene.names import NameBook
from lumentrace.scene.parts import part_of
from lumentrace.scene.place import Place, fault
from lumentrace.scene.stuff import finishes_of, media_of

SOURCES_MAX = 1024  # a block of 1024 rays gives each source at least one
RAYS = 2**20  # where the file does not say
RAYS_MAX = 100_000_000


def read_scene(path: str | os.PathLike) -> Scene:
    """The study that a scene file and the files it includes describe.

    The study's own file comes first, then the included ones, in what "first in the file" decides.
    Raises UserError with one line that names file, line and key.
    """
    files = read_files(Path(path))
    media, media_notices = media_of(files)
    finishes, finish_notices = finishes_of(files)
    study = _study(files, media)
    names = NameBook()
    parts = tuple(
        part_of(
            form,
            place,
            tuple(file.place("part", number, "tag", tag) for tag in range(len(form.tag))),
            media,
            finishes,
            file.form.study.length or files.length,
            files.length,
        )
        for file, number, form, place in _tables(files, "part", names)
    )
    sources = _sources(files, names, {part.name: part for part in parts})
    detectors = _detectors(files, names)
    _take_groups(sources, names)
    trace, trace_notices = _trace(files, parts, detectors)
    return Scene(
        path=files.study.path,
        digest=files.digest,
        study=study,
        media=media,
        finishes=finishes,
        parts=parts,
        sources=sources,
        detectors=detectors,
        trace=trace,
        limits=_limits(files, parts, detectors),
        notices=(
            *files.notices,
            *media_notices,
            *finish_notices,
            *trace_notices,
            *_dark_detectors(sources, detectors),
        ),
    )


def _tables(
    files: Files, kind: str, names: NameBook
) -> Iterator[tuple[SceneFile, int, Form, Place]]:
    """All tables of a kind, in the order of the files; each takes its name."""
    for file in files.all:
        for number, form in enumerate(getattr(file.form, kind)):
            place = file.place(kind, number)
            names.take(kind, form.name, place)
            yield file, number, form, place


def _study(files: Files, media: dict[str, Medium]) -> Study:
    form, place = files.form.study, files.study.place("study")
    if form.surroundings not in media:
        known = nearest(form.surroundings, media)
        raise place.error("surroundings", f'no medium is named "{form.surroundings}"; {known}')
    return Study(
        title=form.title,
        length=form.length,
        metre=units.metre(form.length),
        seed=form.seed,
        surroundings=form.surroundings,
        touch=form.touch,
        place=place,
    )


def _sources(files: Files, names: NameBook, parts: dict[str, Part]) -> tuple[Source, ...]:
    sources = tuple(
        source_of(form, place, parts, files.scale(file))
        for file, _, form, place in _tables(files, "source", names)
    )
    used = [source for source in sources if source.use]
    if not used:
        raise fault(
            files.study.shown, None, "source", "no source is in use; a study needs a [[source]]"
        )
    if len(used) > SOURCES_MAX:
        found = units.grouped(len(used))
        raise used[SOURCES_MAX].place.error("", f"found {found} sources; at most {SOURCES_MAX}")
    return sources


def _take_groups(sources: tuple[Source, ...], names: NameBook) -> None:
    """Enter the names of groups; one source alone may be called like its group."""
    groups: dict[str, Source] = {}
    for source in sources:
        if source.group != source.name and source.group not in groups:
            groups[source.group] = source
    for group, source in groups.items():
        names.take("group", group, source.place, "group")


def _detectors(files: Files, names: NameBook) -> tuple[Detector, ...]:
    detectors: list[Detector] = []
    cells = 0
    for file, _, form, place in _tables(files, "detector", names):
        detectors.append(detector_of(form, place, files.scale(file)))
        cells += form.plane.cells[0] * form.plane.cells[1]
        if cells > CELLS_MAX:
            found, most = units.grouped(cells), units.grouped(CELLS_MAX)
            raise place.error("plane.cells", f"makes {found} cells in all; at most {most}")
    return tuple(detectors)


def _trace(
    files: Files, parts: tuple[Part, ...], detectors: tuple[Detector, ...]
) -> tuple[TraceSettings, list[Notice]]:
    form, place, notices = files.form.trace, files.study.place("trace"), []
    until = None
    if form.until:
        check_measure(form.until.measure, "until.measure", place, parts, detectors)
        until = Until(form.until.measure, form.until.relative_error)
    elif form.rays_max is not None:
        text = f"{place.at('rays_max')}: trace.rays_max: without until it has no effect"
        notices.append(Notice("doubtful", text))
    settings = TraceSettings(
        rays=form.rays or RAYS,
        until=until,
        rays_max=form.rays_max or form.rays or RAYS_MAX,
        events_max=form.events_max,
        map_memory=form.map_memory,
        place=place,
    )
    return settings, notices


def _limits(
    files: Files, parts: tuple[Part, ...], detectors: tuple[Detector, ...]
) -> tuple[Limit, ...]:
    limits = []
    for number, form in enumerate(files.form.limit):
        place = files.study.place("limit", number)
        check_measure(form.measure, "measure", place, parts, detectors)
        if form.at_least is None and form.at_most is None:
            raise place.error("", "has no bound; at_least or at_most is needed")
        if None not in (form.at_least, form.at_most) and form.at_least > form.at_most:
            found = f"found {form.at_least:g}, above at_most = {form.at_most:g}"
            raise place.error("at_least", f"{found}; no value lies between")
        limits.append(Limit(form.measure, form.at_least, form.at_most, form.note, place))
    return tuple(limits)


def _dark_detectors(
    sources: tuple[Source, ...], detectors: tuple[Detector, ...]
) -> Iterator[Notice]:
    """Detectors of visible light in a study that has none."""
    if any(source.use and luminosity(source.wavelength) > 0 for source in sources):
        return
    for detector in detectors:
        if detector.use and detector.counts == "illuminance":
            where = f"{detector.place.at('counts')}: {detector.place.name}.counts"
            yield Notice("doubtful", f"{where}: no source gives visible light; every value is 0 lx")
