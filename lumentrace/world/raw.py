"""What a mesh file holds before anything is judged or changed."""

from dataclasses import dataclass

import numpy as np


class MeshFault(ValueError):
    """A mesh file that cannot be read; the text says what is wrong and what to do."""


@dataclass(frozen=True)
class Labels:
    """One way in which a file names its faces."""

    row: np.ndarray  # (F,) int64 row of names
    names: tuple[str, ...]  # as in the file; "" for faces without a name


@dataclass(frozen=True)
class RawMesh:
    """Triangles as they stand in a file, in its own unit and order."""

    vertex: np.ndarray  # (V, 3) float64
    corner: np.ndarray  # (F, 3) int64 rows of vertex
    labels: tuple[Labels, ...]  # every way in which `take` may name faces
    tags: Labels  # the one of them that gives the file's own tags
    repeats: bool  # the format writes each corner anew for every face


class Namer:
    """Collects the label of one face after another."""

    def __init__(self):
        self.known: dict[str, int] = {}

    def row(self, name: str) -> int:
        """Row of a name, a new one for a name not seen before."""
        return self.known.setdefault(name, len(self.known))

    def labels(self, rows) -> Labels:
        """The labels of all faces, given their rows."""
        return Labels(np.array(rows, np.int64), tuple(self.known))
