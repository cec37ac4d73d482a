"""Rays traced again by their number: the same way, to the place where they were counted."""

import numpy as np
import pytest

from lumentrace.engine.retrace import retrace
from tests.unit.engine_study import sums_of
from tests.unit.test_engine_runner import furnished


@pytest.fixture(scope="module")
def hall(tmp_path_factory):
    world = furnished(tmp_path_factory.mktemp("hall"))
    return world, sums_of(world)


def rows_to_try(sums):
    """The strongest paths, and some of the longest."""
    strength = np.argsort(-sums.paths.batch.sum(axis=1))[:60]
    length = np.argsort(-sums.paths.n_steps)[:20]
    return np.unique([*strength, *length])


def test_a_kept_ray_ends_on_its_detector_by_its_path(hall):
    """The end lies on the plane within its rectangle; a point for each step, to 1e-9."""
    world, sums = hall
    paths, detectors = sums.paths, world.arrays.detectors
    tried = 0
    for row in rows_to_try(sums):
        d = int(paths.detector[row])
        center, normal, across, up = detectors.place[d]
        for number in paths.ray[row][paths.ray[row] >= 0].tolist():
            points = retrace(world, number).up_to(d, int(paths.hash[row]))
            assert points is not None
            offset = points[-1] - center
            assert abs(offset @ normal) < 1e-9
            assert abs(offset @ across) <= detectors.size[d, 0] + 1e-9
            assert abs(offset @ up) <= detectors.size[d, 1] + 1e-9
            lamp = world.arrays.sources.place[paths.source[row], 0]
            assert points[0] == pytest.approx(lamp)
            assert len(points) >= paths.n_steps[row] + 2
            tried += 1
    assert tried > 200


def test_the_way_is_as_long_as_the_light(hall):
    """A path of one ray: index times length along its points is its optical length, 1e-9."""
    world, sums = hall
    paths = sums.paths
    tags = world.tag_names
    air = [
        row
        for row in np.flatnonzero(paths.count == 1)
        if not any(
            tags[code >> 8].startswith("ball") for code in paths.step[row, : paths.n_steps[row]]
        )
    ][:40]
    assert len(air) == 40
    for row in air:
        points = retrace(world, int(paths.ray[row, 0])).up_to(
            int(paths.detector[row]), int(paths.hash[row])
        )
        length = np.linalg.norm(np.diff(points, axis=0), axis=1).sum()
        assert paths.optical[row] / paths.batch[row].sum() == pytest.approx(length, rel=1e-9)


def test_the_first_arrivals_are_those_of_the_run(hall):
    """Each arrival of the first 300 rays is in the ledger; together they make up its counts."""
    world, sums = hall
    known = {int(h): row for row, h in enumerate(sums.paths.hash)}
    first = {}
    for number in range(300):
        for arrival in retrace(world, number).arrivals:
            row = known[arrival.path]
            assert sums.paths.detector[row] == arrival.detector
            first.setdefault(row, []).append(number)
    for row, numbers in first.items():
        kept = sums.paths.ray[row].tolist()
        expected = numbers[: len(kept)]
        assert kept[: len(expected)] == expected


def test_a_ray_can_be_traced_at_any_time(hall):
    world, _ = hall
    ways = [retrace(world, number) for number in (70_000, 5, 70_000)]
    assert (ways[0].points == ways[2].points).all()
    assert ways[0].arrivals == ways[2].arrivals
    assert ways[0].up_to(0, 1) is None
