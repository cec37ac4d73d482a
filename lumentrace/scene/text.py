"""Bytes of a scene file -> plain TOML data with the line of every key.

tomllib parses. Where it refuses, the commonest slips get a message that says what to type instead.
"""

import re
import tomllib
from dataclasses import dataclass
from typing import Any

from lumentrace.errors import UserError
from lumentrace.scene.place import Positions, Route, fault
from lumentrace.scene.scan import scan

LISTS = ("part", "source", "detector", "limit", "tag")  # what stands under [[double brackets]]
_BOM = b"\xef\xbb\xbf"
_WHERE = re.compile(r" \(at (?:line (\d+), column (\d+)|end of document)\)$")
_TEXTS = re.compile(r'"(?:[^"\\]|\\.)*"|' + r"'[^']*'|#.*")


@dataclass(frozen=True)
class Toml:
    data: dict[str, Any]
    positions: Positions
    had_bom: bool  # a byte-order mark was stripped


def parse(raw: bytes, shown: str) -> Toml:
    """The data of a file that messages call `shown`. Raises UserError."""
    had_bom = raw.startswith(_BOM)
    text = _decoded(raw.removeprefix(_BOM), shown)
    try:
        return Toml(tomllib.loads(text), scan(text), had_bom)
    except tomllib.TOMLDecodeError as error:
        raise _explained(text, str(error), shown) from None
    except RecursionError:
        raise fault(shown, None, "", "brackets are nested too deeply") from None
    except ValueError:  # Python's own limit
        raise fault(shown, None, "", "a whole number has too many digits") from None


def _decoded(raw: bytes, shown: str) -> str:
    try:
        return raw.decode("utf-8").replace("\r\n", "\n")
    except UnicodeDecodeError as error:
        line = raw.count(b"\n", 0, error.start) + 1
        found = f"found byte 0x{raw[error.start]:02x}; a scene file is text in UTF-8"
        raise fault(shown, line, "", found) from None


def _explained(text: str, message: str, shown: str) -> UserError:
    """The error for what tomllib refused with this message."""
    where = _WHERE.search(message)
    message = _WHERE.sub("", message)
    lines = text.split("\n")
    if where and where[1]:
        line, column = int(where[1]), int(where[2]) - 1
    else:
        line = len(text.rstrip("\n").split("\n"))
        column = len(lines[line - 1])
    written = lines[line - 1]
    for trap in (_repeated, _backslash, _bare_point, _broken_inline_table):
        found = trap(text, message, written, column)
        if found is not None:
            return fault(shown, found[0] or line, found[1], found[2])
    return fault(shown, line, "", f"not TOML: {message[:1].lower()}{message[1:]}")


_Explanation = tuple[int | None, str, str] | None  # line where another is better, key, text


def _repeated(text: str, message: str, written: str, column: int) -> _Explanation:
    """A key or table that stands twice, and single brackets among double ones."""
    if not message.startswith(("Cannot", "Duplicate")):
        return None
    positions = scan(text)
    if positions.repeated is None:
        return _added(written, positions)
    route, line = positions.repeated
    first = positions.lines[route]
    key = _dotted(route)
    head = _head_at(text, line)
    if head and route[-1] in LISTS and "[[" not in (head, _head_at(text, first)):
        return line, key, f"write [[{key}]]: each has a head of its own, in double brackets"
    if head and route[-1] in LISTS:
        single = line if head == "[" else first
        return single, key, f"found [{key}]; write [[{key}]], in double brackets"
    return line, key, f"stands twice, first at line {first}"


def _added(written: str, positions: Positions) -> _Explanation:
    """What is no repetition but cannot be added: mostly a part below its own ``[[part.tag]]``."""
    if not written.strip().startswith("[[part]]") or ("part", "tag") not in positions.lines:
        return None, "", "adds to a table or a value that is complete where it was written"
    line = positions.lines["part", "tag"]
    return line, "part.tag", "a tag belongs to the [[part]] above it, and there is none"


def _head_at(text: str, line: int) -> str:
    """The opening brackets of the line, or nothing."""
    return re.match(r"\s*(\[{0,2})", text.split("\n")[line - 1])[1]


def _dotted(route: Route) -> str:
    return ".".join(step for step in route if isinstance(step, str))


def _backslash(text: str, message: str, written: str, column: int) -> _Explanation:
    """An escape that TOML does not know: mostly a path typed with backslashes."""
    if "\\' in a string" not in message and "hex value" not in message:
        return None
    return None, "", "found a backslash in quotes; write paths with / between folders"


def _bare_point(text: str, message: str, written: str, column: int) -> _Explanation:
    """A number that begins or ends with its point."""
    for match in re.finditer(r"(?<![\w.+-])([+-]?)(\d*)\.(\d*)(?![\w.])", written):
        before, after = match[2], match[3]
        if match.start() <= column <= match.end() and bool(before) != bool(after):
            number = f"{match[1]}{before or 0}.{after or 0}"
            return None, "", f"found {match[0]}; write {number}, with a digit on either side"
    return None


def _broken_inline_table(text: str, message: str, written: str, column: int) -> _Explanation:
    """A line that ends inside curly brackets."""
    bare = _TEXTS.sub("", written).rstrip()
    if column < len(bare) or bare.count("{") <= bare.count("}"):
        return None
    return None, "", "a table in { } must end on the line where it begins"
