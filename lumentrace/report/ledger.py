"""What `ledger` says of a run: the paths to each detector, strongest first."""

from pathlib import Path

from lumentrace.analysis.ledger import PathRow, paths
from lumentrace.analysis.unseen import unseen_of
from lumentrace.report.lines import CAUTION, FEW_REMARK, few_mark, head, plural, run_line
from lumentrace.report.table import WIDTH, lay_out
from lumentrace.run.run import Run
from lumentrace.units import format_with_error, grouped

TOP = 10
_INDENT = 5


def ledger_json(run: Run, path: Path, detector: str | None, top: int | None) -> dict:
    """All paths, or the `top` strongest to each detector. UserError for an unknown detector."""
    return {
        "scene": run.data.attrs["scene"],
        "file": str(path),
        "rays": run.rays,
        "seed": run.seed,
        "paths": [
            {
                "detector": row.detector,
                "source": row.source,
                "path": None if row.source is None else [list(step) for step in row.steps],
                "flux": row.flux,
                "error": row.error,
                "unit": row.unit,
                "share": row.share,
                "share_error": row.share_error,
                "upper": row.upper,
                "count": row.count,
                "effective": row.effective,
                "reflections": row.reflections,
                "scatters": row.scatters,
                "length": row.length,
                "arrival_ns": row.arrival,
            }
            for name in _wanted(run, detector)
            for row in paths(run, name)[:top]
        ],
    }


def ledger_text(run: Run, path: Path, detector: str | None, top: int | None) -> str:
    """The `top` strongest paths to each detector, each on lines of its own, 80 columns wide."""
    opening = [
        *head(run.data.attrs["scene"], run.title),
        run_line(run, path),
    ]
    blocks = [opening]
    blocks += [_detector(run, name, top or TOP) for name in _wanted(run, detector)]
    if not run.detectors:
        blocks.append(["The scene has no detector."])
    few = any(line.endswith("few") for block in blocks for line in block)
    blocks.append([FEW_REMARK, CAUTION] if few else [CAUTION])
    return "\n\n".join("\n".join(block) for block in blocks) + "\n"


def _wanted(run: Run, detector: str | None) -> tuple[str, ...]:
    if detector is None:
        return run.detectors
    run.detector(detector)  # refuses an unknown one
    return (detector,)


def _detector(run: Run, name: str, top: int) -> list[str]:
    rows = paths(run, name)
    if not rows:
        return [f"{name}: no light arrived.", *_unseen(run, name)]
    shown = rows[:top]
    share = sum(row.share or 0.0 for row in shown)
    unit = shown[0].unit
    found = f"{name}: {plural(sum(row.source is not None for row in rows), 'path')}"
    if len(shown) < len(rows):
        found += f"; the strongest {len(shown)} bring {100 * share:.3g} % of its light"
    header = ["#", f"flux {unit}", "error", "share %", "error", "arrivals", ""]
    table = lay_out([header, *(_cells(i, row) for i, row in enumerate(shown, 1))], ">>>>>><")
    lines = [f"{found}.", table[0]]
    for numbers, row in zip(table[1:], shown, strict=True):
        lines += [numbers, *_steps(row)]
    return [*lines, *_unseen(run, name)]


def _unseen(run: Run, name: str) -> list[str]:
    """The most that lost light could add to a detector."""
    most = unseen_of(run, name).flux
    unit = run.detector(name).attrs["flux_unit"]
    told = f"Light cut off or unresolved could add up to {most:.2g} {unit} here."
    return [told] if most > 0.0 else []


def _cells(number: int, row: PathRow) -> list[str]:
    share, share_error = "", ""
    if row.share is not None:
        error = None if row.share_error is None else 100.0 * row.share_error
        share, share_error = format_with_error(100.0 * row.share, error)
    return [
        str(number),
        *format_with_error(row.flux, row.error),
        share,
        share_error,
        grouped(row.count),
        few_mark(row.effective),
    ]


def _steps(row: PathRow) -> list[str]:
    """The path, broken between steps."""
    lines, line = [], ""
    for step in row.text.split(", "):
        longer = f"{line}, {step}" if line else step
        if line and len(longer) + 1 > WIDTH - _INDENT:
            lines.append(f"{line},")
            line = step
        else:
            line = longer
    return [" " * _INDENT + part for part in (*lines, line)]
