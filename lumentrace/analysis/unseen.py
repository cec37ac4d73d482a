"""What light that was cut off or unresolved could at most have added."""

from dataclasses import dataclass

import numpy as np

from lumentrace.analysis.samples import arrivals, responses
from lumentrace.run.run import Run

ARRIVALS_NOTE = "unseen takes the most arrivals of one ray, an estimate"


def lost_flux(run: Run) -> np.ndarray:
    """W of each group of sources that were cut off or unresolved, (groups,)."""
    ended = run.account["ended"].sel(fate=["cut_off", "unresolved"])
    return ended.mean("batch").sum("fate").values


@dataclass(frozen=True)
class Unseen:
    """The most that lost light could add to the numbers of a detector."""

    flux: float  # in the unit of flux
    mean: float  # in the unit of the map
    cell: float  # in the unit of the map, if all of it went to one cell
    notes: tuple[str, ...]

    def of_ratio(self, low: float, mean: float, cells: int) -> float:
        """The largest change of low / mean: all of it outside the darkest cell, or all in it.
        An only cell has nothing outside."""
        if self.flux == 0.0 or cells == 1:
            return 0.0
        down = low / (mean + self.mean)
        up = min(1.0, (low + self.cell) / (mean + self.cell / cells))
        ratio = low / mean if mean > 0.0 else 0.0
        return max(ratio - down, up - ratio)


def unseen_of(run: Run, name: str) -> Unseen:
    """Lost weight x largest response x the most arrivals that one ray made there; 1 where the
    detector catches, which is certain, while the rest is an estimate."""
    facts = run.detector(name).attrs
    group = run.node("sources")["group_id"].values
    response = np.zeros(run.node("sources").sizes["group"])
    np.maximum.at(response, group, responses(run, name))
    lost = float(lost_flux(run) @ response)
    flux = lost * arrivals(run, name, "arrivals_most")
    return Unseen(
        flux=flux,
        mean=flux / facts["area"],
        cell=lost * arrivals(run, name, "cell_arrivals_most") / facts["cell_area"],
        notes=() if facts["catches"] or lost == 0.0 else (ARRIVALS_NOTE,),
    )
