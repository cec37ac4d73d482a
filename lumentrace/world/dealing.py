"""How the rays of a block are dealt to the sources."""

from collections.abc import Sequence

import numpy as np

from lumentrace.errors import UserError
from lumentrace.world.arrays import BLOCK_RAYS

_TIE = 1e-9  # rays; remainders that differ by less are equal but for rounding


def deal_rays(flux: Sequence[float], group: Sequence[int], share: Sequence[float]):
    """(S,) int64 rays of a block for each source: at least one each, BLOCK_RAYS together.

    A source's claim is (its flux / its group's flux) x (1 / groups) x its share. Claims are scaled
    to the rays of a block; a source whose claim is below one ray gets one, and the others share
    what is left by largest remainder, in file order where remainders tie. flux: above 0, in any one
    unit; group: a number for each source. Raises UserError for more than BLOCK_RAYS sources.
    """
    n = len(flux)
    if n > BLOCK_RAYS:
        raise UserError(f"{n} sources are in use; allowed: {BLOCK_RAYS}")
    if n == 0:
        return np.empty(0, np.int64)
    flux, group = np.asarray(flux, np.float64), np.asarray(group, np.int64)
    claim = flux / np.bincount(group, weights=flux)[group] * np.asarray(share, np.float64)
    rays = np.ones(n, np.int64)
    sharing = np.ones(n, bool)
    small = sharing
    while small.any():
        scaled = claim * (BLOCK_RAYS - (~sharing).sum()) / claim[sharing].sum()
        small = sharing & (scaled < 1 - _TIE)
        sharing &= ~small
    rays[sharing] = np.floor(scaled[sharing] + _TIE).astype(np.int64)
    remainder = np.where(sharing, np.round((scaled - rays) / _TIE), -np.inf)
    rays[np.argsort(-remainder, kind="stable")[: BLOCK_RAYS - rays.sum()]] += 1
    return rays
