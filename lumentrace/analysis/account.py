"""Where all emitted flux went."""

from dataclasses import dataclass, replace

import numpy as np

from lumentrace.run.estimate import effective_number, standard_error
from lumentrace.run.run import Run
from lumentrace.run.variables import FATES
from lumentrace.scene.model import BULK


@dataclass(frozen=True)
class Flow:
    """One row of the account. error is None where nothing was counted."""

    value: float  # W
    error: float | None  # W; 0 for what is not sampled
    lumens: float | None  # None where the account has none
    lumens_error: float | None
    share: float  # of the emitted flux
    effective: float | None  # number of contributions; None for what is not a sum of them


@dataclass(frozen=True)
class Account:
    """emitted = detected + sum of absorbed + escaped + cut_off + unresolved + sampling."""

    emitted: Flow
    detected: Flow  # by catching detectors
    absorbed: dict[str, Flow]  # by "part:tag", then "part:bulk" of parts that a medium fills
    escaped: Flow
    cut_off: Flow
    unresolved: Flow
    sampling: Flow  # signed: what chance added (-) or took (+)
    closure: float  # (sum of the rest - emitted) / emitted


def account(run: Run) -> Account:
    """The account of a run, summed over the groups of sources."""
    node = run.account
    emitted = node["emitted"].values
    efficacy = _group_efficacy(run)

    def flow(name: str, **at: str) -> Flow:
        batch, square = node[name].sel(at).values, node[f"{name}_square"].sel(at).values
        return _flow(batch, square, float(emitted.sum()), efficacy)

    absorbed = {t: flow("absorbed", tag=t) for t in node["tag"].values.tolist()}
    for volume in node["volume"].values[node["filled"].values > 0].tolist():
        absorbed[f"{volume}:{BULK}"] = flow("bulk", volume=volume)
    ended = {fate: flow("ended", fate=fate) for fate in FATES}
    # signed contributions: no number of equal ones has their spread
    ended["sampling"] = replace(ended["sampling"], effective=None)
    total = sum(f.value for f in (*absorbed.values(), *ended.values()))
    start = Flow(
        value=float(emitted.sum()),
        error=0.0,
        lumens=None if efficacy is None else float(emitted @ efficacy),
        lumens_error=None if efficacy is None else 0.0,
        share=1.0,
        effective=None,
    )
    return Account(
        emitted=start,
        absorbed=absorbed,
        closure=(total - start.value) / start.value,
        **ended,
    )


def _flow(
    batch: np.ndarray, square: np.ndarray, emitted: float, efficacy: np.ndarray | None
) -> Flow:
    """batch: (groups, 64) W. square: (groups,) W2 of the rays' totals."""
    watts, error = _estimate(batch.sum(axis=0))
    effective = float(effective_number(watts, square.sum()))
    lumens, lumens_error = None, None
    if efficacy is not None:
        lumens, lumens_error = _estimate(efficacy @ batch)
    return Flow(watts, error, lumens, lumens_error, watts / emitted, effective)


def _estimate(batch: np.ndarray) -> tuple[float, float | None]:
    """Mean and standard error of (64,) batches; no error where nothing was counted."""
    if not batch.any():
        return 0.0, None
    return float(batch.mean()), float(standard_error(batch))


def _group_efficacy(run: Run) -> np.ndarray | None:
    """lm per W of each group of sources, (groups,); None where all are invisible, or where a group
    mixes wavelengths, so that its watts alone do not tell its lumens."""
    sources = run.node("sources")
    efficacy, group = sources["efficacy"].values, sources["group_id"].values
    of_group = [np.unique(efficacy[group == g]) for g in range(sources.sizes["group"])]
    if any(len(found) != 1 for found in of_group) or not efficacy.any():
        return None
    return np.concatenate(of_group)
