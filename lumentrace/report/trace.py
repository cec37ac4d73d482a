"""What `trace` says when it is done."""

import shlex
from pathlib import Path

from lumentrace.analysis.account import account
from lumentrace.analysis.measures import Measure, measures
from lumentrace.report.account import account_json, account_lines, lost_json, lost_lines
from lumentrace.report.lines import (
    CAUTION,
    head,
    notice_lines,
    notices_json,
    notices_of,
    shown_path,
)
from lumentrace.report.measures import limits_json, measure_lines, measures_json
from lumentrace.report.table import wrap
from lumentrace.run.run import Run
from lumentrace.scene.model import BULK, UNCOATED
from lumentrace.units import grouped
from lumentrace.world.world import World


def trace_json(run: Run, path: Path, world: World) -> dict:
    """Measures, account, limits and what made them, as one object; flux in W in the account."""
    found = measures(run)
    return {
        "scene": run.data.attrs["scene"],
        "file": str(path),
        "rays": run.rays,
        "seed": run.seed,
        "measures": measures_json(found),
        "limits": limits_json(found, run.limits),
        "account": account_json(account(run)),
        "lost": lost_json(run),
        "notices": notices_json(notices_of(world)),
    }


def trace_text(
    run: Run, path: Path, world: World, asked: int | None, seconds: float, compiling: bool
) -> str:
    """The same for people, at most 80 columns wide.

    asked: rays asked for in place of the scene's. seconds: of tracing, `compiling` included or not.
    """
    found = measures(run)
    detectors = {name: run.detector(name) for name in run.detectors}
    single = {n for n, node in detectors.items() if node["value"].size == 1}
    in_lumens = any(node.attrs["counts"] == "illuminance" for node in detectors.values())
    lasted = _duration(seconds) + (", compiling included" if compiling else "")
    blocks = (
        [*head(run.data.attrs["scene"], run.title), *_traced(run, world, found, asked, lasted)],
        measure_lines(found, run.limits, single),
        account_lines(account(run), in_lumens, _clear(world)),
        lost_lines(run),
        notice_lines(n for n in notices_of(world) if n.kind == "doubtful"),
        [
            CAUTION,
            f"Written:  {shown_path(path)}",
            f"Paths:    lumentrace ledger {shlex.quote(shown_path(path))}",
            f"Pictures: lumentrace draw {shlex.quote(shown_path(path))}",
        ],
    )
    return "\n\n".join("\n".join(block) for block in blocks if block) + "\n"


def _traced(run: Run, world: World, found: dict[str, Measure], asked, lasted) -> list[str]:
    """How many rays, how long, and what ended it."""
    sentences = [f"{grouped(run.rays)} rays in {lasted}, seed {run.seed}."]
    until = world.scene.trace.until
    wanted = asked or world.scene.trace.rays
    if until is not None:
        measure = found[until.measure]
        goal = f"{100 * until.relative_error:g} %"
        if measure.error is None or not measure.value:
            sentences.append(f"Not known within {goal}: {until.measure}, which no light reached.")
        elif measure.error <= until.relative_error * abs(measure.value):
            sentences.append(f"Stopped: {until.measure} known within {goal}.")
        else:
            known = f"{100 * measure.error / abs(measure.value):.2g} %"
            sentences.append(f"Not within {goal}: {until.measure} is known within {known}.")
    elif wanted != run.rays:
        sentences.append(f"Rounded up from {grouped(wanted)} to whole rounds.")
    return wrap(" ".join(sentences))


def _clear(world: World) -> set[str]:
    """Rows of the account that can absorb nothing: uncoated tags and clear media."""
    media = world.scene.media
    tags = {tag.name for tag in world.tags if tag.finish == UNCOATED}
    filled = [p for p in world.parts if p.medium in media and not media[p.medium].absorption]
    return tags | {f"{p.name}:{BULK}" for p in filled}


def _duration(seconds: float) -> str:
    return f"{seconds:.1f} s" if seconds < 10 else f"{seconds:.0f} s"
