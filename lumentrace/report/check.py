"""What `check` says of a world: the parts, what touches, where light starts and is counted."""

from itertools import zip_longest

import numpy as np

from lumentrace.photometry import EFFICACY, luminosity
from lumentrace.report.lines import (
    head,
    limit_text,
    notice_lines,
    notices_json,
    notices_of,
    plural,
)
from lumentrace.report.table import GAP, WIDTH, lay_out, wrap
from lumentrace.scene.model import SHEET, Detector, Faces, Limit, Source, TraceSettings, Until
from lumentrace.units import grouped, plain
from lumentrace.world.arrays import BLOCK_RAYS
from lumentrace.world.sources import source_key
from lumentrace.world.world import World

_TAKEN_WIDTH = 34  # of what a contact is taken as; longer texts take further lines
_NAME_WIDTH = 24  # of the names of sources


def check_text(world: World) -> str:
    """The whole answer of `check`, at most 80 columns wide."""
    blocks = (
        _head(world),
        _parts(world),
        _tags(world),
        _contacts(world),
        _sources(world),
        _detectors(world),
        _limits(world),
        _end(world),
    )
    return "\n\n".join("\n".join(block) for block in blocks if block) + "\n"


def check_json(world: World) -> dict:
    """The same facts as one object: lengths and areas in the study's unit, flux in W."""
    study = world.scene.study
    share = _ray_shares(world)
    return {
        "scene": world.scene.path.name,
        "digest": world.scene.digest,
        "title": study.title,
        "length": study.length,
        "parts": {
            p.name: {
                "copies": p.copies,
                "size": [float(x) for x in p.size],
                "faces": p.faces,
                "medium": p.medium,
                "closed": p.closed,
                "area": p.area,
                "volume": p.volume,
                "mesh_digest": p.mesh_digest,
            }
            for p in world.parts
        },
        "tags": {
            t.name: {"faces": t.faces, "area": t.area, "share": t.share, "finish": t.finish}
            for t in world.tags
        },
        "touch": list(world.touch),
        "contacts": [
            {"parts": list(c.parts), "area": c.area, "gap": c.gap, "taken": c.taken}
            for c in world.contacts
        ],
        "sources": {
            s.name: {
                "flux": float(world.source_flux[i]),
                "wavelength": s.wavelength,
                "group": s.group,
                "share": s.share,
                "ray_share": float(share[i]),
                "pattern": {"kind": s.pattern.kind, "value": s.pattern.value},
                "faces": _faces_json(s),
                "start": world.source_start[i],
            }
            for i, s in enumerate(used_sources(world))
        },
        "detectors": {
            d.name: {
                "size": list(d.size),
                "cells": list(d.cells),
                "counts": d.counts,
                "side": d.side,
                "catch": d.catch,
            }
            for d in _used_detectors(world)
        },
        "trace": {
            "rays": world.scene.trace.rays,
            "until": _until_json(world.scene.trace.until),
            "rays_max": world.scene.trace.rays_max,
        },
        "limits": [
            {"measure": m.measure, "at_least": m.at_least, "at_most": m.at_most, "note": m.note}
            for m in world.scene.limits
        ],
        "notices": notices_json(notices_of(world)),
    }


def _faces_json(source: Source) -> dict | None:
    shape = source.shape
    return {"part": shape.part, "tag": shape.tag} if isinstance(shape, Faces) else None


def _until_json(until: Until | None) -> dict | None:
    if until is None:
        return None
    return {"measure": until.measure, "relative_error": until.relative_error}


def used_sources(world: World) -> list[Source]:
    """The sources that shine, row for row with the world's."""
    by_name = {s.name: s for s in world.scene.sources}
    return [by_name[name] for name in world.source_names]


def _used_detectors(world: World) -> list[Detector]:
    by_name = {d.name: d for d in world.scene.detectors}
    return [by_name[name] for name in world.detector_names]


def _ray_shares(world: World) -> np.ndarray:
    """Share of all rays that each source gets, (S,)."""
    return np.diff(world.tables.sources.ray_first) / BLOCK_RAYS


