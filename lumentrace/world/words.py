"""How messages write numbers of things, and points."""

import numpy as np


def counted(n: int, one: str, many: str | None = None) -> str:
    """A number with its noun: ``1 face``, ``3 faces``."""
    return f"{n} {one}" if n == 1 else f"{n} {many or one + 's'}"


def shown_point(point) -> str:
    """A point, (3,): ``(1.5, 0, -2)``."""
    return "(" + ", ".join(f"{x:.6g}" for x in np.asarray(point) + 0.0) + ")"
