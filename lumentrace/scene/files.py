"""A scene file and the files it includes, each read, parsed and checked on its own."""

import hashlib
import os
from dataclasses import dataclass
from pathlib import Path

from pydantic import ValidationError

from lumentrace import units
from lumentrace.errors import Notice
from lumentrace.scene.faults import first_fault, name_of
from lumentrace.scene.forms import LibraryForm, SceneForm
from lumentrace.scene.place import Place, fault
from lumentrace.scene.text import Toml, parse


@dataclass(frozen=True)
class SceneFile:
    """One file, checked."""

    path: Path  # absolute
    shown: str  # in messages: relative to the folder of the study's file
    raw: bytes
    toml: Toml
    form: LibraryForm

    def place(self, *route: str | int) -> Place:
        """The place of the table at a route: ``place("part", 0)``."""
        positions = self.toml.positions
        return Place(
            file=self.path,
            lines=positions.below(route),
            line=positions.line_of(route),
            name=name_of(route, self.toml.data),
            shown=self.shown,
        )


@dataclass(frozen=True)
class Files:
    """The study's own file first, then what it includes, depth first, each file once."""

    study: SceneFile
    form: SceneForm  # what the study's own file says
    all: tuple[SceneFile, ...]

    @property
    def digest(self) -> str:
        """sha256 over the bytes of all files, in their order."""
        whole = hashlib.sha256()
        for file in self.all:
            whole.update(hashlib.sha256(file.raw).digest())
        return whole.hexdigest()

    @property
    def notices(self) -> tuple[Notice, ...]:
        text = "begins with a byte-order mark; it was passed over"
        return tuple(Notice("told", f"{f.shown}: {text}") for f in self.all if f.toml.had_bom)

    def scale(self, file: SceneFile) -> float:
        """Study's units of length in one unit of the file's."""
        return units.ratio(file.form.study.length or self.form.study.length, self.length)

    @property
    def length(self) -> str:
        """The study's unit of length."""
        return self.form.study.length


def read_files(path: Path) -> Files:
    """Read a scene file and all it includes. Raises UserError."""
    try:
        raw = _bytes_of(path)
    except _Unreadable as reason:
        raise fault(str(path), None, "", str(reason)) from None
    path = path.absolute()
    file = _checked(path, path.name, raw, SceneForm)
    found = [file]
    _follow(file, (path.resolve(),), found)
    return Files(file, file.form, tuple(found))


def _follow(file: SceneFile, chain: tuple[Path, ...], found: list[SceneFile]) -> None:
    """Add to `found` what the file includes; `chain` leads from the study's file to this one."""
    for number, written in enumerate(file.form.study.include):
        place, key = file.place("study"), f"include.{number}"
        path = file.path.parent / written
        try:
            raw = _bytes_of(path)
        except _Unreadable as reason:
            raise place.error(key, f'"{written}" {reason}') from None
        real = path.resolve()
        if real in chain:
            raise place.error(key, f'"{written}" includes this file in its turn')
        if any(real == other.path.resolve() for other in found):
            continue  # two files may share a third
        shown = Path(os.path.relpath(path, found[0].path.parent)).as_posix()
        included = _checked(path, shown, raw, LibraryForm)
        found.append(included)
        _follow(included, (*chain, real), found)


class _Unreadable(Exception):
    """Why a file cannot be read, as a user reads it."""


def _bytes_of(path: Path) -> bytes:
    try:
        if path.exists() and not path.is_file() and not path.is_dir():
            raise _Unreadable("is not a file")  # a device may never end
        return path.read_bytes()
    except (FileNotFoundError, NotADirectoryError, ValueError):
        raise _Unreadable("does not exist") from None
    except IsADirectoryError:
        raise _Unreadable("is a folder; a file is needed") from None
    except OSError as error:
        raise _Unreadable(f"cannot be read: {error.strerror}") from None


def _checked(path: Path, shown: str, raw: bytes, form: type[LibraryForm]) -> SceneFile:
    toml = parse(raw, shown)
    try:
        return SceneFile(path, shown, raw, toml, form.model_validate(toml.data))
    except ValidationError as error:
        raise first_fault(error, toml, shown) from None
