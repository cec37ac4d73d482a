"""The sheet of a picture: title, frame, legend, labels; the look that all pictures share."""

import os
import warnings
from pathlib import Path

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from lumentrace.errors import UserError
from lumentrace.units import plain

WIDTH = 1600
SIDE = 50  # free at the left and at the right
LINE = 24  # height of a line of text
INK, FAINT, NOT_HIT = "#111827", "#6b7280", "#d1d5db"
MAP_COLOURS = "inferno"  # perceptually uniform; dark is dark
_DPI = 100
_NO_GLYPH = "Glyph .* missing from font|Matplotlib currently does not support .* natively"


class Page:
    """A figure measured in pixels from its lower left corner."""

    def __init__(self, height: int, title: str, subtitle: str):
        self.height = height
        self.figure = Figure(figsize=(WIDTH / _DPI, height / _DPI), dpi=_DPI, facecolor="white")
        FigureCanvasAgg(self.figure)
        self.sheet = self.axes(0, 0, WIDTH, height)
        self.sheet.set(xlim=(0, WIDTH), ylim=(0, height))
        self.sheet.axis("off")
        self.text(SIDE, height - 46, fitting(title, 100), size=17, weight="bold")
        self.text(SIDE, height - 76, subtitle, size=11, color=FAINT)

    def axes(self, x: float, y: float, width: float, height: float):
        """A frame at this place."""
        size = np.array([WIDTH, self.height] * 2)
        axes = self.figure.add_axes(tuple(np.array([x, y, width, height]) / size))
        axes.tick_params(labelsize=10, color=FAINT, labelcolor=INK)
        for side in axes.spines.values():
            side.set_edgecolor(FAINT)
        return axes

    def text(self, x: float, y: float, text: str, size: float = 11, color: str = INK, **keys):
        keys = {"va": "baseline", "parse_math": False, **keys}
        return self.sheet.text(x, y, text, size=size, color=color, **keys)

    def scale_bar(self, place, scale, label: str):
        """Colours of a map with their unit; place: x, y, width, height."""
        axes = self.axes(*place)
        bar = self.figure.colorbar(scale, cax=axes, format=lambda value, _: plain(value))
        bar.outline.set_edgecolor(FAINT)
        axes.set_title(label, size=11, color=INK, loc="left", pad=10)

    def save(self, path: Path) -> Path:
        """Write under a temporary name, then move: whole or not at all. Raises UserError."""
        aside = path.with_name(f".{path.name}.{os.getpid()}.part")
        try:
            with warnings.catch_warnings():
                # A letter that the font lacks shows as a box; that is all there is to know.
                warnings.filterwarnings("ignore", _NO_GLYPH)
                self.figure.savefig(aside, format="png", metadata={"Software": None})
            aside.replace(path)
        except OSError as error:
            raise UserError(f"{path}: cannot be written: {error.strerror or error}") from error
        finally:
            aside.unlink(missing_ok=True)
        return path


def fitting(text: str, most: int) -> str:
    """Text of at most so many letters, its middle left out where it is longer."""
    if len(text) <= most:
        return text
    half = (most - 3) // 2
    return f"{text[:half]} … {text[-half:]}"
