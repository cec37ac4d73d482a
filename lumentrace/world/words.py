"""How messages write places, numbers of things, and points."""

from typing import Literal

import numpy as np

from lumentrace.errors import Notice
from lumentrace.scene.place import Place


def counted(n: int, one: str, many: str | None = None) -> str:
    """A number with its noun: ``1 face``, ``3 faces``."""
    return f"{n} {one}" if n == 1 else f"{n} {many or one + 's'}"


def shown_point(point) -> str:
    """A point, (3,): ``(1.5, 0, -2)``."""
    return "(" + ", ".join(f"{x:.6g}" for x in np.asarray(point) + 0.0) + ")"


def notice(kind: Literal["told", "doubtful"], place: Place, key: str, text: str) -> Notice:
    """A remark on a table of the scene file: ``tray.toml:15: part.tray.mesh: text``."""
    return Notice(kind, f"{place.at(key)}: {place.name}.{key}: {text}")
