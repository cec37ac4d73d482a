"""Aligned columns of plain text, at most so wide."""

import re
import textwrap
from collections.abc import Sequence

WIDTH = 80
_NO_BREAK = "\u00a0"
_BETWEEN_DIGITS = re.compile(r"(?<=\d) (?=\d{3}\b)")  # 65 536 is one word
GAP = 2


def lay_out(
    rows: Sequence[Sequence[str]], align: str, elastic: int = 0, width: int = WIDTH
) -> list[str]:
    """Lines of a table: each column as wide as its widest cell, two spaces between columns.

    rows: cells, all rows of equal length; the header, if any, is the first. align: "<" or ">" for
    each column. elastic: the column that is wrapped, with its further lines indented by two, when
    a line would be longer than `width`; it keeps at least 12 characters.
    """
    if not rows:
        return []
    widths = [max(len(row[i]) for row in rows) for i in range(len(align))]
    spare = width - (sum(widths) - widths[elastic] + GAP * (len(align) - 1))
    widths[elastic] = min(widths[elastic], max(12, spare))
    lines = []
    for row in rows:
        first, *rest = wrap(row[elastic], widths[elastic])
        lines.append(_line(row, first, align, widths, elastic))
        blank = [""] * len(row)
        lines.extend(_line(blank, more, align, widths, elastic) for more in rest)
    return lines


def wrap(text: str, width: int = WIDTH, indent: str = "  ") -> list[str]:
    """Break at spaces, and inside a word only where it must; further lines are indented."""
    whole = _BETWEEN_DIGITS.sub(_NO_BREAK, text)
    lines = textwrap.wrap(whole, width, subsequent_indent=indent, break_on_hyphens=False)
    return [line.replace(_NO_BREAK, " ") for line in lines] or [""]


def _line(row, wrapped: str, align: str, widths: list[int], elastic: int) -> str:
    cells = [wrapped if i == elastic else cell for i, cell in enumerate(row)]
    padded = [f"{c:{a}{w}}" for c, a, w in zip(cells, align, widths, strict=True)]
    return (" " * GAP).join(padded).rstrip()
