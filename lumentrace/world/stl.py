"""STL: binary by one numpy read, ASCII line by line."""

import numpy as np

from lumentrace.world.raw import Labels, MeshFault, Namer, RawMesh

_HEAD = 84  # bytes before the first face of a binary file: a title of 80, the count of faces
_MARK = b"\xef\xbb\xbf"  # a byte-order mark
_FACE = np.dtype([("normal", "<f4", 3), ("corner", "<f4", (3, 3)), ("attribute", "<u2")])


def read_stl(data: bytes) -> RawMesh:
    """Triangles of an STL file. Solids of an ASCII file label the faces; two or more are its tags.

    Raises MeshFault for a file that is cut short, too long for its count, or not STL.
    """
    if _is_ascii(data):
        return _ascii(data.removeprefix(_MARK))
    if len(data) < _HEAD:
        raise MeshFault(f"is cut short: {len(data)} bytes, a binary STL begins with {_HEAD}")
    count = int.from_bytes(data[80:_HEAD], "little")
    held = len(data) - _HEAD
    if held != count * _FACE.itemsize:
        kind = "is cut short" if held < count * _FACE.itemsize else "is too long for its count"
        raise MeshFault(
            f"{kind}: it announces {count} faces ({_HEAD + count * _FACE.itemsize} bytes) and has "
            f"{len(data)} bytes; export it again"
        )
    corner = np.frombuffer(data, _FACE, count, _HEAD)["corner"]
    return _mesh(corner.reshape(-1, 3).astype(np.float64), Labels(np.zeros(count, np.int64), ("",)))


def _is_ascii(data: bytes) -> bool:
    """Whether it is text: begins with `solid` and is not exactly a binary file all the same."""
    if data[:200].removeprefix(_MARK).lstrip()[:5].lower() != b"solid":
        return False
    count = int.from_bytes(data[80:_HEAD], "little")
    if len(data) == _HEAD + count * _FACE.itemsize:
        return False
    return b"\0" not in data[:1000]


def _mesh(vertex, solids: Labels) -> RawMesh:
    """The mesh of 3 F corners; a single solid's name is no tag."""
    corner = np.arange(len(vertex), dtype=np.int64).reshape(-1, 3)
    many = len(solids.names) > 1
    tags = solids if many else Labels(np.zeros(len(corner), np.int64), ("",))
    return RawMesh(vertex, corner, (solids,), tags, repeats=True)


def _ascii(data: bytes) -> RawMesh:
    solids, rows, numbers = Namer(), [], []
    solid, left = None, 0  # the open solid's row; corners that the open facet still needs
    line = 0
    for line, text in enumerate(data.decode("utf-8", "replace").splitlines(), 1):
        words = text.split()
        head = words[0].lower() if words else ""
        if head == "vertex" and left > 0:
            numbers.extend(_three(words[1:], line))
            left -= 1
        elif head == "facet" and solid is not None and left == 0:
            rows.append(solid)
            left = 3
        elif head == "solid" and solid is None:
            solid = solids.row(text.split(None, 1)[1].strip() if len(words) > 1 else "")
        elif head == "endsolid" and solid is not None and left == 0:
            solid = None
        elif head not in ("", "outer", "endloop", "endfacet") or (head == "endfacet" and left):
            raise MeshFault(f"line {line}: found {_shown(text)} where no such line may stand")
    if solid is not None or left:
        raise MeshFault(f"is cut short: it ends at line {line} without endsolid; export it again")
    return _mesh(np.array(numbers, np.float64).reshape(-1, 3), solids.labels(rows))


def _three(words, line):
    try:
        x, y, z = map(float, words)
    except ValueError:
        found = " ".join(words)
        raise MeshFault(f"line {line}: found {_shown(found)}, needs three numbers") from None
    return x, y, z


def _shown(text):
    text = text.strip()
    return f'"{text[:40]}..."' if len(text) > 40 else f'"{text}"'
