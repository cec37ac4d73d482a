"""Bounds on the true value of a measure, valid for minima and maxima over noisy cells too."""

from lumentrace.analysis.samples import (
    Sample,
    bounds_of,
    cell_sample,
    flux_sample,
    loss_samples,
    mean_sample,
)
from lumentrace.errors import UserError, nearest
from lumentrace.run.run import Run


def bounds(run: Run, name: str, alpha: float) -> tuple[float, float]:
    """Lower and upper bound on the truth of a measure, in its unit; each misses at most at the
    rate alpha. What was cut off or unresolved is not in them: see Measure.unseen.

    The truth of a minimum lies in one cell, which misses its lower bound at the rate alpha; all
    lower bounds hold the smallest below it. Its upper bound is the smallest of the cells' upper
    bounds, all of which hold together at alpha / cells each. Maxima are mirrored. A `_split` twin
    has the same truth and so the same bounds. A uniformity takes half of alpha for the minimum and
    half for the mean, since the two vary together in a way that a bound must not rely on; that of
    an only cell is 1.

    A bound that the data do not set is infinite. UserError for an unknown measure.
    """
    subject, _, kind = name.rpartition(".")
    if subject in run.detectors and kind in BY_DETECTOR:
        low, high = BY_DETECTOR[kind](run, subject, alpha)
    else:
        losses = loss_samples(run)
        if name not in losses:
            known = [f"{d}.{k}" for d in run.detectors for k in BY_DETECTOR]
            raise UserError(f'no measure is named "{name}"; {nearest(name, [*known, *losses])}')
        low, high = bounds_of(losses[name], alpha)
    return float(low), float(high)


def _minimum(run: Run, detector: str, alpha: float) -> tuple[float, float]:
    cells = cell_sample(run, detector)
    low, _ = bounds_of(cells, alpha)
    _, high = bounds_of(cells, alpha / len(cells.value))
    return low.min(), high.min()


def _maximum(run: Run, detector: str, alpha: float) -> tuple[float, float]:
    cells = cell_sample(run, detector)
    low, _ = bounds_of(cells, alpha / len(cells.value))
    _, high = bounds_of(cells, alpha)
    return low.max(), high.max()


def _uniformity(run: Run, detector: str, alpha: float) -> tuple[float, float]:
    if run.detector(detector)["value"].size == 1:
        return 1.0, 1.0
    min_low, min_high = _minimum(run, detector, alpha / 2)
    return ratio_bounds(min_low, min_high, mean_sample(run, detector), alpha / 2)


def ratio_bounds(low: float, high: float, mean: Sample, alpha: float) -> tuple[float, float]:
    """Bounds on minimum / mean from bounds on the minimum and, at alpha, on the mean; within 0..1,
    where a minimum over its mean always lies."""
    mean_low, mean_high = (float(b) for b in bounds_of(mean, alpha))
    ratio_low = low / mean_high if mean_high > 0.0 else 0.0
    return ratio_low, min(1.0, high / mean_low) if mean_low > 0.0 else 1.0


BY_DETECTOR = {
    "flux": lambda run, detector, alpha: bounds_of(flux_sample(run, detector), alpha),
    "mean": lambda run, detector, alpha: bounds_of(mean_sample(run, detector), alpha),
    "min": _minimum,
    "max": _maximum,
    "uniformity": _uniformity,
    "min_split": _minimum,
    "max_split": _maximum,
    "uniformity_split": _uniformity,
}
