"""The measures of a run: single named numbers with error, upper bound and systematic bound."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from lumentrace.analysis.bounds import ratio_bounds
from lumentrace.analysis.cells import Cells, cells_of
from lumentrace.analysis.samples import (
    FEW,
    UPPER_RATE,
    Sample,
    flux_sample,
    loss_samples,
    mean_sample,
)
from lumentrace.analysis.unseen import Unseen, lost_flux, unseen_of
from lumentrace.run.run import Run

NOT_HIT = "not hit"
CELL_NOT_HIT = "cell not hit"  # while light reached the detector
FEW_NOTE = f"fewer than {FEW:.0f} effective contributions"
SPREAD_NOTE = "error of the cell, an upper bound on the spread"


@dataclass(frozen=True)
class Measure:
    """value is None only for a uniformity where no light arrived."""

    name: str
    value: float | None
    error: float | None  # standard error; None where nothing was counted
    unit: str
    upper: float | None  # bound at 95 % where nothing was counted and a bound is proven
    unseen: float  # the most that cut-off and unresolved light could change it
    effective: float  # effective number of contributions
    note: str  # "" or remarks, parted by "; "


def measures(run: Run) -> dict[str, Measure]:
    """All measures by name: those of each detector, then of each part, then of the study."""
    found = [m for name in run.detectors for m in _of_detector(run, name)]
    lost = float(100.0 * lost_flux(run).sum() / run.account["emitted"].sum())
    found += [_of_sample(name, s, "%", lost) for name, s in loss_samples(run).items()]
    return {m.name: m for m in found}


def _of_detector(run: Run, name: str) -> Iterator[Measure]:
    facts = run.detector(name).attrs
    unseen = unseen_of(run, name)
    mean = mean_sample(run, name)
    flux = flux_sample(run, name)
    yield _of_sample(f"{name}.flux", flux, facts["flux_unit"], unseen.flux, unseen.notes)
    yield _of_sample(f"{name}.mean", mean, facts["map_unit"], unseen.mean, unseen.notes)
    for suffix, split in (("", False), ("_split", True)):
        cells = cells_of(run, name, split)
        yield _extreme(f"{name}.min{suffix}", cells, cells.darkest, mean, unseen)
        yield _extreme(f"{name}.max{suffix}", cells, cells.brightest, mean, unseen)
        yield _uniformity(f"{name}.uniformity{suffix}", cells, mean, unseen)


def _of_sample(name: str, sample: Sample, unit: str, unseen: float, notes=()) -> Measure:
    upper = sample.largest.upper(UPPER_RATE, sample.blocks)
    return _measure(name, unit, sample.value, sample.error, sample.effective, upper, unseen, notes)


def _extreme(name: str, cells: Cells, cell: int, mean: Sample, unseen: Unseen) -> Measure:
    unit, notes = cells.node.attrs["map_unit"], _notes(cells, unseen)
    value, error, effective = cells.value[cell], cells.error(cell), cells.effective[cell]
    upper = cells.largest.upper(UPPER_RATE, cells.blocks)
    unhit = _unhit(mean)
    return _measure(name, unit, value, error, effective, upper, unseen.cell, notes, unhit)


def _uniformity(name: str, cells: Cells, mean: Sample, unseen: Unseen) -> Measure:
    cell = cells.darkest
    value, effective, error = None, cells.effective[cell], None
    if cells.mean > 0.0:
        value, error = cells.value[cell] / cells.mean, cells.ratio_error(cell)
    dark = cells.largest.upper(UPPER_RATE / 2, cells.blocks)
    _, upper = ratio_bounds(0.0, dark, mean, UPPER_RATE / 2)
    change = unseen.of_ratio(cells.value[cell], cells.mean, len(cells.value))
    upper = upper if upper < 1.0 else np.inf  # every uniformity is below 1: that is no news
    notes = _notes(cells, unseen)
    return _measure(name, "1", value, error, effective, upper, change, notes, _unhit(mean))


def _unhit(mean: Sample) -> str:
    """What is said of a cell without a contribution."""
    return CELL_NOT_HIT if mean.effective > 0.0 else NOT_HIT


def _notes(cells: Cells, unseen: Unseen) -> tuple[str, ...]:
    return unseen.notes if cells.split else (SPREAD_NOTE, *unseen.notes)


def _measure(name, unit, value, error, effective, upper, unseen, notes, unhit=NOT_HIT) -> Measure:
    """A measure with what its count of contributions asks for: without one no error but a bound,
    and the note `unhit`."""
    hit = effective > 0.0
    if not hit:
        notes = (unhit, *(n for n in notes if n != SPREAD_NOTE))
    elif effective < FEW:
        notes = (FEW_NOTE, *notes)
    return Measure(
        name=name,
        value=None if value is None else float(value),
        error=float(error) if hit else None,
        unit=unit,
        upper=None if hit or not np.isfinite(upper) else float(upper),
        unseen=float(unseen),
        effective=float(effective),
        note="; ".join(notes),
    )
