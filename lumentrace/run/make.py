"""Sums of a trace made into a run: divided by the blocks, labelled, with units and errors."""

import json
from collections.abc import Callable
from typing import NamedTuple

import numpy as np
import xarray

from lumentrace import __version__
from lumentrace.engine.sums import REASONS, Sums, account_rows, step_parts
from lumentrace.models.events import EVENTS
from lumentrace.photometry import EFFICACY, luminosity
from lumentrace.run.estimate import block_error, effective_number, grouped_error, standard_error
from lumentrace.run.run import Run
from lumentrace.run.variables import (
    DETECTOR,
    FATES,
    HALVES,
    LAYOUT,
    SURROUNDINGS,
    Variable,
    declared,
)
from lumentrace.world.arrays import BATCHES, ROUND_RAYS
from lumentrace.world.world import World


class Scale(NamedTuple):
    """What turns raw sums into estimates of the whole study."""

    rounds: int  # blocks of a batch
    blocks: int  # of the run

    def batch(self, sums: np.ndarray) -> np.ndarray:
        return sums / self.rounds

    def half(self, sums: np.ndarray) -> np.ndarray:
        return sums / (self.blocks // 2)

    def square(self, sums: np.ndarray) -> np.ndarray:
        return sums / float(self.blocks) ** 2


def make_run(world: World, sums: Sums) -> Run:
    """The run of a world from its sums; the same bits for the same sums, of which it keeps copies,
    so that the engine may go on adding to them."""
    scale = Scale(sums.rounds, BATCHES * sums.rounds)
    nodes = {"/": xarray.Dataset(attrs=_provenance(world, sums))}
    nodes["/sources"] = _node("sources", _sources(world), _units(world))
    for d, name in enumerate(world.detector_names):
        nodes[f"/detectors/{name}"] = _detector(world, sums, scale, d)
    nodes["/account"] = _node("account", _account(world, sums, scale), _units(world))
    nodes["/ledger"] = _node("ledger", _ledger(world, sums, scale), _ledger_units(world))
    nodes["/what_if"] = _node("what_if", _what_if(world, sums, scale), _ledger_units(world))
    nodes["/lost"] = _node("lost", _lost(world, sums), _units(world))
    return Run(xarray.DataTree.from_dict(nodes))


def _provenance(world: World, sums: Sums) -> dict:
    study, limits = world.scene.study, world.scene.limits
    return {
        "title": study.title,
        "lumentrace": __version__,
        "layout": LAYOUT,
        "scene": world.scene.path.name,
        "scene_digest": world.scene.digest,
        "mesh_digests": json.dumps({p.name: p.mesh_digest for p in world.parts}, sort_keys=True),
        "limits": json.dumps(
            [
                {"measure": m.measure, "at_least": m.at_least, "at_most": m.at_most, "note": m.note}
                for m in limits
            ]
        ),
        "seed": world.tables.settings.seed,
        "rays": ROUND_RAYS * sums.rounds,
        "rounds": sums.rounds,
        "events_max": world.tables.settings.events_max,
        "length": study.length,
        "metre": study.metre,
        "lost_count": sums.lost_count,
    }


def _units(world: World) -> dict[str, str]:
    return {"length": world.scene.study.length}


def _flux_units(world: World) -> list[str]:
    """Unit of the flux on each detector."""
    return ["lm" if p else "W" for p in world.tables.detectors.photometric]


def _ledger_units(world: World) -> dict[str, str]:
    """With the unit of flux where all detectors share one; else the rows name theirs."""
    units = set(_flux_units(world))
    return _units(world) | ({"flux": units.pop()} if len(units) == 1 else {})


def _node(
    node: str, values: dict[str, np.ndarray], units: dict[str, str], facts: dict | None = None
) -> xarray.Dataset:
    """The Dataset of a node: all that is declared for it and nothing else."""
    declarations = {v.name: v for v in declared(node)}
    arrays = {name: _labelled(declarations[name], value, units) for name, value in values.items()}
    labels = [name for name in arrays if declarations[name].dims == (name,)]
    return xarray.Dataset(arrays, attrs=facts or {}).set_coords(labels)


def _labelled(variable: Variable, value: np.ndarray, units: dict[str, str]) -> xarray.Variable:
    attributes = {"long_name": variable.meaning}
    try:
        unit = variable.unit.format(**units)
    except KeyError:  # {flux} where detectors count in different units: see flux_unit
        unit = ""
    if unit:
        attributes["units"] = unit
    dtype = str if variable.dtype == "str" else np.dtype(variable.dtype)
    return xarray.Variable(variable.dims, np.asarray(value, dtype=dtype), attributes)


def _sources(world: World) -> dict[str, np.ndarray]:
    sources = world.tables.sources
    return {
        "source": world.source_names,
        "group": world.group_names,
        "group_id": sources.group,
        "wavelength": sources.wavelength,
        "flux": world.source_flux,
        "ray_flux": sources.ray_flux,
        "efficacy": [EFFICACY * luminosity(w) for w in sources.wavelength],
    }


def _detector(world: World, sums: Sums, scale: Scale, d: int) -> xarray.Dataset:
    detectors = world.tables.detectors
    facts = _detector_facts(world, sums, d)
    n_across, n_up = detectors.cells[d]
    cells = slice(detectors.cell_first[d], detectors.cell_first[d + 1])

    def grid(array: np.ndarray, axis: int, scaled: Callable) -> np.ndarray:
        """The detector's part of an axis of cells, as two axes (up, across)."""
        own = array[(slice(None),) * axis + (cells,)]
        return scaled(own.reshape(*own.shape[:axis], n_up, n_across, *own.shape[axis + 1 :]))

    values = {
        "group": world.group_names,
        "half": HALVES,
        "across": _centres(n_across, detectors.size[d, 0]),
        "up": _centres(n_up, detectors.size[d, 1]),
        "flux": scale.batch(sums.flux[d]),
        "flux_square": scale.square(sums.flux_square[d]),
        "flux_count": sums.flux_count[d].copy(),
        "cell_half": grid(sums.cell_half, 2, scale.half),
        "cell_square": grid(sums.cell_square, 1, scale.square),
    }
    flux = values["cell_half"].sum(axis=1).mean(axis=0)
    square = values["cell_square"].sum(axis=0)
    if sums.cell_batch is not None:
        values["cell_batch"] = grid(sums.cell_batch, 1, scale.batch)
        rows = np.moveaxis(values["cell_batch"], 1, 0)  # one by one, which spares memory
        error = np.stack([standard_error(row.sum(axis=0)) for row in rows])
    else:
        values["cell_block_square"] = grid(sums.cell_block_square, 2, scale.half)
        mean, square_mean = (values[f"cell_{v}"].mean(axis=0) for v in ("half", "block_square"))
        error = grouped_error(block_error(mean, square_mean, scale.blocks))
    values["value"] = flux / facts["cell_area"]
    values["error"] = np.where(square > 0.0, error / facts["cell_area"], np.nan)
    values["effective"] = effective_number(flux, square)
    units = _units(world) | {"flux": facts["flux_unit"], "map": facts["map_unit"]}
    return _node(DETECTOR, values, units, facts)


def _detector_facts(world: World, sums: Sums, d: int) -> dict:
    detectors = world.tables.detectors
    photometric = bool(detectors.photometric[d])
    center, normal, across, up = detectors.place[d]
    size = 2.0 * detectors.size[d]
    area = float(size[0] * size[1]) * world.scene.study.metre**2
    return {
        "counts": "illuminance" if photometric else "irradiance",
        "side": "both" if detectors.two_sided[d] else "front",
        "catches": int(detectors.catches[d]),
        "center": center,
        "normal": normal,
        "across_direction": across,
        "up_direction": up,
        "size": size,
        "area": area,
        "cell_area": area / int(np.prod(detectors.cells[d])),
        "flux_unit": _flux_units(world)[d],
        "map_unit": "lx" if photometric else "W/m2",
        "arrivals_most": int(sums.flux_most[d]),
        "cell_arrivals_most": int(sums.cell_most[d]),
    }


def _centres(cells: int, half: float) -> np.ndarray:
    """Centres of equal cells on [-half, half]."""
    return half * (2 * np.arange(cells) + 1 - cells) / cells


def _account(world: World, sums: Sums, scale: Scale) -> dict[str, np.ndarray]:
    rows = account_rows(len(world.tag_names), len(world.part_names))
    names = ("absorbed", "bulk", "whole", "ended")
    starts = [rows.bulk, rows.part, rows.detected]
    batches = np.split(scale.batch(sums.account), starts, axis=1)
    squares = np.split(scale.square(sums.account_square), starts, axis=1)
    return {
        "group": world.group_names,
        "tag": world.tag_names,
        "part": world.part_names,
        "volume": (*world.part_names, SURROUNDINGS),
        "fate": FATES,
        "filled": _filled(world),
        "emitted": sums.emitted.copy(),
        **dict(zip(names, batches, strict=True)),
        **dict(zip((f"{n}_square" for n in names), squares, strict=True)),
    }


def _filled(world: World) -> np.ndarray:
    """Whether light is absorbed inside: by part, then around all of them. (P + 1,) bool"""
    bodies, media = world.tables.bodies, world.tables.media
    filled = np.zeros(len(world.part_names) + 1, dtype=bool)
    filled[bodies.part[bodies.medium >= 0]] = True
    filled[-1] = media.values[0, 1] > 0.0  # row 0 is what surrounds all parts
    return filled


def _ledger(world: World, sums: Sums, scale: Scale) -> dict[str, np.ndarray]:
    paths = sums.paths
    longest = int(paths.n_steps.max(initial=0))
    code = paths.step[:, :longest]
    beyond = np.arange(longest) >= paths.n_steps[:, None]
    tag, event, run = step_parts(code)
    total = paths.batch.sum(axis=-1)

    def mean(weighted: np.ndarray) -> np.ndarray:
        """Flux-weighted mean from a sum of w x; NaN where there is no flux."""
        by = total.reshape(-1, *(1,) * (weighted.ndim - 1))
        shape = weighted.shape
        return np.divide(weighted, by, out=np.full(shape, np.nan), where=by > 0.0)

    return {
        "detector": world.detector_names,
        "source": world.source_names,
        "group": world.group_names,
        "tag": world.tag_names,
        "event": EVENTS,
        "flux_unit": _flux_units(world),
        "detector_id": paths.detector.copy(),
        "source_id": paths.source.copy(),
        "hash": paths.hash.copy(),
        "n_steps": paths.n_steps.copy(),
        "step_tag_id": np.where(beyond, -1, tag),
        "step_event_id": np.where(beyond, -1, event),
        "step_run": np.where(beyond, 0, run),
        "run_mean": np.where(beyond, np.nan, mean(paths.run_sum[:, :longest])),
        "flux": scale.batch(paths.batch),
        "square": scale.square(paths.square),
        "count": paths.count.copy(),
        "optical_length": mean(paths.optical),
        "group_length": mean(paths.group),
        "reflections": mean(paths.reflections),
        "scatters": mean(paths.scatters),
        "ray": paths.ray.copy(),
        "other": scale.batch(paths.other),
        "other_count": paths.other_count.copy(),
    }


def _what_if(world: World, sums: Sums, scale: Scale) -> dict[str, np.ndarray]:
    n_tags, n_events = len(world.tag_names), len(EVENTS)
    estimate = scale.batch(sums.what_if)
    lobe, tag, part = np.split(estimate, [n_tags * n_events, n_tags * (n_events + 1)], axis=3)
    lobe = lobe.reshape(*lobe.shape[:3], n_tags, n_events, lobe.shape[-1])
    values = {
        "detector": world.detector_names,
        "group": world.group_names,
        "tag": world.tag_names,
        "part": world.part_names,
        "event": EVENTS,
        "passes": np.arange(1, estimate.shape[-1]),
    }
    for name, array in {"by_lobe": lobe, "by_tag": tag, "by_part": part}.items():
        values[name] = array[..., :-1]
        values[f"{name}_beyond"] = array[..., -1]
    return values


def _lost(world: World, sums: Sums) -> dict[str, np.ndarray]:
    lost = sums.lost
    return {
        "tag": world.tag_names,
        "reason": REASONS,
        "ray": lost["ray"].copy(),
        "reason_id": lost["reason"].copy(),
        "weight": lost["weight"].copy(),
        "x": lost["x"].copy(),
        "y": lost["y"].copy(),
        "z": lost["z"].copy(),
        "tag_id": lost["tag"].copy(),
    }
