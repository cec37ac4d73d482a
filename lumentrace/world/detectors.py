"""Detectors as tables of numbers."""

from collections.abc import Sequence

import numpy as np

from lumentrace.models.registry import DETECTORS, number
from lumentrace.scene.model import Detector
from lumentrace.world.arrays import Detectors
from lumentrace.world.bounds import plane_error


def detector_table(detectors: Sequence[Detector], frames, size: float) -> Detectors:
    """The table of detectors.

    frames: (place, half size) of each, of `frames.detector_frame`; size: largest coordinate.
    Raises UserError where there are more cells than can be numbered.
    """
    n = len(detectors)
    place = np.array([place for place, _ in frames]).reshape(n, 4, 3)
    half = np.array([half for _, half in frames]).reshape(n, 2)
    cells = np.array([detector.cells for detector in detectors], np.int64).reshape(n, 2)
    first = np.concatenate([[0], np.cumsum(cells.prod(axis=1))])
    for row, detector in enumerate(detectors):
        if first[row + 1] > np.iinfo(np.int32).max:
            raise detector.place.error("plane.cells", f"{first[row + 1]} cells are too many")
    return Detectors(
        model=np.full(n, number(DETECTORS, "plane"), np.int32),
        place=place,
        size=half,
        cells=cells.astype(np.int32),
        cell_first=first.astype(np.int32),
        catches=np.array([detector.catch for detector in detectors], bool),
        two_sided=np.array([detector.side == "both" for detector in detectors], bool),
        photometric=np.array([detector.counts == "illuminance" for detector in detectors], bool),
        error=plane_error(
            size, 2 * half.max(axis=1, initial=0), 2 * half.min(axis=1, initial=1e300)
        ),
    )
