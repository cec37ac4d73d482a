"""Small sums that parts, sources and detectors share while a scene is put together."""

import math

from lumentrace.scene.forms import TurnForm
from lumentrace.scene.model import Turn, Vector
from lumentrace.scene.place import Place

_PARALLEL = 1e-6  # sine of the angle below which two directions give no plane


def unit(vector: Vector) -> Vector:
    """The direction of a vector that is not zero, with length 1."""
    length = math.hypot(*vector)
    if length < 1e-150:  # too small to divide by without loss
        return unit(tuple(x * 1e200 for x in vector))
    return tuple(x / length for x in vector)


def scaled(vector: Vector, scale: float) -> Vector:
    """A vector in the study's unit, `scale` of which make one unit of the file."""
    return tuple(x * scale for x in vector)


def turns(form: TurnForm | tuple[TurnForm, ...] | None) -> tuple[Turn, ...]:
    """One turn, a list of them or none, as a list."""
    if form is None:
        return ()
    forms = (form,) if isinstance(form, TurnForm) else form
    return tuple(Turn(unit(each.axis), each.degrees) for each in forms)


def check_frame(normal: Vector, across: Vector, place: Place, key: str) -> None:
    """Raises UserError where normal and across lie along one line."""
    (a, b, c), (x, y, z) = unit(normal), unit(across)
    if math.hypot(b * z - c * y, c * x - a * z, a * y - b * x) < _PARALLEL:
        raise place.error(key, "is parallel to normal; it must run along the plane")
