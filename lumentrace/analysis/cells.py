"""The darkest and the brightest cell of a detector, plain or chosen and valued by halves."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from lumentrace.analysis.samples import Largest, largest_in_cell
from lumentrace.analysis.statistics import jackknife, odd
from lumentrace.run.estimate import block_error, grouped_error, standard_error
from lumentrace.run.run import Run

if TYPE_CHECKING:
    import xarray


@dataclass(frozen=True)
class Cells:
    """The cells of a detector, (cells,) in the unit of its map: from all batches, or `split`, when
    the even batches choose a cell and the odd ones value it."""

    node: "xarray.Dataset"  # the detector's
    split: bool
    choice: np.ndarray  # values by which a cell is chosen
    value: np.ndarray
    effective: np.ndarray
    mean_batch: np.ndarray  # (64,) or (32,) mean over the detector in each batch
    blocks: int
    largest: Largest  # what one ray can add to a cell

    @property
    def darkest(self) -> int:
        return int(np.argmin(self.choice))

    @property
    def brightest(self) -> int:
        return int(np.argmax(self.choice))

    @property
    def mean(self) -> float:
        return float(self.value.mean())

    def error(self, cell: int) -> float:
        """Standard error of a cell: of its batches, of which the odd ones are half; where they
        were not kept of its blocks, or of those of the odd batches."""
        batch = self._batch(cell)
        if batch is not None:
            return float(standard_error(batch))
        if not self.split:
            return float(self.node["error"].values.flat[cell])
        up, across = np.unravel_index(cell, self.node["value"].shape)
        mean, square = (
            self.node[v].values[1, :, up, across] for v in ("cell_half", "cell_block_square")
        )
        error = grouped_error(block_error(mean, square, self.blocks))
        return float(error) / self.node.attrs["cell_area"]

    def ratio_error(self, cell: int) -> float:
        """Standard error of cell / mean at this cell, which vary together. Where batch values were
        not kept it is not known how: the sum of both errors, the most that there can be. The ratio
        of an only cell is 1."""
        if self.value.size == 1:
            return 0.0
        batch = self._batch(cell)
        if batch is not None:
            return float(jackknife(np.divide, batch, self.mean_batch))
        ratio = self.value[cell] / self.mean
        return (self.error(cell) + ratio * float(standard_error(self.mean_batch))) / self.mean

    def _batch(self, cell: int) -> np.ndarray | None:
        if "cell_batch" not in self.node:
            return None
        up, across = np.unravel_index(cell, self.node["value"].shape)
        batch = self.node["cell_batch"].values[:, up, across].sum(axis=0)
        return (odd(batch) if self.split else batch) / self.node.attrs["cell_area"]


def cells_of(run: Run, name: str, split: bool) -> Cells:
    """The cells of a detector; UserError where none has this name."""
    node = run.detector(name)
    area, cell_area = node.attrs["area"], node.attrs["cell_area"]
    even, value = node["cell_half"].values.sum(axis=1).reshape(2, -1) / cell_area
    whole = node["value"].values.ravel()
    effective = node["effective"].values.ravel()
    mean_batch = node["flux"].values.sum(axis=0) / area
    if split:
        # contributions of one mean weight: the odd batches hold their share of them
        share = np.divide(value, 2.0 * whole, out=np.zeros_like(whole), where=whole > 0.0)
        effective = effective * share
    return Cells(
        node=node,
        split=split,
        choice=even if split else whole,
        value=value if split else whole,
        effective=effective,
        mean_batch=odd(mean_batch) if split else mean_batch,
        blocks=run.blocks // 2 if split else run.blocks,
        largest=largest_in_cell(run, name),
    )