def _head(world: World) -> list[str]:
    study = world.scene.study
    copies = sum(p.copies for p in world.parts)
    parts = plural(len(world.parts), "part")
    places = f" in {copies} places" if copies != len(world.parts) else ""
    counts = [
        parts + places,
        plural(len(world.source_names), "source"),
        plural(len(world.detector_names), "detector"),
        plural(len(world.scene.limits), "limit"),
    ]
    return [
        *head(world.scene.path.name, study.title),
        f"{', '.join(counts)}. Unit {study.length}.",
        *wrap(f"Planned: {_planned(world.scene.trace)}."),
    ]


def _planned(trace: TraceSettings) -> str:
    """Where a trace ends."""
    if trace.until is None:
        return f"{grouped(trace.rays)} rays"
    goal = f"{100 * trace.until.relative_error:g} %"
    most = grouped(trace.rays_max)
    return f"until {trace.until.measure} is known within {goal}, at most {most} rays"


def _short(value: float) -> str:
    """To four digits."""
    return plain(float(f"{value:.4g}"))


def _size(size, factor: float = 1.0) -> str:
    return " x ".join(_short(factor * float(x)) for x in size)


def _table(rows: list[list[str]], align: str, elastic: int = 0) -> list[str]:
    """A table with its header, or nothing where there is only the header."""
    return lay_out(rows, align, elastic) if len(rows) > 1 else []


def _parts(world: World) -> list[str]:
    study = world.scene.study
    rows = [["part", f"size in {study.length}", "size in m", "faces", "medium"]]
    for p in world.parts:
        rows.append(
            [
                f"{p.name} ({p.copies})" if p.copies > 1 else p.name,
                _size(p.size),
                _size(p.size, study.metre),
                str(p.faces),
                p.medium if p.closed or p.medium == SHEET else f"{p.medium}, open",
            ]
        )
    if study.length == "m":
        rows = [[*row[:2], *row[3:]] for row in rows]
        return _table(rows, "<<><")
    return _table(rows, "<<<><")


def _tags(world: World) -> list[str]:
    rows = [["tag", "faces", f"area {world.scene.study.length}2", "of its part", "finish"]]
    for t in world.tags:
        rows.append([t.name, str(t.faces), _short(t.area), f"{100 * t.share:.3g} %", t.finish])
    return _table(rows, "<>>><")


def _contacts(world: World) -> list[str]:
    unit = world.scene.study.length
    rows = [[f"touching ({_within(world)})", f"area {unit}2", f"gap {unit}", "taken as"]]
    for c in world.contacts:
        area = "-" if c.area is None else _short(c.area)
        gap = "-" if c.gap is None else f"{c.gap:.2g}"
        taken, *more = wrap(c.taken, _TAKEN_WIDTH)
        rows.append([", ".join(c.parts), area, gap, taken])
        rows.extend(["", "", "", text] for text in more)
    return _table(rows, "<>><")


def _within(world: World) -> str:
    """The tolerance of touching; without one of the study each file has its own."""
    low, high = (f"{x:.2g}" for x in world.touch)
    unit = world.scene.study.length
    return f"within {high} {unit}" if low == high else f"within {low} to {high} {unit}"


def _flux(watts: float, wavelength: float) -> str:
    lumens = EFFICACY * luminosity(wavelength) * watts
    return f"{plain(watts)} W" if lumens == 0 else f"{plain(lumens)} lm ({_short(watts)} W)"


def _shines_from(source: Source, watts: float, copies: dict[str, int]) -> str:
    """``die:top, 24 x 90 lm = 2160 lm (3.163 W)``, ``disc, 100 lm (0.1464 W)``."""
    shape, flux = source.shape, _flux(watts, source.wavelength)
    if not isinstance(shape, Faces):
        return f"{source_key(source)}, {flux}"
    place = shape.part if shape.tag is None else f"{shape.part}:{shape.tag}"
    n = copies[shape.part]
    each = _flux(watts / n, source.wavelength).partition(" (")[0]
    return f"{place}, {n} x {each} = {flux}" if n > 1 else f"{place}, {flux}"


