"""A world without meshes and the sums of a toy trace through it, for tests of run and analysis.

Each ray takes one of a few fixed ways at random, so that all true values are known in closed form,
and every sum is added up here in the plainest way.
"""

from pathlib import Path
from types import SimpleNamespace

import numpy as np

from lumentrace.engine.sums import (
    KEPT_RAYS,
    LOST,
    REPEATS_MAX,
    STEPS_MAX,
    PathSums,
    Sums,
    account_rows,
    step_code,
    what_if_keys,
)
from lumentrace.models.events import BULK, EVENTS, SCATTER, THROUGH
from lumentrace.photometry import luminosity, luminosity_table
from lumentrace.run.make import make_run
from lumentrace.scene.model import Limit, Scene, Study, TraceSettings
from lumentrace.world.arrays import (
    BATCHES,
    BLOCK_RAYS,
    Bodies,
    Detectors,
    Media,
    Settings,
    Sources,
    WorldArrays,
)
from lumentrace.world.world import PartFacts, World

GREEN, BLUE = 555.0, 450.0  # nm
FLUX = np.array([2.0, 1.0])  # W
TAGS = ("wall:default", "cover:inner", "cover:outer")
WALL, INNER, OUTER = range(3)
PARTS = ("wall", "cover")
DESK, RX = range(2)
ROWS = account_rows(len(TAGS), len(PARTS))

# Ways of a ray: chance, and what happens; w is its weight.
DIRECT, ONCE, COVER, OFTEN, LOST_WAY, UNKEPT, ROULETTE, AWAY = range(8)
CHANCE = np.array([0.35, 0.15, 0.10, 0.05, 0.01, 0.01, 0.03, 0.30])
CELL_CHANCE = np.array([1, 9, 9, 9, 9, 9, 9, 9, 9, 9, 9, 9]) / 100.0  # desk: 4 across, 3 up
CELL_AREA = 0.2 * 0.2  # m2 of the desk
RX_AREA = 0.01 * 0.01


