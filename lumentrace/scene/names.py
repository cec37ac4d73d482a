"""Which names may be given, and the one set that parts, sources, groups and detectors share."""

import re

from lumentrace.scene.place import Place

NAME = r"^[A-Za-z][A-Za-z0-9_-]*$"
RULE = "a name is a letter, then letters, digits, _ or -"
RESERVED = ("default", "bulk", "account", "study", "surroundings")


def is_name(text: str) -> bool:
    return re.fullmatch(NAME[1:-1], text) is not None


def name_from_mesh(text: str) -> str:
    """The name by which a scene calls a tag of a mesh file: other characters become "_".

    A letter is put before what would begin with anything else.
    """
    name = re.sub(r"[^A-Za-z0-9_-]", "_", text)
    return name if is_name(name) else f"x{name}"


def check_name(kind: str, name: str, place: Place) -> None:
    """Raises UserError for a name that breaks the rule or is reserved."""
    if not is_name(name):
        raise place.error("name", f'found "{name}" as the name of a {kind}; {RULE}')
    if name in RESERVED:
        reserved = ", ".join(RESERVED)
        raise place.error("name", f'"{name}" is reserved (as are {reserved}); choose another name')


class NameBook:
    """The names taken so far."""

    def __init__(self) -> None:
        self._taken: dict[str, tuple[str, str]] = {}  # kind, where

    def take(self, kind: str, name: str, place: Place, key: str = "name") -> None:
        """Enter a name. Raises UserError where it is not allowed or is taken."""
        check_name(kind, name, place)
        if name in self._taken:
            other, where = self._taken[name]
            raise place.error(
                key,
                f'"{name}" already names a {other} at {where}; parts, sources, groups and '
                "detectors share one set of names",
            )
        self._taken[name] = (kind, place.at(key))