def _pattern(source: Source) -> str:
    kind, value = source.pattern.kind, source.pattern.value
    if kind == "cosine_power":
        return f"cosine power {value:g}"
    return f"collimated within {value:g} deg" if kind == "collimated" else kind


def _sources(world: World) -> list[str]:
    rows = [["source", ""]]
    copies = {p.name: p.copies for p in world.parts}
    shares = _ray_shares(world)
    for i, source in enumerate(used_sources(world)):
        facts = [
            f"{_shines_from(source, float(world.source_flux[i]), copies)} at "
            f"{source.wavelength:g} nm",
            _pattern(source),
            *([f"group {source.group}"] if source.group != source.name else []),
            f"{100 * shares[i]:.3g} % of the rays",
            f"starts in {world.source_start[i]}",
        ]
        rows.append([source.name, ", ".join(facts)])
    width = min(max(len(row[0]) for row in rows), _NAME_WIDTH)
    lines = [rows[0][0]]
    for name, facts in rows[1:]:
        names, texts = wrap(name, width), wrap(facts, WIDTH - GAP - width, "")
        both = zip_longest(names, texts, fillvalue="")
        lines.extend(f"{left:{width}}{' ' * GAP}{right}".rstrip() for left, right in both)
    return lines if len(lines) > 1 else []


def _detectors(world: World) -> list[str]:
    unit = world.scene.study.length
    rows = [["detector", "cells", f"of {unit}", "counts", "light"]]
    for d in _used_detectors(world):
        cell = _size((d.size[0] / d.cells[0], d.size[1] / d.cells[1]))
        sides = "from both sides" if d.side == "both" else "from the front"
        what = "caught" if d.catch else "passes"
        rows.append(
            [
                d.name,
                f"{d.cells[0]} x {d.cells[1]}",
                cell,
                f"{d.counts}, {_unit(f'{d.name}.mean', {d.name: d})}",
                f"{sides}, {what}",
            ]
        )
    return _table(rows, "<<<<<")


def _limits(world: World) -> list[str]:
    """Each bound on a line of its own, a note beside the first where there is room."""
    detectors = {d.name: d for d in _used_detectors(world)}
    bounds = [_bounds(m, _unit(m.measure, detectors)) for m in world.scene.limits]
    if not bounds:
        return []
    wide = max(len(text) for texts in bounds for text in texts)
    longest = max(len(m.measure) for m in world.scene.limits)
    measure_width = min(max(longest, len("limit")), WIDTH - GAP - wide)
    gap = " " * GAP
    room = WIDTH - measure_width - wide - 2 * GAP
    beside = any(0 < len(m.note) <= room for m in world.scene.limits)
    lines = [f"{'limit':{measure_width}}{gap}{'':{wide}}{gap}{'note' if beside else ''}".rstrip()]
    for limit, texts in zip(world.scene.limits, bounds, strict=True):
        both = zip_longest(wrap(limit.measure, measure_width), texts, fillvalue="")
        block = [f"{left:{measure_width}}{gap}{right:{wide}}" for left, right in both]
        if len(limit.note) <= room:
            block[0] += gap + limit.note
        else:
            block += wrap(f"  note: {limit.note}", indent="    ")
        lines += [line.rstrip() for line in block]
    return lines


def _bounds(limit: Limit, unit: str) -> list[str]:
    """``at least 500 lx`` and ``at most 800 lx``, each where it is given."""
    sides = ((limit.at_least, None), (None, limit.at_most))
    return [limit_text(*side, unit) for side in sides if side != (None, None)]


def _unit(measure: str, detectors: dict[str, Detector]) -> str:
    """Unit of a measure that has a limit."""
    subject, _, kind = measure.rpartition(".")
    if subject not in detectors:
        return "%"  # absorbed or escaped
    if kind.startswith("uniformity"):
        return ""
    seen = detectors[subject].counts == "illuminance"
    return ("lm" if seen else "W") if kind == "flux" else ("lx" if seen else "W/m2")


def _end(world: World) -> list[str]:
    notices = notices_of(world)
    doubtful = sum(n.kind == "doubtful" for n in notices)
    return [
        *notice_lines(notices),
        f"Nothing wrong, {doubtful} doubtful. Nothing was traced.",
    ]
