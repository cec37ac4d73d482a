"""Reported errors and bounds against what many seeds of real traced scenes come out as.

Two small scenes, whose every number has a closed form or is known by quadrature, are traced with
many seeds, 65,536 rays each. The spread of a number over the seeds must be the error that the runs
report of it, its mean over the seeds the truth, and a bound may miss the truth at most as often as
it says. 400 seeds know a standard deviation to 3.5 %, so that 0.85 to 1.15 is four standard errors
wide; the short set asks the same of 64 seeds, with limits as many standard errors wide.

Each scene has two grids of cells, "thousand" and "hundred", whose darkest cell gets about that many
effective contributions, and is traced once with the batches of all cells kept and once with too
little memory for them, when errors of cells come from sums of squares.
"""

from collections import defaultdict
from collections.abc import Callable
from dataclasses import dataclass, field
from math import exp, pi, sqrt
from typing import NamedTuple

import numpy as np
import pytest
from scipy.stats import binom

from lumentrace import study
from lumentrace.analysis.bounds import bounds
from tests.reference.closed_forms import cell_means, element_to_disc
from tests.worlds import ROUND, Study, box, rectangle, z_limit

UP, DOWN = (0.0, 0.0, 1.0), (0.0, 0.0, -1.0)
ACROSS, ALONG = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0)
ALPHA = 0.05
CHANCE = 1e-4  # of the binomial number of misses to pass its limit at a true rate of ALPHA
BOUNDED = ("min", "max", "uniformity")
GRIDS = {"thousand": 1000, "hundred": 100}


@dataclass(frozen=True)
class Truth:
    cells: dict[str, np.ndarray]  # W/m2 by detector, rows along `up`
    flux: dict[str, float]  # W by detector
    paths: dict[str, float]  # W by path as text
    shares: dict[str, float]  # % by measure of what was absorbed

    def of(self, detector: str, kind: str) -> float:
        cells = self.cells[detector]
        ratio = min(1.0, cells.min() / cells.mean())  # the mean of equal cells is rounded
        return float({"min": cells.min(), "max": cells.max(), "uniformity": ratio}[kind])


# An even field: two parallel beams of unequal weights through one tinted plate.

SIDE, INDEX, TINT, THICK = 10.0, 1.5, 0.2, 1.0  # mm
BEAMS = {"key": 1.0, "fill": 0.25}  # W
EVEN_GRIDS = {"thousand": (7, 6), "hundred": (21, 21)}


def even(scene: Study) -> None:
    scene.medium("tinted", INDEX, TINT)
    scene.part("plate", box((-6, -6, 4), (6, 6, 4 + THICK)), medium="tinted")
    beam = {"center": (0, 0, 8), "normal": DOWN, "across": ACROSS, "size": (SIDE, SIDE)}
    for name, watts in BEAMS.items():
        flux = {"watts": watts}
        scene.source(name, rectangle=beam, pattern={"collimated": 0}, flux=flux)
    for name, cells in EVEN_GRIDS.items():
        scene.detector(name, (0, 0, 0), UP, (SIDE, SIDE), cells)


def even_truth() -> Truth:
    """A plate with all its reflections, R by Fresnel at normal incidence and the inner
    transmittance t: (1 - R)^2 t (R t)^(2 k) after k round trips (common practice, no source)."""
    r, t = ((INDEX - 1) / (INDEX + 1)) ** 2, exp(-TINT * THICK)
    straight = (1 - r) ** 2 * t
    passed = straight / (1 - (r * t) ** 2)
    returned = r + r * t * passed
    flux = sum(BEAMS.values()) * passed
    through, reflect = "plate:default through", "plate:default reflect"
    paths = {}
    for name in EVEN_GRIDS:
        paths[f"key, {through}, {through}, {name}"] = BEAMS["key"] * straight
        ghost = f"fill, {through}, {reflect}, {reflect}, {through}, {name}"
        paths[ghost] = BEAMS["fill"] * straight * (r * t) ** 2
    return Truth(
        cells={n: np.full(c[0] * c[1], flux / (SIDE / 1e3) ** 2) for n, c in EVEN_GRIDS.items()},
        flux=dict.fromkeys(EVEN_GRIDS, flux),
        paths=paths,
        shares={"plate:bulk.absorbed": 100 * (1 - passed - returned)},
    )


# A sloping field: a Lambertian disc under a white hood over a grey floor. Light goes to and fro,
# one ray arrives several times with less and less weight. The darkest cell stands out, which is
# the worst case of the lower bound on the minimum; of the upper one it is the even field.

HOOD, FLOOR, HEIGHT, WHITE, GREY = 60.0, 400.0, 60.0, 0.8, 0.6  # mm
LAMP_RADIUS, LAMP_HEIGHT = 5.0, 59.0
SLOPING_GRIDS = {  # center, size, cells
    "thousand": ((7.0, 4.0), 120.0, (4, 4)),
    "hundred": ((50.0, 40.0), 52.0, (4, 4)),
}
ORDERS = 12  # arrivals of one ray; each next brings 4 % of the last


