"""The account as a table and as JSON, and the rays that were lost."""

from collections import Counter
from collections.abc import Container

from lumentrace.analysis.account import Account, Flow
from lumentrace.report.lines import FEW_REMARK, few_mark, plural
from lumentrace.report.table import lay_out, wrap
from lumentrace.run.run import Run
from lumentrace.units import format_with_error, grouped, plain


def account_json(account: Account) -> dict:
    """In W, with effective numbers of contributions; emitted is the sum of the rest."""
    return {
        "emitted": _flow_json(account.emitted),
        "detected": _flow_json(account.detected),
        "absorbed": {name: _flow_json(flow) for name, flow in account.absorbed.items()},
        "escaped": _flow_json(account.escaped),
        "cut_off": _flow_json(account.cut_off),
        "unresolved": _flow_json(account.unresolved),
        "sampling": _flow_json(account.sampling),
    }


def _flow_json(flow: Flow) -> dict:
    return {"value": flow.value, "error": flow.error, "effective": flow.effective}


def account_lines(account: Account, in_lumens: bool, clear: Container[str] = ()) -> list[str]:
    """Where the light went, largest first, what chance did to the sum, and how well it closes.

    in_lumens: in lm where the account has lumens; else in W. clear: rows that can absorb nothing,
    of which it is no news.
    """
    in_lumens = in_lumens and account.emitted.lumens is not None
    unit = "lm" if in_lumens else "W"
    ways = {"detected": account.detected, **account.absorbed, "escaped": account.escaped}
    hit = {name: flow for name, flow in ways.items() if flow.error is not None}
    rows = [[_head(account, in_lumens), unit, "error", "%", ""]]
    for name, flow in sorted(hit.items(), key=lambda item: -item[1].value):
        rows.append([name, *_cells(flow, in_lumens)])
    for name in ("cut_off", "unresolved", "sampling"):
        flow = getattr(account, name)
        if flow.error is not None:
            rows.append([_LABELS[name], *_cells(flow, in_lumens)])
    lines = lay_out(rows, "<>>><")
    unhit = [n for n, flow in account.absorbed.items() if flow.error is None and n not in clear]
    if unhit:
        lines += wrap(f"Nothing absorbed: {', '.join(unhit)}.")
    if account.cut_off.error is None and account.unresolved.error is None:
        lines.append("No light was cut off, none is unresolved.")
    lines.append(f"Sum less emitted: {account.closure:.0e} of the emitted.")
    if any(row[-1] for row in rows):
        lines.append(FEW_REMARK)
    return lines


_LABELS = {
    "cut_off": "cut off",
    "unresolved": "unresolved",
    "sampling": "sampling (chance, zero on average)",
}


def _head(account: Account, in_lumens: bool) -> str:
    watts = f"{account.emitted.value:.4g} W"
    return (
        f"{plain(account.emitted.lumens)} lm ({watts}) went to"
        if in_lumens
        else (f"{watts} went to")
    )


def _cells(flow: Flow, in_lumens: bool) -> list[str]:
    value, error = (flow.lumens, flow.lumens_error) if in_lumens else (flow.value, flow.error)
    share = round(100.0 * flow.share, 2) + 0.0  # no "-0.00"
    return [*format_with_error(value, error), f"{share:.2f}", few_mark(flow.effective)]


def lost_json(run: Run) -> dict:
    """How many rays were lost, and those that were kept: number, reason, flux in W, place, tag."""
    return {"count": run.data.attrs["lost_count"], "rays": _lost_rays(run)}


def _lost_rays(run: Run) -> list[dict]:
    node = run.node("lost")
    reasons, tags = node["reason"].values.tolist(), node["tag"].values.tolist()
    columns = (node[name].values.tolist() for name in _LOST)
    return [
        {
            "ray": ray,
            "reason": reasons[reason],
            "flux": weight,
            "place": [x, y, z],
            "tag": tags[tag] if tag >= 0 else None,
        }
        for ray, reason, weight, x, y, z, tag in zip(*columns, strict=True)
    ]


_LOST = ("ray", "reason_id", "weight", "x", "y", "z", "tag_id")


def lost_lines(run: Run) -> list[str]:
    """Which rays could not be followed to their end, and why; [] if there are none."""
    count = int(run.data.attrs["lost_count"])
    if not count:
        return []
    rays = _lost_rays(run)
    first = "" if len(rays) == count else f"; of the first {grouped(len(rays))}"
    lines = wrap(f"{plural(count, 'ray')} could not be followed to the end{first}:")
    reasons = Counter((ray["reason"], ray["tag"]) for ray in rays)
    rows = [[f"  {grouped(n)}", reason, tag or ""] for (reason, tag), n in reasons.most_common(8)]
    return [*lines, *lay_out(rows, "><<", elastic=1)]
