"""The flat arrays that the engine traces: one tuple a theme, nothing but numbers.

Built once by `lumentrace.world.build`; read by the engine and the pictures; changed by nobody.
Lengths are in the study's unit, flux in W, wavelengths in nm. Every `*_first` array is an offset
table: what belongs to i stands at `[first[i], first[i + 1])`.
"""

from typing import NamedTuple

import numpy as np

OPAQUE, SHEET, TRANSPARENT = 0, 1, 2
DRY, OPTICAL = 0, 1
SURROUNDINGS_ROW, AIR_ROW = 0, 1  # of Media: what is around all parts, what fills a dry gap
UNCOATED_ROW = 0  # of Finishes
BATCHES = 64
BLOCK_RAYS = 1024
ROUND_RAYS = BATCHES * BLOCK_RAYS


class Mesh(NamedTuple):
    """All triangles of all bodies (a body is one placed copy of a part), in the scene's frame."""

    vertex: np.ndarray  # (V, 3) float64; welded within a body, never across bodies
    corner: np.ndarray  # (F, 3) int32, counter-clockwise seen from outside (or a sheet's front)
    normal: np.ndarray  # (F, 3) float64 unit outward normal; zeros: no area, never hit
    error: np.ndarray  # (F,) float64 bound on the distance of a computed hit from the true plane
    margin: np.ndarray  # (F,) float64 weight of a corner below which a hit is drawn back into its
    #   triangle: min(0.25, 64 * 32 * 2**-52 * M / smallest altitude), M the largest coordinate
    body: np.ndarray  # (F,) int32
    tag: np.ndarray  # (F,) int32 row of Tags
    closed: np.ndarray  # (B,) bool: the body's surface has no open edge
    pair_first: np.ndarray  # (F + D + 1,) int32 primitives in contact with this one: faces of other
    #   bodies, and detectors that lie on a face; primitive F + d is detector d
    pair_prim: np.ndarray  # (P,) int32; both directions are listed, in order
    pair_gap: np.ndarray  # (P,) float64 largest distance between the two planes there
    widest_gap: np.ndarray  # (F + D,) float64 largest gap of all contacts of a primitive
    pair_kind: (
        np.ndarray
    )  # (P,) int32 DRY (also between opaque faces) or OPTICAL (also of detectors)


class Tree(NamedTuple):
    """Bounding volume hierarchy over primitives: faces 0..F-1, then detectors F..F+D-1."""

    lower: np.ndarray  # (N, 3) float64
    upper: np.ndarray  # (N, 3) float64
    child: (
        np.ndarray
    )  # (N,) int32 inner: left child, the right one follows it; leaf: offset in order
    count: np.ndarray  # (N,) int32 primitives of a leaf; 0: inner node
    order: np.ndarray  # (F + D,) int32


class Bodies(NamedTuple):
    """Placed copies of parts; in the order of the file, copies of a part together."""

    part: np.ndarray  # (B,) int32
    kind: np.ndarray  # (B,) int32 OPAQUE, SHEET or TRANSPARENT
    rank: np.ndarray  # (B,) int32 of transparent bodies: the larger acts; all different
    medium: np.ndarray  # (B,) int32 row of Media; -1 for opaque parts and sheets


class Tags(NamedTuple):
    """part:tag, the smallest thing that a path or an account names; shared by all copies."""

    part: np.ndarray  # (T,) int32
    front: np.ndarray  # (T,) int32 row of Finishes seen from the side of the normals
    back: np.ndarray  # (T,) int32 seen from behind; the same but for two-sided sheets


class Finishes(NamedTuple):
    """A finish is a mixture of lobes; the first row is always the uncoated one."""

    lobe_first: np.ndarray  # (n + 1,) int32
    lobe_model: np.ndarray  # (L,) int32 index in the registry of lobes
    lobe_share: np.ndarray  # (L,) float64 share of the incident light


class Media(NamedTuple):
    """Row 0 is what surrounds all parts, row 1 is air (what fills a dry gap)."""

    model: np.ndarray  # (M,) int32 index in the registry of media
    values: np.ndarray  # (M, 4) float64: index relative to air, absorption per length, 0, 0


class Sources(NamedTuple):
    start: np.ndarray  # (S,) int32 index in the registry of starts (point, faces, disc, rectangle)
    place: np.ndarray  # (S, 4, 3) float64: center, normal, across, up (unit vectors)
    size: np.ndarray  # (S, 2) float64: radius, 0 | half size along across, along up
    pattern: np.ndarray  # (S,) int32 index in the registry of patterns
    pattern_values: np.ndarray  # (S, 2) float64: exponent m | cosine of the half-angle
    wavelength: np.ndarray  # (S,) float64 nm
    ray_flux: np.ndarray  # (S,) float64 W with which a ray starts: flux / rays in a block
    ray_first: np.ndarray  # (S + 1,) int32 rays of a block, dealt in file order; last is 1024
    group: np.ndarray  # (S,) int32
    key: np.ndarray  # (S,) uint64 digest of the name, for the random numbers
    immersed: np.ndarray  # (S,) bool: may start inside a transparent body or against one
    face_first: np.ndarray  # (S + 1,) int32
    face: np.ndarray  # (E,) int32 emitting faces
    face_area: np.ndarray  # (E,) float64 running sum of their areas within the source


class Detectors(NamedTuple):
    model: np.ndarray  # (D,) int32 index in the registry of detectors
    place: np.ndarray  # (D, 4, 3) float64: center, normal, across, up (unit vectors)
    size: np.ndarray  # (D, 2) float64 half size along across and along up
    cells: np.ndarray  # (D, 2) int32 along across, along up
    cell_first: np.ndarray  # (D + 1,) int32; cell = first + i_across + cells_across * i_up
    catches: np.ndarray  # (D,) bool
    two_sided: np.ndarray  # (D,) bool
    photometric: np.ndarray  # (D,) bool: the response is 683 V(lambda)
    error: np.ndarray  # (D,) float64 as of a face


class Settings(NamedTuple):
    seed: int
    events_max: int
    groups: int


class WorldArrays(NamedTuple):
    mesh: Mesh
    tree: Tree
    bodies: Bodies
    tags: Tags
    finishes: Finishes
    media: Media
    sources: Sources
    detectors: Detectors
    settings: Settings
    luminosity: np.ndarray  # (471,) float64 CIE V(lambda), 360 nm to 830 nm by 1 nm