def sloping(scene: Study) -> None:
    scene.finish("white", diffuse=WHITE)
    scene.finish("grey", diffuse=GREY)
    scene.part("hood", rectangle((HOOD, HOOD), (0, 0, HEIGHT)), medium="sheet", finish="white")
    scene.part("floor", rectangle((FLOOR, FLOOR)), medium="sheet", finish="grey")
    lamp = {"center": (0, 0, LAMP_HEIGHT), "normal": DOWN, "radius": LAMP_RADIUS}
    scene.source("lamp", disc=lamp, pattern="lambertian")
    for name, ((x, y), size, cells) in SLOPING_GRIDS.items():
        scene.detector(name, (x, y, 0), UP, (size, size), cells)


def square_rule(side: float, count: int) -> tuple[np.ndarray, np.ndarray]:
    """Gauss's rule on a square about the origin: points (count^2, 2), weights (count^2,)."""
    node, weight = np.polynomial.legendre.leggauss(count)
    x, y = np.meshgrid(node, node)
    weights = np.outer(weight, weight).ravel() * (side / 2) ** 2
    return np.stack([x.ravel(), y.ravel()], axis=1) * side / 2, weights


def facing(a: np.ndarray, b: np.ndarray) -> np.ndarray:
    """cos cos / (pi d^2) between points (n, 2) and (m, 2) of the parallel planes: (n, m)."""
    square = ((a[:, None] - b[None]) ** 2).sum(axis=-1) + HEIGHT**2
    return HEIGHT**2 / (pi * square**2)


def direct(points: np.ndarray) -> np.ndarray:
    """W/mm2 on the floor straight from 1 W of the disc; exitance x factor."""
    offset = np.hypot(points[:, 0], points[:, 1])
    return element_to_disc(LAMP_RADIUS, LAMP_HEIGHT, offset) / (pi * LAMP_RADIUS**2)


def sloping_truth() -> Truth:
    """Radiosity between the two planes, one order of arrival after the other: what the floor
    receives it sends on with GREY, what the hood receives with WHITE (quadrature; the kernels are
    smooth over the distance of the planes, so that the rules are exact to 1e-6 and better)."""
    floor, floor_weight = square_rule(FLOOR, 64)
    hood, hood_weight = square_rule(HOOD, 16)
    between = facing(hood, floor)
    on_floor = direct(floor)
    absorbed, sent = 0.0, []  # W per order by each node of the hood
    for _ in range(ORDERS):
        absorbed += (1 - GREY) * float(floor_weight @ on_floor)
        sent.append(hood_weight * WHITE * (between @ (floor_weight * GREY * on_floor)))
        on_floor = between.T @ sent[-1]
    arrivals = [direct] + [lambda p, s=s: facing(p[:, :2], hood) @ s for s in sent[:-1]]
    cells, flux, paths = {}, {}, {}
    for name, ((x, y), size, count) in SLOPING_GRIDS.items():
        by_order = [
            cell_means(order, (x, y, 0), ACROSS, ALONG, (size, size), count) for order in arrivals
        ]
        cells[name] = 1e6 * sum(by_order)
        flux[name] = float(sum(by_order).mean()) * size**2
        paths[f"lamp, {name}"] = float(by_order[0].mean()) * size**2
        again = f"lamp, floor:default scatter, hood:default scatter, {name}"
        paths[again] = float(by_order[1].mean()) * size**2
    return Truth(cells, flux, paths, {"floor.absorbed": 100 * absorbed})


# What the seeds came out as.


class Seen(NamedTuple):
    value: float
    error: float
    truth: float


@dataclass
class Record:
    """What every seed reported, by name."""

    seeds: int
    honest: dict[str, list[Seen]] = field(default_factory=lambda: defaultdict(list))
    at_most: dict[str, list[Seen]] = field(default_factory=lambda: defaultdict(list))
    missed: dict[str, list[bool]] = field(default_factory=lambda: defaultdict(list))
    darkest: dict[str, list[float]] = field(default_factory=lambda: defaultdict(list))

    @property
    def tolerance(self) -> float:
        """Of a ratio of standard deviations: 0.15 for 400 seeds, for others as many errors wide."""
        return 0.15 * sqrt(400 / self.seeds)

    def add(self, run, truth: Truth) -> None:
        found = study.measures(run)
        for name in truth.shares:
            self._see(self.honest, name, found[name], truth.shares[name])
        for name in truth.cells:
            self._add_detector(run, name, found, truth)
        rows = {row.text: row for row in study.paths(run)}
        for text, flux in truth.paths.items():
            row, whole = rows[text], truth.flux[text.rpartition(", ")[2]]
            self.honest[text].append(Seen(row.flux, row.error, flux))
            self.honest[f"share of {text}"].append(Seen(row.share, row.share_error, flux / whole))

    def _add_detector(self, run, name: str, found: dict, truth: Truth) -> None:
        cells, node = truth.cells[name], run.detector(name)
        even_half = node["cell_half"].sel(half="even").sum("group").values.ravel()
        darkest, brightest = int(even_half.argmin()), int(even_half.argmax())
        self._see(self.honest, f"{name}.flux", found[f"{name}.flux"], truth.flux[name])
        self._see(self.honest, f"{name}.mean", found[f"{name}.mean"], cells.mean())
        for kind, cell in (("min_split", darkest), ("max_split", brightest)):
            self._see(self.honest, f"{name}.{kind}", found[f"{name}.{kind}"], cells[cell])
        ratio = f"{name}.uniformity_split"  # without batches the most that its error can be
        kept = self.honest if "cell_batch" in node else self.at_most
        self._see(kept, ratio, found[ratio], cells[darkest] / cells.mean())
        for kind in BOUNDED:
            known = truth.of(name, kind)
            self._see(self.at_most, f"{name}.{kind}", found[f"{name}.{kind}"], known)
            low, high = bounds(run, f"{name}.{kind}", ALPHA)
            self.missed[f"{name}.{kind} lower"].append(low > known)
            self.missed[f"{name}.{kind} upper"].append(high < known)
        self.darkest[name].append(float(node["effective"].values.flat[int(cells.argmin())]))

    @staticmethod
    def _see(where: dict, name: str, measure, truth: float) -> None:
        where[name].append(Seen(measure.value, measure.error, truth))