def world(photometric=(True, False), lengths=("mm", 0.001)) -> World:
    """Two sources in groups of their own, a desk that lets light pass, an rx that catches."""
    unit, metre = lengths
    study = Study(
        title="Toy", length=unit, metre=metre, seed=7, surroundings="air", touch=None, place=None
    )
    trace = TraceSettings(
        rays=65536, until=None, rays_max=65536, events_max=1000, map_memory=2**31, place=None
    )
    scene = Scene(
        path=Path("/somewhere/toy.toml"),
        digest="ab" * 32,
        study=study,
        media={},
        finishes={},
        parts=(),
        sources=(),
        detectors=(),
        trace=trace,
        limits=(Limit("desk.mean", 500.0, None, "task", None),),
        notices=(),
    )
    axes = np.array([[0.0, 0, -800], [0, 0, 1], [1, 0, 0], [0, 1, 0]])
    nothing = SimpleNamespace()
    sources = Sources(
        start=np.zeros(2, np.int32),
        place=np.stack([axes, axes]),
        size=np.zeros((2, 2)),
        pattern=np.zeros(2, np.int32),
        pattern_values=np.zeros((2, 2)),
        wavelength=np.array([GREEN, BLUE]),
        ray_flux=FLUX / (BLOCK_RAYS // 2),
        ray_first=np.array([0, BLOCK_RAYS // 2, BLOCK_RAYS], np.int32),
        group=np.array([0, 1], np.int32),
        key=np.zeros(2, np.uint64),
        immersed=np.zeros(2, bool),
        face_first=np.zeros(3, np.int32),
        face=np.zeros(0, np.int32),
        face_area=np.zeros(0),
    )
    detectors = Detectors(
        model=np.zeros(2, np.int32),
        place=np.stack([axes, axes]),
        size=np.array([[0.4, 0.3], [0.005, 0.005]]) / metre,
        cells=np.array([[4, 3], [1, 1]], np.int32),
        cell_first=np.array([0, 12, 13], np.int32),
        catches=np.array([False, True]),
        two_sided=np.array([True, False]),
        photometric=np.array(photometric),
        error=np.zeros(2),
    )
    bodies = Bodies(
        part=np.array([0, 1], np.int32),
        kind=np.array([0, 2], np.int32),
        rank=np.array([0, 1], np.int32),
        medium=np.array([-1, 2], np.int32),
    )
    arrays = WorldArrays(
        mesh=nothing,
        tree=nothing,
        bodies=bodies,
        tags=nothing,
        finishes=nothing,
        media=Media(np.zeros(3, np.int32), np.array([[1.0, 0, 0, 0]] * 2 + [[1.5, 0.1, 0, 0]])),
        sources=sources,
        detectors=detectors,
        settings=Settings(seed=7, events_max=1000, groups=2),
        luminosity=luminosity_table(),
    )
    facts = [
        PartFacts(p, 1, np.ones(3), 12, "opaque", True, 1.0, 1.0, digest)
        for p, digest in zip(PARTS, ("11", "22"), strict=True)
    ]
    return World(
        scene=scene,
        tables=arrays,
        part_names=PARTS,
        tag_names=TAGS,
        body_names=PARTS,
        source_names=("lamp", "spot"),
        group_names=("lamp", "spot"),
        detector_names=("desk", "rx"),
        source_flux=FLUX,
        source_start=("air", "air"),
        parts=tuple(facts),
        tags=(),
        contacts=(),
        notices=(),
    )


class _Toy:
    """Sums being added up, ray by ray in order."""

    def __init__(self, of: World, rounds: int, seed: int, chance: np.ndarray):
        self.rounds = rounds
        self.rng = np.random.default_rng(seed)
        self.n = BATCHES * BLOCK_RAYS * rounds
        self.ray = np.arange(self.n)
        self.block = self.ray // BLOCK_RAYS
        self.batch = self.block % BATCHES
        self.source = (self.ray % BLOCK_RAYS) // (BLOCK_RAYS // 2)
        self.weight = of.tables.sources.ray_flux[self.source]
        self.way = self.rng.choice(len(CHANCE), size=self.n, p=chance)
        efficacy = [683.0 * luminosity(w) for w in of.tables.sources.wavelength]
        seen = of.tables.detectors.photometric[:, None]
        self.response = np.where(seen, efficacy, 1.0)  # (detector, source)
        self.account = np.zeros((self.n, ROWS.count))
        self.arrivals = []  # (rays, detector, cell, amount)
        self.paths = []  # (rays, amount, detector, steps, run lengths)
        self.what_if = np.zeros(
            (2, 2, BATCHES, what_if_keys(len(TAGS), len(PARTS)), REPEATS_MAX + 2)
        )

    def absorb(self, rays, tag, share):
        part = PARTS.index(TAGS[tag].partition(":")[0])
        self.account[rays, tag] += self.weight[rays] * share
        self.account[rays, ROWS.part + part] += self.weight[rays] * share

    def absorb_bulk(self, rays, part, share):
        self.account[rays, ROWS.bulk + part] += self.weight[rays] * share
        self.account[rays, ROWS.part + part] += self.weight[rays] * share

    def end(self, rays, row, share):
        self.account[rays, row] += self.weight[rays] * share

    def arrive(self, rays, detector, share, steps, runs=None):
        """steps None: the path is not kept. runs: true length of the runs of the only step."""
        amount = self.weight[rays] * share * self.response[detector, self.source[rays]]
        if detector == DESK:
            cell = self.rng.choice(len(CELL_CHANCE), size=len(rays), p=CELL_CHANCE)
        else:
            cell = np.full(len(rays), len(CELL_CHANCE))
        self.arrivals.append((rays, detector, cell, amount))
        self.paths.append((rays, amount, detector, steps, runs))


def sums(of: World, rounds=1, seed=1, keep_batches=True, chance=CHANCE) -> Sums:
    """The sums of a toy trace of so many rounds."""
    toy = _Toy(of, rounds, seed, np.asarray(chance))
    _follow(toy)
    return _add_up(toy, keep_batches)


def run(rounds=1, seed=1, keep_batches=True, chance=CHANCE, **world_options):
    """The run of a toy trace."""
    of = world(**world_options)
    return make_run(of, sums(of, rounds, seed, keep_batches, chance))


def only(*ways: int) -> np.ndarray:
    """Chances of rays that take only these ways, in their proportions."""
    chance = np.where(np.isin(np.arange(len(CHANCE)), ways), CHANCE, 0.0)
    return chance / chance.sum()


def _follow(toy: _Toy) -> None:
    def taking(way):
        return toy.ray[toy.way == way]

    rays = taking(DIRECT)
    toy.arrive(rays, DESK, 1.0, ())
    toy.absorb(rays, WALL, 1.0)

    rays = taking(ONCE)
    toy.absorb(rays, WALL, 0.5)
    toy.arrive(rays, DESK, 0.5, ((WALL, SCATTER, 1),))
    toy.end(rays, ROWS.escaped, 0.5)

    rays = taking(COVER)
    toy.absorb_bulk(rays, 1, 0.1)
    toy.arrive(rays, RX, 0.9, ((INNER, THROUGH, 1), (OUTER, THROUGH, 1)))
    toy.end(rays, ROWS.detected, 0.9)

    rays = taking(OFTEN)
    times = 2 + toy.rng.integers(0, 3, len(rays))
    for run_code, some in ((2, times == 2), (3, times > 2)):
        toy.arrive(rays[some], DESK, 0.5 ** times[some], ((WALL, SCATTER, run_code),), times[some])
    toy.absorb(rays, WALL, 1.0 - 0.5**times)
    toy.end(rays, ROWS.escaped, 0.5**times)

    toy.end(taking(LOST_WAY), ROWS.cut_off, 1.0)

    rays = taking(UNKEPT)
    toy.arrive(rays, DESK, 1.0, None)
    toy.end(rays, ROWS.escaped, 1.0)

    rays = taking(ROULETTE)
    survive = toy.rng.random(len(rays)) < 0.5
    toy.absorb(rays, WALL, 0.5)
    toy.end(rays, ROWS.sampling, np.where(survive, -0.5, 0.5))
    toy.end(rays[survive], ROWS.escaped, 1.0)

    toy.end(taking(AWAY), ROWS.escaped, 1.0)


def _add_up(toy: _Toy, keep_batches: bool) -> Sums:
    group = toy.source  # each source is its own group
    account, square = np.zeros((2, ROWS.count, BATCHES)), np.zeros((2, ROWS.count))
    for row in range(ROWS.count):
        np.add.at(account[:, row], (group, toy.batch), toy.account[:, row])
        np.add.at(square[:, row], group, toy.account[:, row] ** 2)
    flux, flux_square = np.zeros((2, 2, BATCHES)), np.zeros((2, 2))
    flux_count, cells = np.zeros((2, 2), np.int64), len(CELL_CHANCE) + 1
    cell_batch, cell_square = np.zeros((2, cells, BATCHES)), np.zeros((2, cells))
    by_block = np.zeros((2, cells, BATCHES * toy.rounds))
    for rays, d, cell, amount in toy.arrivals:  # no toy ray arrives twice
        np.add.at(flux[d], (group[rays], toy.batch[rays]), amount)
        np.add.at(flux_square[d], group[rays], amount**2)
        np.add.at(flux_count[d], group[rays], 1)
        np.add.at(cell_batch, (group[rays], cell, toy.batch[rays]), amount)
        np.add.at(cell_square, (group[rays], cell), amount**2)
        np.add.at(by_block, (group[rays], cell, toy.block[rays]), amount)
    half = np.stack([cell_batch[..., 0::2].sum(axis=-1), cell_batch[..., 1::2].sum(axis=-1)])
    n_lost = int((toy.way == LOST_WAY).sum())
    lost = np.zeros(min(5, n_lost), LOST)
    lost["ray"] = toy.ray[toy.way == LOST_WAY][:5]
    lost["weight"] = toy.weight[lost["ray"]]
    lost["tag"] = -1
    return Sums(
        rounds=toy.rounds,
        emitted=FLUX.copy(),
        account=account,
        account_square=square,
        flux=flux,
        flux_square=flux_square,
        flux_count=flux_count,
        flux_most=np.minimum(flux_count.sum(axis=1), 1),
        cell_most=np.minimum(flux_count.sum(axis=1), 1),
        cell_batch=cell_batch if keep_batches else None,
        cell_half=half,
        cell_block_square=None
        if keep_batches
        else np.stack([(by_block[..., half::2] ** 2).sum(axis=-1) for half in (0, 1)]),
        cell_square=cell_square,
        paths=_paths(toy),
        what_if=toy.what_if,
        lost=lost,
        lost_count=n_lost,
    )


def _paths(toy: _Toy) -> PathSums:
    rows, other, other_count = [], np.zeros((2, 2, BATCHES)), np.zeros((2, 2), np.int64)
    for rays, amount, d, steps, runs in toy.paths:
        for s in range(2):
            own = toy.source[rays] == s
            some, w = rays[own], amount[own]
            if steps is None:
                np.add.at(other[d, s], toy.batch[some], w)
                other_count[d, s] += len(some)
            elif len(some):
                length = np.ones(len(some)) if runs is None else runs[own]
                rows.append(_row(toy, some, w, d, s, steps, length))
                _add_what_if(toy, rows[-1], some, w, steps, length)
    rows.sort(key=lambda row: row["ray"][0])  # in the order in which they were met
    empty = _row(toy, np.zeros(0, int), np.zeros(0), 0, 0, (), np.zeros(0))
    columns = {}
    for name, cell in empty.items():
        column = np.array([row[name] for row in rows], dtype=np.asarray(cell).dtype)
        columns[name] = column.reshape(len(rows), *np.shape(cell))
    return PathSums(**columns, other=other, other_count=other_count)


def _row(toy, rays, w, d, s, steps, length):
    step, run_sum = np.zeros(STEPS_MAX, np.int64), np.zeros(STEPS_MAX)
    for k, (tag, event, code) in enumerate(steps):
        step[k], run_sum[k] = step_code(tag, event, code), (w * length).sum()
    scatters = length * sum(event == SCATTER for _, event, _ in steps)
    kept = np.full(KEPT_RAYS, -1)
    kept[: len(rays[:KEPT_RAYS])] = rays[:KEPT_RAYS]
    return {
        "detector": np.int32(d),
        "source": np.int32(s),
        "hash": np.uint64(17 * len(steps) + d),
        "n_steps": np.int32(len(steps)),
        "step": step,
        "run_sum": run_sum,
        "batch": np.bincount(toy.batch[rays], w, BATCHES).astype(float),
        "square": (w**2).sum(),
        "count": np.int64(len(rays)),
        "optical": (w * 800.0).sum(),
        "group": (w * 900.0).sum(),
        "reflections": 0.0,
        "scatters": (w * scatters).sum(),
        "ray": kept,
    }


def _add_what_if(toy, row, rays, w, steps, length):
    for tag, event, _ in steps:
        times = length.astype(int) - 1
        target = toy.what_if[row["detector"], row["source"]]
        np.add.at(target, (toy.batch[rays], tag * len(EVENTS) + event, times), w)
        if event not in (THROUGH, BULK):
            np.add.at(target, (toy.batch[rays], len(TAGS) * len(EVENTS) + tag, times), w)
            part = len(TAGS) * (len(EVENTS) + 1) + PARTS.index(TAGS[tag].partition(":")[0])
            np.add.at(target, (toy.batch[rays], part, times), w)
