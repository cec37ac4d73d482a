"""Single lines that several reports share."""

import os
from collections.abc import Iterable
from pathlib import Path

from lumentrace.analysis.samples import FEW
from lumentrace.errors import Notice
from lumentrace.report.table import wrap
from lumentrace.run.run import Run
from lumentrace.units import grouped, plain
from lumentrace.world.world import World


def plural(number: int, noun: str) -> str:
    """1 part, 2 parts, 15 485 rays."""
    return f"{grouped(number)} {noun}" if number == 1 else f"{grouped(number)} {noun}s"


def head(file: str, title: str) -> list[str]:
    """File and title of a study."""
    return wrap(f"{file}: {title}" if title else file)


def limit_text(at_least: float | None, at_most: float | None, unit: str) -> str:
    """at least 500 lx."""
    bounds = []
    if at_least is not None:
        bounds.append(f"at least {plain(at_least)}")
    if at_most is not None:
        bounds.append(f"at most {plain(at_most)}")
    return f"{', '.join(bounds)} {unit}".rstrip()


def notices_of(world: World) -> tuple[Notice, ...]:
    """All that reading the scene and building its world had to say."""
    return (*world.scene.notices, *world.notices)


def notice_lines(notices: Iterable[Notice]) -> list[str]:
    """Doubtful ones first."""
    ordered = sorted(notices, key=lambda n: n.kind != "doubtful")
    return [line for n in ordered for line in wrap(f"{n.kind}: {n.text}")]


def notices_json(notices: Iterable[Notice]) -> list[dict]:
    return [{"kind": n.kind, "text": n.text} for n in notices]


def shown_path(path: Path) -> str:
    """Relative to the working folder where it lies inside it."""
    relative = os.path.relpath(path)
    return str(path) if relative.startswith(os.pardir) else relative


def run_line(run: Run, path: Path) -> str:
    """Which run is meant."""
    return f"{shown_path(path)}: {grouped(run.rays)} rays, seed {run.seed}."


def few_mark(effective: float | None) -> str:
    """ "few" where so few contributions were counted that the error is rough; see FEW_REMARK."""
    return "few" if effective is not None and effective < FEW else ""


FEW_REMARK = f"few: fewer than {FEW:.0f} effective contributions, so that the error is rough."
CAUTION = "Simulated: confirm by measurement."