def spread_over_error(seen: list[Seen]) -> float:
    """Standard deviation over the seeds of the distance from the truth, over the mean error."""
    value, error, truth = np.array(seen).T
    return float(np.std(value - truth, ddof=1) / error.mean())


class Plan(NamedTuple):
    write: Callable[[Study], None]
    truth: Callable[[], Truth]
    seeds: int
    memory: str  # for the batches of maps


KEPT, NOT_KEPT = "1 GiB", "1 KiB"


def plan(write, truth, memory: str, seeds: int = 400):
    batches = "batches kept" if memory == KEPT else "batches not kept"
    marks = [pytest.mark.long] if seeds == 400 else []
    return pytest.param(
        Plan(write, truth, seeds, memory), marks=marks, id=f"{write.__name__}, {batches}, {seeds}"
    )


@pytest.fixture(
    scope="module",
    params=[
        plan(sloping, sloping_truth, KEPT, seeds=64),
        plan(sloping, sloping_truth, KEPT),
        plan(sloping, sloping_truth, NOT_KEPT),
        plan(even, even_truth, KEPT),
        plan(even, even_truth, NOT_KEPT),
    ],
)
def record(request, tmp_path_factory) -> Record:
    wanted = request.param
    scene = Study(tmp_path_factory.mktemp("honest"), length="mm")
    wanted.write(scene)
    scene.tables["trace"] = {"map_memory": wanted.memory}
    path = scene.folder / "study.toml"
    path.write_text(scene.text(), encoding="utf-8")
    world, truth = study.build(study.load(path)), wanted.truth()
    made = Record(wanted.seeds)
    for seed in range(1, wanted.seeds + 1):
        made.add(study.trace(world, rays=ROUND, seed=seed), truth)
    return made


def test_the_grids_have_the_contributions_they_are_named_for(record):
    for name, number in GRIDS.items():
        found = float(np.mean(record.darkest[name]))
        print(f"{name}: {found:.0f} effective contributions in the darkest cell")
        assert 0.8 * number < found < 1.25 * number


def test_spread_is_the_reported_error(record):
    """Flux, mean, split extremes less the truth of the cell that they chose, paths and shares."""
    ratios = {name: spread_over_error(seen) for name, seen in record.honest.items()}
    print(*(f"{ratio:.3f} {name}" for name, ratio in ratios.items()), sep="\n")
    off = {n: r for n, r in ratios.items() if abs(r - 1) > record.tolerance}
    assert not off


def test_plain_extremes_spread_at_most_as_their_error_says(record):
    ratios = {name: spread_over_error(seen) for name, seen in record.at_most.items()}
    print(*(f"{ratio:.3f} {name}" for name, ratio in ratios.items()), sep="\n")
    off = {n: r for n, r in ratios.items() if r - 1 > record.tolerance}
    assert not off


def test_the_mean_over_the_seeds_is_the_truth(record):
    """What is called honest has no bias either: the split extremes least of all."""
    z = {}
    for name, seen in record.honest.items():
        value, _, truth = np.array(seen).T
        off = value - truth
        z[name] = float(off.mean() / off.std(ddof=1) * sqrt(record.seeds))
    print(*(f"{score:+.2f} {name}" for name, score in z.items()), sep="\n")
    limit = z_limit(len(z))
    assert not {n: score for n, score in z.items() if abs(score) > limit}


def test_bounds_miss_at_most_at_the_stated_rate(record):
    allowed = int(binom.isf(CHANCE, record.seeds, ALPHA))
    misses = {name: sum(missed) for name, missed in record.missed.items()}
    print(f"of {record.seeds}, {ALPHA * record.seeds:.0f} on average and {allowed} at most")
    print(*(f"{count:3} {name}" for name, count in misses.items()), sep="\n")
    assert not {n: count for n, count in misses.items() if count > allowed}
