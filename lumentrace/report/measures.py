"""Measures and limits as a table and as JSON."""

from collections.abc import Iterable

from lumentrace.analysis.measures import CELL_NOT_HIT, FEW_NOTE, NOT_HIT, Measure
from lumentrace.report.table import lay_out, wrap
from lumentrace.units import format_with_error, plain

_SPLIT = "_split"
_OPEN = "open: unseen"
_OF_CELLS = ("min", "max", "uniformity")
_CELL_NOTES = (
    "Minima of noisy cells come out low, maxima high; their errors are those of one cell. Those "
    "by halves lean the other way: the cell is chosen on one half of the rays, valued on the other."
)
_NOT_HIT_NOTE = "Not hit is not zero: with 95 % confidence the truth is below the bound given."
_CELL_NOT_HIT_NOTE = "Cell not hit: light reached the detector, but not that one of its cells."
_UNSEEN_NOTE = "unseen: the most that light cut off or unresolved could change the value."
_OPEN_NOTE = "open: unseen light could move the value across that limit."


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
    """Each limit with the value measured, how far unseen light could change it, and its distance
    in standard errors, inside above 0."""
    found = []
    for limit in limits:
        m = measures[limit["measure"]]
        facts = {"value": m.value, "error": m.error, "unseen": m.unseen}
        found.append({**limit, **facts, "distance": distance(m, limit)})
    return found


def distance(measure: Measure, limit: dict) -> float | None:
    """How many standard errors a value lies inside its limit (below 0: beyond it), to the nearer
    of two bounds. None where there is no error to count in.
    """
    if measure.value is None or not measure.error:
        return None
    return min(room for _, _, room in _bounds(measure, limit)) / measure.error


def _bounds(measure: Measure, limit: dict) -> list[tuple[str, float, float | None]]:
    """(key, bound, distance from the value to it, inside above 0) of the bounds that are given."""
    value, found = measure.value, []
    for key, side in (("at_least", 1.0), ("at_most", -1.0)):
        bound = limit[key]
        if bound is not None:
            found.append((key, bound, None if value is None else side * (value - bound)))
    return found


def _distance_text(measure: Measure, key: str, room: float | None) -> str:
    if measure.error is None or room is None:
        return "unknown"
    if _is_open(measure, key, room):
        return _OPEN
    side = "inside" if room >= 0.0 else "beyond"
    if not measure.error:
        return f"{side}, no error"
    return f"{plain(float(f'{abs(room) / measure.error:.3g}'))} {side}"


def _is_open(measure: Measure, key: str, room: float) -> bool:
    """Whether light that was not seen could put the value on the other side of the bound.

    Such light adds to every value but a uniformity, which it may raise or lower.
    """
    either_way = measure.unit == "1"
    could_cross = either_way or (room >= 0.0) == (key == "at_most")
    return could_cross and measure.unseen > 0.0 and measure.unseen >= abs(room)


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
    rows = [["measure", "value", "error", "unit", "unseen", "errors away"]]
    for m in shown:
        rows.append([*_number_cells(m), ""])
        for limit in by_measure.get(m.name, []):
            rows.extend(_limit_row(m, *bound) for bound in _bounds(m, limit))
    keep = [True, True, True, True, with_unseen, bool(limits)]
    rows = [[cell for cell, kept in zip(row, keep, strict=True) if kept] for row in rows]
    align = "".join(a for a, kept in zip("<>><>>", keep, strict=True) if kept)
    remarks = _remarks(shown, with_unseen, rows)
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
        unhit = CELL_NOT_HIT if CELL_NOT_HIT in m.note else NOT_HIT
        return [label, unhit, f"< {m.upper:.2g}" if m.upper is not None else "", unit, unseen]
    return [label, *format_with_error(m.value, m.error), unit, unseen]


def _limit_row(m: Measure, key: str, bound: float, room: float | None) -> list[str]:
    """Beneath the row of its measure: the bound in the column of values."""
    return [f"  {key.replace('_', ' ')}", plain(bound), "", "", "", _distance_text(m, key, room)]


def _remarks(shown: list[Measure], with_unseen: bool, rows: list[list[str]]) -> list[str]:
    remarks = []
    if any(m.name.endswith(_SPLIT) for m in shown):
        remarks.append(_CELL_NOTES)
    if any(m.error is None and m.upper is not None for m in shown):
        remarks.append(_NOT_HIT_NOTE)
    unbound = [m.name for m in shown if m.error is None and m.upper is None]
    if unbound:
        remarks.append(f"Not hit, and no bound is proven: {', '.join(unbound)}.")
    if any(CELL_NOT_HIT in m.note for m in shown):
        remarks.append(_CELL_NOT_HIT_NOTE)
    few = [m.name for m in shown if FEW_NOTE in m.note]
    if few:
        remarks.append(f"{FEW_NOTE.capitalize()}, so that errors are rough: {', '.join(few)}.")
    if with_unseen:
        remarks.append(_UNSEEN_NOTE)
    if any(row[-1] == _OPEN for row in rows):
        remarks.append(_OPEN_NOTE)
    return [line for remark in remarks for line in wrap(remark, indent="")]
