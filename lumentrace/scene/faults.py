"""What pydantic found wrong in a file -> the one line that a user reads."""

import re
from typing import Any

from pydantic import ValidationError

from lumentrace.errors import UserError, nearest
from lumentrace.scene.forms import LibraryForm, PartForm, SceneForm, StudyForm
from lumentrace.scene.place import Route, fault
from lumentrace.scene.text import LISTS, Toml

_NEEDED = {
    "float_type": "a number is needed",
    "finite_number": "a finite number is needed",
    "int_type": "a whole number is needed",
    "string_type": "text in quotes is needed",
    "bool_type": "true or false is needed",
    "tuple_type": "a list in [ ] is needed",
    "dict_type": "a table is needed",
    "model_type": "a table is needed",
    "greater_than": "must be above {gt:g}",
    "greater_than_equal": "must be at least {ge:g}",
    "less_than": "must be below {lt:g}",
    "less_than_equal": "must be at most {le:g}",
}


def first_fault(error: ValidationError, toml: Toml, shown: str) -> UserError:
    """The error that stands first in the file, as a user reads it."""
    found = [_Fault(item, toml.data) for item in error.errors(include_url=False)]
    first = min(found, key=lambda item: toml.positions.line_of(item.route))
    line = toml.positions.line_of(first.route)
    return fault(shown, line, name_of(first.route, toml.data), _text(first, found, toml))


def name_of(route: Route, data: Any) -> str:
    """How messages call what stands there: "part.cover.tag.rim.pick"."""
    words = []
    for step in route:
        data = _below(data, step)
        if isinstance(step, str):
            words.append(step)
        elif isinstance(data, dict) and isinstance(data.get("name"), str):
            words.append(data["name"])
    return ".".join(words)


def shown_value(value: Any) -> str:
    """A value as it may stand in a scene file, cut where it is long."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return f'"{value[:57]}..."' if len(value) > 60 else f'"{value}"'
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list):
        text = "[" + ", ".join(shown_value(item) for item in value[:8]) + "]"
        return text if len(value) <= 8 and len(text) <= 60 else f"a list of {len(value)} values"
    text = str(value)
    return text if len(text) <= 60 else f"{text[:57]}..."


class _Fault:
    """One of pydantic's errors with its route in the file's data."""

    def __init__(self, error: dict[str, Any], data: Any) -> None:
        self.kind: str = error["type"]
        self.about: dict[str, Any] = error.get("ctx", {})
        self.value = error["input"]
        self.message: str = error["msg"]
        route: list[str | int] = []
        for step in error["loc"]:
            if not _is_mark(step, data):
                route.append(step)
                data = _below(data, step)
        if "key" in self.about:
            route.append(self.about["key"])
        self.route: Route = tuple(route)


def _is_mark(step: str | int, data: Any) -> bool:
    """Whether a step is pydantic's name of one of several forms, not a key of the file."""
    is_key = isinstance(data, dict) and step in data
    return isinstance(step, str) and step.startswith("<") and not is_key


def _below(data: Any, step: str | int) -> Any:
    """What stands one step down; None where nothing does."""
    try:
        return data[step]
    except (KeyError, IndexError, TypeError):
        return None


def _text(first: _Fault, found: list[_Fault], toml: Toml) -> str:
    """What was found, and what is allowed."""
    kind, about, route = first.kind, first.about, first.route
    if kind == "unknown_key":
        return _unknown_key(route, about["known"], toml)
    if kind == "missing_key":
        return f"is missing ({about['needed'].rstrip('.')})"
    if kind in ("missing", "too_long", "too_short"):
        return _wrong_count(first, found)
    brackets = _wrong_brackets(first)
    if brackets:
        return brackets
    which = f"value {route[-1] + 1}: " if isinstance(route[-1], int) else ""
    value = f"{which}found {shown_value(first.value)}"
    if kind == "literal_error":
        allowed = ", ".join(f'"{word}"' for word in re.findall("'(.*?)'", about["expected"]))
        return f"{value}; allowed: {allowed}"
    if kind == "value_error":
        return f"{value}; {about['error']}"
    needed = _NEEDED[kind].format(**about) if kind in _NEEDED else first.message
    return f"{value}; {needed}"


def _unknown_key(route: Route, known: list[str], toml: Toml) -> str:
    key = str(route[-1])
    is_of_tag = len(route) == 5 and route[0] == "part" and route[2] == "tag"
    if is_of_tag and key in PartForm.model_fields:
        above = toml.positions.line_of((*route[:3], 0))
        return f"belongs to the part, not to its tag; move it above line {above}"
    only_in_study = SceneForm.model_fields.keys() - LibraryForm.model_fields.keys()
    if len(route) == 1 and key in only_in_study:
        return "only the study's own file may hold it, not an included one"
    if route[:-1] == ("study",) and key in StudyForm.model_fields:
        return "of [study] an included file may give only length and include"
    return f"unknown key; {nearest(key, known)}"


def _wrong_count(first: _Fault, found: list[_Fault]) -> str:
    """A list that is too short or too long."""
    about, route = first.about, first.route
    if first.kind == "missing":
        beside = [item.route for item in found if item.route[:-1] == route[:-1]]
        count, needed = route[-1], max(item[-1] for item in beside) + 1
    else:
        count = about["actual_length"]
        needed = about.get("max_length", about.get("min_length"))
    least = "at least " if first.kind == "too_short" else ""
    return f"found {count} value{'s' * (count != 1)}; needed: {least}{needed}"


def _wrong_brackets(first: _Fault) -> str | None:
    """Single brackets for double ones, and the reverse."""
    words = [step for step in first.route if isinstance(step, str)]
    key = ".".join(words)
    if first.kind == "tuple_type" and isinstance(first.value, dict) and words[-1] in LISTS:
        if key == "part" and list(first.value) == ["tag"]:
            return "a tag belongs to the [[part]] above it, and there is none"
        return f"found [{key}]; write [[{key}]], in double brackets"
    if first.kind in ("model_type", "dict_type") and isinstance(first.value, list):
        if len(first.route) == 1 and first.kind == "dict_type":
            return f"found [[{key}]]; write [{key}.NAME], in single brackets"
        if all(isinstance(item, dict) for item in first.value) and first.value:
            return f"found [[{key}]]; write [{key}], in single brackets"
    return None
