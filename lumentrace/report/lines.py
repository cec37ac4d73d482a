"""Single lines that several reports share."""

from collections.abc import Iterable

from lumentrace.errors import Notice
from lumentrace.report.table import WIDTH, wrap
from lumentrace.units import plain


def plural(number: int, noun: str) -> str:
    """1 part, 2 parts."""
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def head(file: str, title: str) -> list[str]:
    """File and title of a study."""
    return wrap(f"{file}: {title}" if title else file, WIDTH)


def limit_text(at_least: float | None, at_most: float | None, unit: str) -> str:
    """at least 500 lx."""
    bounds = []
    if at_least is not None:
        bounds.append(f"at least {plain(at_least)}")
    if at_most is not None:
        bounds.append(f"at most {plain(at_most)}")
    return f"{', '.join(bounds)} {unit}".rstrip()


def notice_lines(notices: Iterable[Notice]) -> list[str]:
    """Doubtful ones first."""
    ordered = sorted(notices, key=lambda n: n.kind != "doubtful")
    return [line for n in ordered for line in wrap(f"{n.kind}: {n.text}", WIDTH)]


def notices_json(notices: Iterable[Notice]) -> list[dict]:
    return [{"kind": n.kind, "text": n.text} for n in notices]


CAUTION = "Simulated: confirm by measurement."
