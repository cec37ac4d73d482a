"""Which colour is which path."""

import textwrap

from lumentrace.report.lines import CAUTION
from lumentrace.units import format_with_error
from lumentrace_viz.marks import COLOURS
from lumentrace_viz.page import FAINT, LINE, SIDE, WIDTH, Page
from lumentrace_viz.ways import Drawn

_LETTERS = 170  # in a line
_SHARE, _PATH = SIDE + 60, SIDE + 240
_FOOT = 24


def legend_height(drawn: list[Drawn]) -> int:
    return _FOOT + LINE * (1 + sum(len(_lines(path)) for path in drawn))


def write_legend(page: Page, drawn: list[Drawn]) -> None:
    """Colour, share and steps of each path at the foot of a page."""
    y = legend_height(drawn) - LINE
    page.text(WIDTH - SIDE, y, CAUTION, color=FAINT, size=10, ha="right")
    if not drawn:
        page.text(SIDE, y, "No path to a detector.")
        return
    page.text(_SHARE, y, "share at detector", color=FAINT, size=10)
    page.text(_PATH, y, "path", color=FAINT, size=10)
    for colour, path in zip(COLOURS, drawn, strict=False):
        lines = _lines(path)
        page.sheet.plot([SIDE, SIDE + 44], [y - LINE + 5] * 2, color=colour, lw=4)
        page.text(_SHARE, y - LINE, _share(path))
        for line in lines:
            y -= LINE
            page.text(_PATH, y, line)


def _lines(path: Drawn) -> list[str]:
    """The path as text, broken between steps."""
    steps = (step.replace(" ", "\N{NO-BREAK SPACE}") for step in path.row.text.split(", "))
    return textwrap.wrap(", ".join(steps), _LETTERS)


def _share(path: Drawn) -> str:
    row = path.row
    error = None if row.share_error is None else 100.0 * row.share_error
    numbers = [n for n in format_with_error(100.0 * (row.share or 0.0), error) if n]
    return " ± ".join(numbers) + " %"
