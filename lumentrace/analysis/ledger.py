"""The paths by which light reached each detector, strongest first."""

from dataclasses import dataclass

import numpy as np

from lumentrace.analysis.statistics import jackknife
from lumentrace.run.estimate import effective_number, standard_error
from lumentrace.run.run import Run
from lumentrace.units import AIR_INDEX

LIGHT_SPEED = 299_792_458.0  # m/s in vacuum, exact (SI)
OTHER = "other"  # in place of a path: those that found the table full or were too long for it
BEYOND = 3  # code of a run that long or longer


@dataclass(frozen=True)
class PathRow:
    """One path, or with `source` None the rest of a detector's light: all paths not kept."""

    detector: str
    source: str | None
    steps: tuple[tuple[str, str], ...]  # ("cover:default", "through"), ("tray:rim", "scatter x2")
    run_means: tuple[float, ...]  # mean number of times of each step; 1 unless it says x2 or x3+
    flux: float
    error: float | None  # standard error; None where all contributions are zero
    unit: str
    share: float | None  # of the detector's flux; None where there is none
    share_error: float | None
    upper: float | None  # 0 where all contributions are zero: the detector does not see this light
    count: int  # arrivals, branches counted singly
    effective: float | None  # None where it was not kept
    reflections: float | None  # mean number of `reflect`
    scatters: float | None  # mean number of `scatter` and `scatter_through`
    length: float | None  # mean optical length relative to air, in the study's unit
    arrival: float | None  # mean time from source to detector, ns
    rays: tuple[int, ...]  # numbers of some rays on this path, to be traced again
    hash: int | None  # what the engine calls the path

    @property
    def text(self) -> str:
        """``emitter, glass:inner through, glass:outer reflect, glass:inner through, rx``"""
        if self.source is None:
            return OTHER
        steps = (f"{place} {event}" for place, event in self.steps)
        return ", ".join((self.source, *steps, self.detector))


def paths(run: Run, detector: str | None = None) -> list[PathRow]:
    """The paths to one detector, or to all in the order of the file, each strongest first; then, if
    there is any, the light by paths that are not kept. UserError for an unknown detector."""
    wanted = run.detectors if detector is None else (detector,)
    return [row for name in wanted for row in _to_detector(run, name)]


def _to_detector(run: Run, name: str) -> list[PathRow]:
    detector_flux = run.detector(name)["flux"].values.sum(axis=0)
    d = run.detectors.index(name)
    ledger = run.ledger
    rows = np.flatnonzero(ledger["detector_id"].values == d)
    flux = ledger["flux"].values[rows].mean(axis=-1)
    rows = rows[np.argsort(-flux, kind="stable")]
    found = _kept(run, rows, name, detector_flux)
    other_count = int(ledger["other_count"].values[d].sum())
    if other_count:
        batch = ledger["other"].values[d].sum(axis=0)
        found.append(
            _other(name, str(ledger["flux_unit"].values[d]), batch, detector_flux, other_count)
        )
    return found


def _kept(run: Run, rows: np.ndarray, name: str, detector_flux: np.ndarray) -> list[PathRow]:
    table = run.ledger.isel(path=rows)
    batch = table["flux"].values
    flux, error = batch.mean(axis=-1), standard_error(batch)
    effective = effective_number(flux, table["square"].values)
    share, share_error = _shares(batch, detector_flux)
    length = table["optical_length"].values
    arrival = 1e9 * table["group_length"].values * run.metre * AIR_INDEX / LIGHT_SPEED
    sources, source_id = table["source"].values.tolist(), table["source_id"].values
    unit = str(table["flux_unit"].values[run.detectors.index(name)])
    steps = _steps(table)
    found = []
    for i in range(len(rows)):
        n = int(table["n_steps"].values[i])
        rays = table["ray"].values[i]
        counted = effective[i] > 0.0
        found.append(
            PathRow(
                detector=name,
                source=sources[source_id[i]],
                steps=tuple(steps(i, k) for k in range(n)),
                run_means=tuple(table["run_mean"].values[i, :n].tolist()),
                flux=float(flux[i]),
                error=float(error[i]) if counted else None,
                unit=unit,
                share=_number(share[i]),
                share_error=_number(share_error[i]) if counted else None,
                upper=None if counted else 0.0,
                count=int(table["count"].values[i]),
                effective=float(effective[i]),
                reflections=_number(table["reflections"].values[i]),
                scatters=_number(table["scatters"].values[i]),
                length=_number(length[i]),
                arrival=_number(arrival[i]),
                rays=tuple(dict.fromkeys(rays[rays >= 0].tolist())),  # one may arrive twice
                hash=int(table["hash"].values[i]),
            )
        )
    return found


def _steps(table):
    """A function (row, step) -> (part:tag, event as text)."""
    tags, events = table["tag"].values.tolist(), table["event"].values.tolist()
    tag_id, event_id = table["step_tag_id"].values, table["step_event_id"].values
    repeats = table["step_run"].values

    def step(i: int, k: int) -> tuple[str, str]:
        return tags[tag_id[i, k]], event_text(events[event_id[i, k]], int(repeats[i, k]))

    return step


def event_text(event: str, run: int) -> str:
    """ "scatter", of a run of two "scatter x2", of three or more "scatter x3+"."""
    if run == 1:
        return event
    return f"{event} x{run}+" if run == BEYOND else f"{event} x{run}"


def _shares(batch: np.ndarray, whole: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Shares of a detector's flux and their errors by jackknife, NaN where there is no flux.

    batch: (rows, 64). whole: (64,).
    """
    if whole.sum() == 0.0:
        nothing = np.full(len(batch), np.nan)
        return nothing, nothing
    share = batch.mean(axis=-1) / whole.mean()
    return share, jackknife(np.divide, batch, np.broadcast_to(whole, batch.shape))


def _number(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None


def _other(name: str, unit: str, batch: np.ndarray, whole: np.ndarray, count: int) -> PathRow:
    share, share_error = _shares(batch[None], whole)
    counted = bool(batch.any())
    return PathRow(
        detector=name,
        source=None,
        steps=(),
        run_means=(),
        flux=float(batch.mean()),
        error=float(standard_error(batch)) if counted else None,
        unit=unit,
        share=_number(share[0]),
        share_error=_number(share_error[0]) if counted else None,
        upper=None if counted else 0.0,
        count=count,
        effective=None,
        reflections=None,
        scatters=None,
        length=None,
        arrival=None,
        rays=(),
        hash=None,
    )
