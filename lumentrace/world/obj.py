"""Wavefront OBJ: corners, faces, and the three ways in which it names faces."""

import numpy as np

from lumentrace.world.polygons import fanned
from lumentrace.world.raw import MeshFault, Namer, RawMesh
from lumentrace.world.words import counted

_LABELS = {"usemtl": 0, "g": 1, "o": 2}  # in this order the first that is there gives the tags


def read_obj(data: bytes) -> RawMesh:
    """Triangles of an OBJ file, polygons fanned, in the file's order of faces.

    Materials label the faces, and groups, and objects; the first of these that the file uses at
    all gives its tags. Raises MeshFault for what is no OBJ, and for indices out of range.
    """
    vertices: list[float] = []
    corners: list[list[int]] = []  # of each polygon
    lines: list[int] = []  # where each polygon stands
    namers = tuple(Namer() for _ in _LABELS)
    current = [namer.row("") for namer in namers]
    rows: tuple[list[int], ...] = tuple([] for _ in _LABELS)
    for line, text in _statements(data):
        head, _, rest = text.partition(" ")
        if head == "v":
            vertices.extend(_numbers(rest.split(), line))
        elif head == "f":
            corners.append(_corners(rest.split(), len(vertices) // 3, line))
            lines.append(line)
            for kept, row in zip(rows, current, strict=True):
                kept.append(row)
        elif head in _LABELS:
            which = _LABELS[head]
            current[which] = namers[which].row(rest.strip())
    vertex = np.array(vertices, np.float64).reshape(-1, 3)
    _check_range(corners, lines, len(vertex))
    corner, polygon = fanned(vertex, corners, lines)
    labels = tuple(
        namer.labels(np.array(row, np.int64)[polygon])
        for namer, row in zip(namers, rows, strict=True)
    )
    used = [label for label in labels if len(label.names) > 1] or [labels[0]]
    return RawMesh(vertex, corner, labels, used[0], repeats=False)


def _statements(data: bytes):
    """(line number, statement) of each line that says something; a backslash joins lines."""
    if b"\0" in data[:1000]:
        raise MeshFault("is not an OBJ file: it is not text")
    joined, first = "", 0
    for line, text in enumerate(data.decode("utf-8-sig", "replace").splitlines(), 1):
        first = first or line
        joined += text.partition("#")[0].replace("\t", " ")
        if joined.endswith("\\"):
            joined = joined[:-1] + " "
            continue
        if joined.strip():
            yield first, joined.strip()
        joined, first = "", 0
    if joined.strip():
        raise MeshFault(f"is cut short: line {first} goes on after the end of the file")


def _numbers(words, line):
    """The three coordinates of a vertex; a weight or a colour behind them is left alone."""
    try:
        x, y, z = map(float, words[:3])
    except ValueError:
        found = " ".join(words)[:40]
        raise MeshFault(f'line {line}: found "v {found}", needs three numbers') from None
    return x, y, z


def _corners(words, count, line):
    """Rows of a polygon's vertices; negative numbers of the file count back from the last."""
    try:
        found = [int(word.partition("/")[0]) for word in words]
    except ValueError:
        shown = " ".join(words)[:40]
        raise MeshFault(f'line {line}: found "f {shown}", needs whole numbers') from None
    if len(found) < 3:
        raise MeshFault(f"line {line}: a face of {len(found)} corners; it needs three or more")
    if 0 in found or min(found) < -count:
        wrong = 0 if 0 in found else min(found)
        raise MeshFault(
            f"line {line}: a face uses vertex {wrong}; vertices count from 1, or back from -1 to "
            f"-{count} here"
        )
    return [number - 1 if number > 0 else count + number for number in found]


def _check_range(corners, lines, count):
    wrong = [row for row, polygon in enumerate(corners) if max(polygon) >= count]
    if wrong:
        raise MeshFault(
            f"has {counted(len(wrong), 'face')} with vertices that are not there, the first at "
            f"line {lines[wrong[0]]}: vertex {max(corners[wrong[0]]) + 1} of {count}; the file may "
            "be cut short"
        )
