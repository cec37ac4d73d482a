"""Where something stands in a file, so that every message can name file, line and key."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from lumentrace.errors import UserError

Route = tuple[str | int, ...]  # from the top of a file: ("part", 0, "pick", "box")


def one_line(text: str) -> str:
    """The text with every character escaped that a terminal would not print on one line."""
    return "".join(c if c.isprintable() else repr(c)[1:-1] for c in text)


def fault(file: str, line: int | None, key: str, text: str) -> UserError:
    """The error ``file:line: key: text``; line and key are left out where there is none."""
    where = file if line is None else f"{file}:{line}"
    return UserError(one_line(": ".join(part for part in (where, key, text) if part)))


@dataclass(frozen=True)
class Place:
    """A table of a scene file and the lines of its keys."""

    file: Path  # absolute
    lines: Mapping[str, int]  # of its keys: "finish", "finish.rim", "pick.0.box"
    line: int  # of the table's own head
    name: str = ""  # the table as messages name it: "part.cover"
    shown: str = ""  # the file as messages name it: relative to the folder of the study's file

    def line_of(self, key: str = "") -> int:
        """Line of a key; of what holds it where the key itself is not written."""
        while key and key not in self.lines:
            key = key.rpartition(".")[0]
        return self.lines.get(key, self.line)

    def at(self, key: str = "") -> str:
        """``tray.toml:15``, where the key (or else its table) stands."""
        return f"{self.shown or self.file.name}:{self.line_of(key)}"

    def error(self, key: str, text: str) -> UserError:
        """The error to raise: ``tray.toml:15: part.tray.finish: text``."""
        steps = (self.name, *key.split("."))  # a list's entry is found by its line
        named = ".".join(step for step in steps if step and not step.isdecimal())
        return fault(self.shown or self.file.name, self.line_of(key), named, text)


class Positions:
    """The line of every key, table and array element of one file."""

    def __init__(self) -> None:
        self.lines: dict[Route, int] = {}
        self.repeated: tuple[Route, int] | None = None  # the first key that stands twice
        self._below: dict[Route, dict[str, int]] = {}

    def record(self, route: Route, line: int) -> None:
        """Note where a route is first written, in the order of the file."""
        if route in self.lines:
            return
        self.lines[route] = line
        for cut in range(len(route)):
            key = ".".join(str(step) for step in route[cut:])
            self._below.setdefault(route[:cut], {}).setdefault(key, line)

    def line_of(self, route: Route) -> int:
        """Line of a route; of what holds it where it is not written itself; 1 for the file."""
        while route and route not in self.lines:
            route = route[:-1]
        return self.lines.get(route, 1)

    def below(self, route: Route) -> Mapping[str, int]:
        """Lines of all that stands in a table, by dotted key."""
        return self._below.get(route, {})
