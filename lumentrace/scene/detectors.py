"""[[detector]] tables -> detectors, every length in the study's unit."""

from lumentrace.scene.forms import DetectorForm
from lumentrace.scene.model import Detector
from lumentrace.scene.place import Place
from lumentrace.scene.vectors import check_frame, scaled, turns, unit

CELLS_MAX = 100_000_000  # of all detectors


def detector_of(form: DetectorForm, place: Place, scale: float) -> Detector:
    """The detector that a [[detector]] table describes. Raises UserError."""
    plane = form.plane
    check_frame(plane.normal, plane.across, place, "plane.across")
    return Detector(
        name=form.name,
        center=scaled(plane.center, scale),
        normal=unit(plane.normal),
        across=unit(plane.across),
        size=scaled(plane.size, scale),
        cells=plane.cells,
        counts=form.counts,
        side=form.side,
        catch=form.catch,
        turn=turns(form.turn),
        at=scaled(form.at, scale),
        use=form.use,
        place=place,
    )
