"""Quadrature and counting over directions, for tests of models that scatter or emit."""

import numpy as np
from scipy.stats import chi2

N_AZIMUTH = 24
Z_BINS, AZIMUTH_BINS = 10, 6
_NODE, _WEIGHT = np.polynomial.legendre.leggauss(400)


def directions(z, azimuth):
    """Unit directions (..., 3) at cosines z from +z and azimuths."""
    sine = np.sqrt(np.maximum(0.0, 1 - z * z))
    return np.stack([sine * np.cos(azimuth), sine * np.sin(azimuth), z + 0 * azimuth], axis=-1)


def integral(function, low=-1.0, high=1.0):
    """Integral of function(direction) over solid angle between two cosines.

    Gauss's rule in the cosine, equal steps in azimuth; z = 0 is never asked, and is an edge where
    both halves are wanted.
    """
    if low < 0.0 < high:
        return integral(function, low, 0.0) + integral(function, 0.0, high)
    z = low + (high - low) * (_NODE + 1) / 2
    azimuth = 2 * np.pi * (np.arange(N_AZIMUTH) + 0.5) / N_AZIMUTH
    grid = directions(z[:, None], azimuth[None, :]).reshape(-1, 3).tolist()
    values = np.array([function(tuple(d)) for d in grid]).reshape(len(z), N_AZIMUTH)
    return float(_WEIGHT @ values.mean(axis=1)) * (high - low) / 2 * 2 * np.pi


def stratified(n, rng):
    """(n * n, 4) uniforms: the first two one in each field of an n x n grid, the others free."""
    i, j = np.meshgrid(np.arange(n), np.arange(n), indexing="ij")
    u = rng.random((n * n, 4))
    u[:, 0] = (i.ravel() + u[:, 0]) / n
    u[:, 1] = (j.ravel() + u[:, 1]) / n
    return u


def counted_as(pdf, out, edges=None):
    """Fails where directions out (n, 3) are not spread as pdf(direction) says.

    Chi-square over bins of cosine and azimuth at 0.1 %. edges: of the bins of the cosine.
    """
    edges = np.linspace(-1, 1, Z_BINS + 1) if edges is None else edges
    azimuth = np.arctan2(out[:, 1], out[:, 0]) % (2 * np.pi)
    counts, _, _ = np.histogram2d(
        out[:, 2], azimuth, [edges, np.linspace(0, 2 * np.pi, AZIMUTH_BINS + 1)]
    )
    assert counts.sum() == len(out), "directions beyond the bins"
    share = np.array([integral(pdf, a, b) for a, b in zip(edges, edges[1:], strict=False)])
    expected = np.repeat(share[:, None], AZIMUTH_BINS, axis=1) / AZIMUTH_BINS * len(out)
    impossible = expected < 1e-9 * len(out)
    assert counts[impossible].sum() == 0, "directions where the density is zero"
    square = ((counts - expected)[~impossible] ** 2 / expected[~impossible]).sum()
    assert square <= chi2.isf(1e-3, (~impossible).sum() - 1), square
