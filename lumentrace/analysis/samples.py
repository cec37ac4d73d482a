"""What a run knows of one sampled number, or of an array of them, and the bounds on its truth."""

from dataclasses import dataclass, replace
from typing import NamedTuple

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


class Largest(NamedTuple):
    """What one ray with all its branches can add to a number in its block."""

    amount: float
    proven: bool  # else an estimate, which may raise a bound but never be one

    def upper(self, alpha: float, blocks: int) -> float:
        """Upper bound on a number that no ray has added to; infinity where none is proven."""
        return no_hit_upper(alpha, self.amount, blocks) if self.proven else np.inf

    def scaled(self, factor: float) -> "Largest":
        return self._replace(amount=self.amount * factor)


@dataclass(frozen=True)
class Sample:
    """Estimates of sums of contributions that are not negative; all arrays of one shape."""

    value: np.ndarray
    error: np.ndarray
    skew: np.ndarray  # of the mean, see t_bounds
    effective: np.ndarray
    freedom: int  # degrees of freedom of error
    blocks: int
    largest: Largest  # in value's unit

    def scaled(self, factor: float) -> "Sample":
        """The same in another unit."""
        return replace(
            self,
            value=self.value * factor,
            error=self.error * factor,
            largest=self.largest.scaled(factor),
        )


def bounds_of(sample: Sample, alpha: float) -> tuple[np.ndarray, np.ndarray]:
    """One-sided lower and upper bounds on the true values, each missing at the rate alpha.

    All at half the rate: from 1000 effective contributions on the skewness-corrected t; below, the
    Poisson bound on the effective number x the mean weight, which is exact for equal weights only
    (at the full rate it misses 5.9 % for a stated 5 % with weights of 4 : 1); without a hit 0 and
    the proven bound, or infinity where none is proven. Below 100, where the strongest contributions
    may all have been missed, a few weak ones do not lower the upper bound beneath that of no hit.
    """
    hit = sample.effective > 0.0
    number = np.where(hit, sample.effective, 1.0)
    t_low, t_high = t_bounds(sample.value, sample.error, sample.freedom, alpha / 2, sample.skew)
    few_low, few_high = (b * sample.value / number for b in poisson_bounds(number, alpha / 2))
    missed = no_hit_upper(alpha, sample.largest.amount, sample.blocks)
    few_high = np.where(number < FEW, np.maximum(few_high, missed), few_high)
    enough = number >= ENOUGH
    low = np.where(enough, np.maximum(t_low, 0.0), few_low)
    high = np.where(enough, t_high, few_high)
    unhit = sample.largest.upper(alpha, sample.blocks)
    return np.where(hit, low, 0.0), np.where(hit, high, unhit)


def _from_batches(batch, square, run: Run, largest: Largest) -> Sample:
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
    return _from_batches(node["flux"], node["flux_square"], run, largest_at(run, name))


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
    rows[ESCAPED] = ("ended", {"fate": "escaped"})
    start = float(run.node("sources")["ray_flux"].max())
    return {
        name: _from_batches(
            node[v].sel(at), node[f"{v}_square"].sel(at), run, Largest(start, name == ESCAPED)
        ).scaled(percent)
        for name, (v, at) in rows.items()
    }


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
    return Sample(
        value=node["value"].values.ravel(),
        error=np.nan_to_num(node["error"].values.ravel()),
        skew=skew.ravel(),
        effective=effective.ravel(),
        freedom=freedom,
        blocks=run.blocks,
        largest=largest_in_cell(run, name),
    )


def responses(run: Run, name: str) -> np.ndarray:
    """What the detector makes of 1 W of each source: 683 lm/W V(wavelength), or 1. (sources,)"""
    efficacy = run.node("sources")["efficacy"].values
    if run.detector(name).attrs["counts"] == "illuminance":
        return efficacy
    return np.ones_like(efficacy)


def largest_at(run: Run, name: str) -> Largest:
    """What one ray can add to the flux on a detector, in lm or W; proven where it catches.

    A catching detector counts a ray once, and no event raises the weight above its start: lobes
    are sampled by their shares, and roulette divides by p = max(a, 0.1) what a <= p multiplied.
    A lobe whose samples carry weights above its albedo would end this proof. Where light passes
    the most arrivals of one ray of this run are taken, an estimate.
    """
    return _largest(run, name, "arrivals_most")


def largest_in_cell(run: Run, name: str) -> Largest:
    """What one ray can add to a cell, in the unit of the map; see largest_at."""
    cell_area = run.detector(name).attrs["cell_area"]
    return _largest(run, name, "cell_arrivals_most").scaled(1.0 / cell_area)


def _largest(run: Run, name: str, most: str) -> Largest:
    start = run.node("sources")["ray_flux"].values * responses(run, name)
    return Largest(
        float(start.max()) * arrivals(run, name, most), bool(run.detector(name).attrs["catches"])
    )


def arrivals(run: Run, name: str, most: str) -> int:
    """Arrivals that one ray can make: 1 where the detector catches, else the most that one made,
    the attribute `most` of the detector."""
    facts = run.detector(name).attrs
    return 1 if facts["catches"] else max(1, int(facts[most]))
