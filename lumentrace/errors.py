"""The one error a user meets, and the notices that do not stop the work."""

import difflib
from collections.abc import Iterable
from typing import Literal, NamedTuple


class UserError(Exception):
    """Something the user can put right: its text is one line, ready to print.

    The line names the file, the line, the key, what was found and what is allowed:
    ``linear.toml:15: part.cover.medium: no medium is named "pmna"; did you mean "pmma"?``
    """


class Notice(NamedTuple):
    """A remark that leaves the exit status at 0.

    kind: "told" for what was put right or taken in a way worth knowing, "doubtful" for what is
    legal but often a mistake. text: one line.
    """

    kind: Literal["told", "doubtful"]
    text: str


def nearest(name: str, known: Iterable[str]) -> str:
    """End of a message about an unknown name: the nearest valid one, or the valid ones."""
    known = sorted(known)
    close = difflib.get_close_matches(name, known, n=1, cutoff=0.6)
    if close:
        return f'did you mean "{close[0]}"?'
    if not known:
        return "none is defined"
    shown = ", ".join(f'"{k}"' for k in known[:8])
    return f"allowed: {shown}" + (f" and {len(known) - 8} more" if len(known) > 8 else "")
