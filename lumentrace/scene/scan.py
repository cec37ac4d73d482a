"""The line of every key of a TOML file. tomllib stays the parser: this finds positions only.

The scanner trusts its text to be valid TOML. Where it is not, it ends at the first thing it
cannot read and keeps what it found before.
"""

import re
import tomllib
from bisect import bisect_right
from contextlib import suppress

from lumentrace.scene.place import Positions, Route

_BLANK = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_SPACE = re.compile(r"[ \t]*")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_QUOTED_KEY = re.compile(r'"(?:[^"\\\n]|\\.)*"|' + r"'[^'\n]*'")
# A multi-line string may end in up to two quotes of its own before the three that close it.
_STRING = re.compile(
    r'"""(?:[^\\]|\\.)*?"""(?:"{0,2})|' + r"'''.*?'''(?:'{0,2})|" + _QUOTED_KEY.pattern, re.DOTALL
)
_SCALAR = re.compile(r"[^,\]}#\n]+")  # numbers, dates, words: the rest of a statement or item


class _Unreadable(Exception):
    """The text is not valid TOML here."""


def scan(text: str) -> Positions:
    """Positions of everything in the text, which has "\\n" as its only line end."""
    scanner = _Scanner(text)
    with suppress(_Unreadable):  # tomllib has said, or will say, what is wrong
        scanner.file()
    return scanner.positions


class _Scanner:
    def __init__(self, text: str) -> None:
        self.text = text
        self.at = 0
        self.positions = Positions()
        self._starts = [0] + [match.end() for match in re.finditer("\n", text)]
        self._written: dict[Route, int] = {}  # keys and tables that may stand only once
        self._length: dict[Route, int] = {}  # of arrays of tables

    def file(self) -> None:
        table: Route = ()
        while self._skip(_BLANK) < len(self.text):
            if self.text.startswith("[", self.at):
                table = self._head()
            else:
                self._pair(table)

    def _skip(self, pattern: re.Pattern) -> int:
        self.at = pattern.match(self.text, self.at).end()
        return self.at

    def _take(self, pattern: re.Pattern) -> str:
        match = pattern.match(self.text, self.at)
        if match is None:
            raise _Unreadable
        self.at = match.end()
        return match.group()

    def _sees(self, word: str) -> bool:
        """Whether the word stands here; then it is passed."""
        found = self.text.startswith(word, self.at)
        self.at += len(word) * found
        return found

    def _expect(self, word: str) -> None:
        if not self._sees(word):
            raise _Unreadable

    def _line(self, at: int) -> int:
        return bisect_right(self._starts, at)

    def _once(self, route: Route, line: int) -> None:
        """Note a key or table that may stand only once."""
        if route in self._written and self.positions.repeated is None:
            self.positions.repeated = (route, line)
        self._written[route] = line

    def _key(self) -> list[tuple[str, int]]:
        """A dotted key: its parts, each with its line."""
        parts = []
        while True:
            self._skip(_SPACE)
            line = self._line(self.at)
            quoted = self.text[self.at : self.at + 1] in ('"', "'")
            token = self._take(_QUOTED_KEY if quoted else _BARE_KEY)
            parts.append((_unquoted(token) if quoted else token, line))
            self._skip(_SPACE)
            if not self._sees("."):
                return parts

    def _head(self) -> Route:
        """``[a.b]`` or ``[[a.b]]``: the route of the table that it opens."""
        self._expect("[")
        is_array = self._sees("[")
        parts = self._key()
        self._expect("]]" if is_array else "]")
        route: Route = ()
        for name, line in parts[:-1]:
            route = (*route, name)
            self.positions.record(route, line)
            if route in self._length:
                route = (*route, self._length[route] - 1)
        name, line = parts[-1]
        route = (*route, name)
        self.positions.record(route, line)
        if not is_array:
            self._once(route, line)
            return route
        if route not in self._length:
            self._once(route, line)
        index = self._length.get(route, 0)
        self._length[route] = index + 1
        self.positions.record((*route, index), line)
        return (*route, index)

    def _pair(self, table: Route) -> None:
        """``key = value`` in a table or an inline table."""
        route, line = table, 0
        for name, line in self._key():
            route = (*route, name)
            self.positions.record(route, line)
        self._once(route, line)
        self._expect("=")
        self._skip(_SPACE)
        self._value(route)

    def _value(self, route: Route) -> None:
        if self._sees("["):
            self._array(route)
        elif self._sees("{"):
            self._inline_table(route)
        elif self.text[self.at : self.at + 1] in ('"', "'"):
            self._take(_STRING)
        else:
            self._take(_SCALAR)

    def _array(self, route: Route) -> None:
        index = 0
        while True:
            self._skip(_BLANK)
            if self._sees("]"):
                return
            item = (*route, index)
            self.positions.record(item, self._line(self.at))
            self._value(item)
            index += 1
            self._skip(_BLANK)
            if not self._sees(","):
                self._expect("]")
                return

    def _inline_table(self, route: Route) -> None:
        while True:
            self._skip(_BLANK)
            if self._sees("}"):
                return
            self._pair(route)
            self._skip(_BLANK)
            if not self._sees(","):
                self._expect("}")
                return


def _unquoted(token: str) -> str:
    """The text of a quoted key, escapes resolved."""
    try:
        return tomllib.loads(f"key = {token}")["key"]
    except tomllib.TOMLDecodeError:
        raise _Unreadable from None
