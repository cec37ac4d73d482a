"""Measures and limits as a table and as JSON."""

from collections.abc import Iterable

from lumentrace.analysis.measures import FEW_NOTE, NOT_HIT, Measure
from lumentrace.report.lines import limit_text
from lumentrace.report.table import lay_out, wrap
from lumentrace.units import format_with_error, plain

_SPLIT = "_split"
_OF_CELLS = ("min", "max", "uniformity")
_CELL_NOTES = (
    "Minima of noisy cells come out low, maxima high; their errors are those of one cell. Those "
    "by halves lean the other way: the cell is chosen on one half of the rays, valued on the other."
)
_NOT_HIT_NOTE = "Not hit is not zero: with 95 % confidence the truth is below the bound given."
_UNSEEN_NOTE = "unseen: the most that light cut off or unresolved could change the value."


def measures_json(measures: dict[str, Measure]) -> dict:
    """By name: value, error, unit, upper, unseen, effective."""
    return {
        m.name: {
            "value": m.value,
            "error": m.error,
            "unit": m.unit,
            "upper": m.upper,
            "unseen": m.unseen,
            "effective": m.effective,
        }
        for m in measures.values()
    }


def limits_json(measures: dict[str, Measure], limits: list[dict]) -> list[dict]:
    """Each limit with the value measured and its distance in standard errors, inside above 0."""
    found = []
    for limit in limits:
        m = measures[limit["measure"]]
        found.append({**limit, "value": m.value, "error": m.error, "distance": distance(m, limit)})
    return found


def distance(measure: Measure, limit: dict) -> float | None:
    """How many standard errors a value lies inside its limit (below 0: beyond it).

    None where there is no error to count in.
    """
    room = _room(measure, limit)
    return room / measure.error if room is not None and measure.error else None


def _room(measure: Measure, limit: dict) -> float | None:
    """Distance to the nearer bound of a limit, in the measure's unit."""
    if measure.value is None:
        return None
    rooms = []
    if limit["at_least"] is not None:
        rooms.append(measure.value - limit["at_least"])
    if limit["at_most"] is not None:
        rooms.append(limit["at_most"] - measure.value)
    return min(rooms)


def _distance_text(measure: Measure, limit: dict) -> str:
    room = _room(measure, limit)
    if measure.error is None or room is None:
        return "unknown"
    side = "inside" if room >= 0.0 else "beyond"
    if not measure.error:
        return f"{side}, no error"
    return f"{plain(float(f'{abs(room) / measure.error:.3g}'))} {side}"


def measure_lines(
    measures: dict[str, Measure], limits: list[dict], single_cell: set[str]
) -> list[str]:
    """The table of what detectors counted and of all that has a limit, and its remarks.

    single_cell: detectors of one cell, whose minimum, maximum and uniformity tell nothing new.
    """
    by_measure: dict[str, list[dict]] = {}
    for limit in limits:
        by_measure.setdefault(limit["measure"], []).append(limit)
    names = [name for name in _paired(measures) if _is_shown(name, by_measure, single_cell)]
    shown = [measures[name] for name in names]
    if not shown:
        return []
    with_unseen = any(m.unseen > 0.0 for m in shown)
    rows = [["measure", "value", "error", "unit", "unseen", "limit", "errors away"]]
    for m in shown:
        first, *more = by_measure.get(m.name, [None])
        rows.append([*_number_cells(m), *_limit_cells(m, first)])
        rows.extend([""] * 5 + _limit_cells(m, limit) for limit in more)
    keep = [True, True, True, True, with_unseen, bool(limits), bool(limits)]
    rows = [[cell for cell, kept in zip(row, keep, strict=True) if kept] for row in rows]
    align = "".join(a for a, kept in zip("<>><><>", keep, strict=True) if kept)
    remarks = _remarks(shown, with_unseen)
    return [*lay_out(rows, align), *([""] if remarks else []), *remarks]


def _paired(names: Iterable[str]) -> list[str]:
    """Each name followed by its twin by halves."""
    names = list(names)
    whole = [name for name in names if not name.endswith(_SPLIT)]
    return [n for name in whole for n in (name, name + _SPLIT) if n in names]


def _is_shown(name: str, limited: dict, single_cell: set[str]) -> bool:
    subject, _, kind = name.rpartition(".")
    if name in limited:
        return True
    if kind in ("absorbed", "escaped"):  # the account shows them
        return False
    return subject not in single_cell or kind.removesuffix(_SPLIT) not in _OF_CELLS


def _number_cells(m: Measure) -> list[str]:
    label = "  by halves" if m.name.endswith(_SPLIT) else m.name
    unit = "" if m.unit == "1" else m.unit
    unseen = plain(float(f"{m.unseen:.1g}")) if m.unseen else ""
    if m.error is None:
        return [label, NOT_HIT, f"< {m.upper:.2g}" if m.upper is not None else "", unit, unseen]
    return [label, *format_with_error(m.value, m.error), unit, unseen]


def _limit_cells(m: Measure, limit: dict | None) -> list[str]:
    if limit is None:
        return ["", ""]
    return [limit_text(limit["at_least"], limit["at_most"], ""), _distance_text(m, limit)]


def _remarks(shown: list[Measure], with_unseen: bool) -> list[str]:
    remarks = []
    if any(m.name.endswith(_SPLIT) for m in shown):
        remarks.append(_CELL_NOTES)
    if any(m.error is None and m.upper is not None for m in shown):
        remarks.append(_NOT_HIT_NOTE)
    unbound = [m.name for m in shown if m.error is None and m.upper is None]
    if unbound:
        remarks.append(f"Not hit, and no bound is proven: {', '.join(unbound)}.")
    few = [m.name for m in shown if FEW_NOTE in m.note]
    if few:
        remarks.append(f"{FEW_NOTE.capitalize()}, so that errors are rough: {', '.join(few)}.")
    if with_unseen:
        remarks.append(_UNSEEN_NOTE)
    return [line for remark in remarks for line in wrap(remark, indent="")]
