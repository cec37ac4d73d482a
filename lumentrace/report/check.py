"""What `check` says of a world: the parts, what touches, where light starts and is counted."""

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
from lumentrace.report.table import lay_out
from lumentrace.scene.model import Detector, Source
from lumentrace.units import plain
from lumentrace.world.arrays import BLOCK_RAYS
from lumentrace.world.world import World


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
        "scene": str(world.scene.path),
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
        "contacts": [
            {"parts": list(c.parts), "area": c.area, "gap": c.gap, "taken": c.taken}
            for c in world.contacts
        ],
        "sources": {
            s.name: {
                "flux": float(world.source_flux[i]),
                "wavelength": s.wavelength,
                "group": s.group,
                "ray_share": float(share[i]),
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
        "limits": [
            {"measure": m.measure, "at_least": m.at_least, "at_most": m.at_most, "note": m.note}
            for m in world.scene.limits
        ],
        "notices": notices_json(notices_of(world)),
    }


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
    return [*head(world.scene.path.name, study.title), f"{', '.join(counts)}. Unit {study.length}."]


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
                p.medium if p.closed else f"{p.medium}, open",
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
    rows = [["touching", f"area {unit}2", f"gap {unit}", "taken as"]]
    for c in world.contacts:
        rows.append([", ".join(c.parts), _short(c.area), f"{c.gap:.2g}", c.taken])
    return _table(rows, "<>><")


def _flux(watts: float, wavelength: float) -> str:
    lumens = EFFICACY * luminosity(wavelength) * watts
    return f"{plain(watts)} W" if lumens == 0 else f"{plain(lumens)} lm ({_short(watts)} W)"


def _pattern(source: Source) -> str:
    kind, value = source.pattern.kind, source.pattern.value
    if kind == "cosine_power":
        return f"cosine power {value:g}"
    return f"collimated within {value:g} deg" if kind == "collimated" else kind


def _sources(world: World) -> list[str]:
    rows = [["source", "flux", "nm", "pattern", "of rays", "starts in"]]
    shares = _ray_shares(world)
    for i, source in enumerate(used_sources(world)):
        rows.append(
            [
                source.name,
                _flux(float(world.source_flux[i]), source.wavelength),
                f"{source.wavelength:g}",
                _pattern(source),
                f"{100 * shares[i]:.3g} %",
                world.source_start[i],
            ]
        )
    return _table(rows, "<<><><", elastic=5)


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
    detectors = {d.name: d for d in _used_detectors(world)}
    rows = [["limit", "", "note"]]
    for m in world.scene.limits:
        rows.append(
            [m.measure, limit_text(m.at_least, m.at_most, _unit(m.measure, detectors)), m.note]
        )
    return _table(rows, "<<<", elastic=2)


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
