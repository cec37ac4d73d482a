"""What a run knows of one sampled number, or of an array of them, and the bounds on its truth."""

from dataclasses import dataclass, replace

import numpy as np

from lumentrace.analysis.statistics import (
    no_hit_upper,
    poisson_bounds,
    skewness_of_mean,
    t_bounds,
)
from lumentrace.run.estimate import effective_number, standard_error
from lumentrace.run.run import Run
from lumentrace.scene.measures import ABSORBED, ESCAPED
from lumentrace.scene.model import BULK
from lumentrace.world.arrays import BATCHES

ENOUGH = 1000.0  # effective contributions from which on the corrected t holds
FEW = 100.0  # effective contributions below which a number says so
UPPER_RATE = 0.05  # of the bounds that are shown where nothing was counted


@dataclass(frozen=True)
class Sample:
    """Estimates of sums of contributions that are not negative; all arrays of one shape."""

    value: np.ndarray
    error: np.ndarray
    skew: np.ndarray  # of the mean, see t_bounds
    effective: np.ndarray
    freedom: int  # degrees of freedom of error
    blocks: int
    largest: float | None  # proven bound on what one ray adds in its block, in value's unit

    def scaled(self, factor: float) -> "Sample":
        """The same in another unit."""
        largest = None if self.largest is None else self.largest * factor
        return replace(self, value=self.value * factor, error=self.error * factor, largest=largest)


def bounds_of(sample: Sample, alpha: float) -> tuple[np.ndarray, np.ndarray]:
    """One-sided lower and upper bounds on the true values, each missing at the rate alpha.

    From 1000 effective contributions on the skewness-corrected t at half the rate; below, the
    exact Poisson bound on the effective number x the mean weight, which is exact for equal weights
    only; without a hit 0 and the proven bound, or infinity where none is proven.
    """
    hit = sample.effective > 0.0
    number = np.where(hit, sample.effective, 1.0)
    t_low, t_high = t_bounds(sample.value, sample.error, sample.freedom, alpha / 2, sample.skew)
    few_low, few_high = poisson_bounds(number, alpha)
    weight = sample.value / number
    enough = number >= ENOUGH
    low = np.where(enough, np.maximum(t_low, 0.0), few_low * weight)
    high = np.where(enough, t_high, few_high * weight)
    return np.where(hit, low, 0.0), np.where(hit, high, unhit_upper(sample, alpha))


def unhit_upper(sample: Sample, alpha: float) -> float:
    """The upper bound on a value that no ray has added to; infinity where none is proven."""
    if sample.largest is None:
        return np.inf
    return no_hit_upper(alpha, sample.largest, sample.blocks)


def _from_batches(batch, square, run: Run, largest: float | None) -> Sample:
    """From batch values by group, (groups, 64), and the squares of the rays' totals, (groups,)."""
    batch = np.asarray(batch).sum(axis=0)
    value = batch.mean()
    return Sample(
        value=value,
        error=standard_error(batch),
        skew=skewness_of_mean(batch),
        effective=effective_number(value, np.asarray(square).sum()),
        freedom=BATCHES - 1,
        blocks=run.blocks,
        largest=largest,
    )


def flux_sample(run: Run, name: str) -> Sample:
    """The flux on a detector, in lm or W."""
    node = run.detector(name)
    return _from_batches(node["flux"], node["flux_square"], run, largest(run, name))


def mean_sample(run: Run, name: str) -> Sample:
    """The mean over a detector, in the unit of its map."""
    return flux_sample(run, name).scaled(1.0 / run.detector(name).attrs["area"])


def loss_samples(run: Run) -> dict[str, Sample]:
    """What each part, its tags and its medium absorbed and what escaped, by name of the measure,
    in % of the emitted flux.

    A ray escapes once, with at most the weight of its start. What it leaves in a part may add up
    to more than that, since roulette restores its weight: there no bound is proven.
    """
    node = run.account
    percent = 100.0 / float(node["emitted"].sum())
    filled = node["volume"].values[node["filled"].values > 0]
    rows = {}
    for part in node["part"].values.tolist():
        rows[f"{part}.{ABSORBED}"] = ("whole", {"part": part})
        for tag in node["tag"].values.tolist():
            if tag.partition(":")[0] == part:
                rows[f"{tag}.{ABSORBED}"] = ("absorbed", {"tag": tag})
        if part in filled:
            rows[f"{part}:{BULK}.{ABSORBED}"] = ("bulk", {"volume": part})
    samples = {
        name: _from_batches(node[v].sel(at), node[f"{v}_square"].sel(at), run, None)
        for name, (v, at) in rows.items()
    }
    at = {"fate": "escaped"}
    start = float(run.node("sources")["ray_flux"].max())
    samples[ESCAPED] = _from_batches(
        node["ended"].sel(at), node["ended_square"].sel(at), run, start
    )
    return {name: sample.scaled(percent) for name, sample in samples.items()}


def cell_sample(run: Run, name: str) -> Sample:
    """The cells of a detector in the unit of its map, (cells,).

    Where batch values were not kept the error is that of the blocks, and the skewness that of
    equal contributions, 1 / sqrt(effective number); for unequal ones it is the least there can be.
    """
    node = run.detector(name)
    effective = node["effective"].values
    if "cell_batch" in node:
        rows = node["cell_batch"].transpose("up", ...).values
        skew = np.stack([skewness_of_mean(row.sum(axis=0)) for row in rows])  # spares memory
        freedom = BATCHES - 1
    else:
        skew = 1.0 / np.sqrt(np.where(effective > 0.0, effective, 1.0))
        freedom = run.blocks - 1
    bound = largest(run, name)
    return Sample(
        value=node["value"].values.ravel(),
        error=np.nan_to_num(node["error"].values.ravel()),
        skew=skew.ravel(),
        effective=effective.ravel(),
        freedom=freedom,
        blocks=run.blocks,
        largest=None if bound is None else bound / node.attrs["cell_area"],
    )


def responses(run: Run, name: str) -> np.ndarray:
    """What the detector makes of 1 W of each source: 683 lm/W V(wavelength), or 1. (sources,)"""
    efficacy = run.node("sources")["efficacy"].values
    if run.detector(name).attrs["counts"] == "illuminance":
        return efficacy
    return np.ones_like(efficacy)


def largest(run: Run, name: str) -> float | None:
    """Proven bound on what one ray adds to a detector in its block, in lm or W; None without proof.

    A catching detector counts a ray once, and no event raises the weight above its start: lobes
    are sampled by their shares, and roulette divides by p = max(a, 0.1) what a <= p multiplied.
    A lobe whose samples carry weights above its albedo would end this proof.
    """
    if not run.detector(name).attrs["catches"]:
        return None
    return float(np.max(run.node("sources")["ray_flux"].values * responses(run, name)))
