"""The hierarchy over everything that a ray can hit."""

import numpy as np

from lumentrace.world.arrays import Detectors, Mesh, Tree
from lumentrace.world.frames import corners
from lumentrace.world.geometry import face_boxes

NO_TREE = Tree(
    lower=np.empty((0, 3)),
    upper=np.empty((0, 3)),
    child=np.empty(0, np.int32),
    count=np.empty(0, np.int32),
    order=np.empty(0, np.int32),
)


def hierarchy(mesh: Mesh, detectors: Detectors) -> Tree:
    """The hierarchy over faces and detectors, each box padded by the error of what it holds."""
    from lumentrace.kernels.hierarchy import build_tree

    lower, upper = face_boxes(mesh.vertex, mesh.corner)
    rims = np.array(
        [corners(p, s) for p, s in zip(detectors.place, detectors.size, strict=True)]
    ).reshape(-1, 4, 3)
    pad = np.concatenate([mesh.error, detectors.error])[:, None]
    return Tree(
        *build_tree(
            np.concatenate([lower, rims.min(axis=1)]) - pad,
            np.concatenate([upper, rims.max(axis=1)]) + pad,
        )
    )
