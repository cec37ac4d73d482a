"""Blocks on threads: the same bits however they are traced, and what is told on the way."""

import numpy as np
import pytest

from lumentrace.engine import runner, worker
from lumentrace.engine.sums import CUT_OFF, LOST_KEPT, REASONS, account_rows
from lumentrace.world.arrays import BATCHES
from tests.unit.engine_study import DOWN, UP, account_of, beam, different, sums_of, world_of
from tests.worlds import ROUND, Study, box, hollow, rectangle, sphere


def furnished(folder, second=True, **keys):
    """A grey hall with a glass ball and two lamps; a plane that passes light and one that does not.

    Each lamp has half of the rays of a block; `second` moves and renames the other one.
    """
    study = Study(folder, length="mm")
    study.finish("grey", diffuse=0.4, mirror=0.2)
    study.medium("glass", 1.5, 0.05)
    study.part("hall", hollow(box((-5, -5, -5), (5, 5, 5))), medium="opaque", finish="grey")
    study.part("ball", sphere(2, 2.0), medium="glass")
    study.source("lamp", point=(3, 3, 3), flux={"watts": 2.0})
    if second:
        study.source("other", point=(-3, 3, 3))
    else:
        down = {"center": (0, 0, 4), "normal": DOWN, "radius": 0.5}
        study.source("quite_another", disc=down, pattern="lambertian", flux={"watts": 7.0})
    study.detector("passing", (0, 0, 3), UP, (4, 4), (20, 20), side="both")
    study.detector("catching", (0, 0, -4), UP, (9, 9), (3, 3), catch=True, counts="illuminance")
    return world_of(study, **keys)


@pytest.fixture(scope="module")
def hall(tmp_path_factory):
    world = furnished(tmp_path_factory.mktemp("hall"))
    return world, sums_of(world, threads=1)


@pytest.mark.parametrize("threads", [2, 3])
def test_the_same_bits_for_any_number_of_threads(hall, threads):
    world, one = hall
    assert different(one, sums_of(world, threads=threads)) == []
    assert one.flux.min() > 0 and len(one.paths.hash) > 1000


def test_lists_that_overflow_are_done_again_with_the_same_numbers(hall, monkeypatch):
    world, sums = hall
    monkeypatch.setattr(worker, "ROOM", 1)
    assert different(sums, sums_of(world)) == []


def test_another_seed_gives_other_numbers(hall, tmp_path):
    _, sums = hall
    other = sums_of(furnished(tmp_path, seed=2))
    assert {"flux", "cell_batch", "account"} <= set(different(sums, other))
    assert (sums.flux != other.flux).all()


def test_rays_do_not_know_of_other_sources(hall, tmp_path):
    """The lamp's own sums have the same bits beside any other source, but for ray numbers."""
    world, sums = hall
    changed = furnished(tmp_path, second=False)
    other = sums_of(changed)
    assert world.group_names[0] == changed.group_names[0] == "lamp"
    assert np.diff(world.arrays.sources.ray_first).tolist() == [512, 512]
    assert np.diff(changed.arrays.sources.ray_first).tolist() == [512, 512]
    for name in ("account", "account_square", "cell_batch", "cell_square", "emitted"):
        one, two = getattr(sums, name)[0], getattr(other, name)[0]
        assert one.tobytes() == two.tobytes(), name
    for name in ("flux", "flux_square", "flux_count", "what_if"):
        one, two = getattr(sums, name)[:, 0], getattr(other, name)[:, 0]
        assert one.tobytes() == two.tobytes(), name
    ours, theirs = sums.paths.source == 0, other.paths.source == 0
    for name in ("hash", "step", "run_sum", "batch", "square", "count", "optical", "scatters"):
        assert getattr(sums.paths, name)[ours].tobytes() == (
            getattr(other.paths, name)[theirs].tobytes()
        ), name
    assert sums.flux[:, 1].tobytes() != other.flux[:, 1].tobytes()


def test_another_place_in_the_file_gives_the_same_rays(tmp_path):
    """Numbers hang on the source's name: sources in another order send the same rays."""
    results = []
    for names in (("a", "b"), ("b", "a")):
        folder = tmp_path / names[0]
        folder.mkdir()
        study = Study(folder, length="mm")
        study.finish("grey", diffuse=0.5)
        study.part("floor", rectangle((4, 4)), medium="sheet", finish="grey")
        for name in names:
            study.source(name, point=({"a": 1, "b": -1}[name], 0, 1))
        study.detector("over", (0, 0, 0.5), UP, (4, 4), side="both")
        results.append(sums_of(world_of(study)))
    assert (results[0].flux[0] == results[1].flux[0, ::-1]).all()
    assert results[0].flux[0, 0].sum() != results[0].flux[0, 1].sum()


def test_two_rounds_begin_with_the_first(hall):
    """Sums of more rays go on from those of fewer: batch 0 is blocks 0 and 64."""
    world, one = hall
    seen = []
    two = sums_of(world, rounds=2, enough=lambda sums: seen.append(sums.flux.copy()) is not None)
    assert (seen[0] == one.flux).all()
    assert two.rounds == 2 and (two.flux >= one.flux).all() and (two.flux > one.flux).any()
    assert (two.flux_count > one.flux_count).all()


def test_looks_are_at_doublings_and_end_the_trace(hall):
    world, _ = hall
    asked, told = [], []

    def enough(sums):
        asked.append(sums.rounds)
        return sums.rounds >= 2

    sums = sums_of(
        world, rounds=8, enough=enough, progress=lambda done, planned: told.append((done, planned))
    )
    assert asked == [1, 2] and sums.rounds == 2
    assert told == [(1024 * (k + 1), 8 * ROUND) for k in range(2 * BATCHES)]
    assert different(sums, sums_of(world, rounds=2)) == []


@pytest.mark.parametrize("where", ["progress", "enough"])
def test_an_interrupt_is_passed_on(hall, where):
    world, _ = hall

    def interrupt(*_):
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        sums_of(world, rounds=4, **{where: interrupt})


def test_whole_rounds():
    assert [runner.whole_rounds(n) for n in (0, 1, ROUND, ROUND + 1, 1e6)] == [1, 1, 1, 2, 16]
    assert runner.default_threads() >= 1


def test_maps_that_do_not_fit_keep_halves_and_squares_of_blocks(hall, tmp_path):
    """In one round a batch is a block, so that the squares of both can be told apart from none."""
    _, kept = hall
    small = sums_of(furnished(tmp_path, map_memory="1 KiB"))
    assert small.cell_batch is None and kept.cell_block_square is None
    assert small.cell_half.tobytes() == kept.cell_half.tobytes()
    assert small.cell_square.tobytes() == kept.cell_square.tobytes()
    for half in (0, 1):
        of_half = (kept.cell_batch[..., half::2] ** 2).sum(axis=-1)
        assert small.cell_block_square[half] == pytest.approx(of_half, rel=1e-12)
    assert set(different(kept, small)) == {"cell_batch", "cell_block_square"}


def test_halves_are_the_even_and_the_odd_batches(hall):
    _, sums = hall
    halves = np.stack([sums.cell_batch[..., k::2].sum(axis=-1) for k in (0, 1)])
    assert sums.cell_half == pytest.approx(halves, rel=1e-12, abs=1e-15)
    first = 400
    for d, cells in enumerate((slice(0, first), slice(first, None))):
        by_cell = sums.cell_batch[:, cells].sum(axis=1)
        assert by_cell == pytest.approx(sums.flux[d], rel=1e-12)


def test_equal_weights_count_in_full(tmp_path):
    """Rays that a plane catches at first arrive with equal weight: (sum w)^2 / sum w^2 = count."""
    study = Study(tmp_path, length="mm")
    study.source("lamp", point=(0, 0, 0), flux={"watts": 3.0})
    study.detector("plane", (0, 0, 1), DOWN, (2, 2), (4, 5), catch=True)
    world = world_of(study)
    sums = sums_of(world, rounds=2)
    total, count = sums.flux.sum(), int(sums.flux_count.sum())
    assert total**2 / sums.flux_square.sum() == pytest.approx(count, rel=1e-9)
    assert total == pytest.approx(count * 3 / 1024, rel=1e-9)
    cells = sums.cell_half.sum(axis=0)[0]
    counts = cells / (3 / 1024)
    assert counts == pytest.approx(counts.round(), rel=1e-9)
    assert cells**2 / sums.cell_square[0] == pytest.approx(counts, rel=1e-9)
    assert counts.sum() == pytest.approx(count)
    assert sums.flux_most.tolist() == [1] and sums.cell_most.tolist() == [1]
    # a cube's face is a sixth of the sphere; z <= 4
    assert abs(count / (2 * ROUND) - 1 / 6) <= 4 * np.sqrt(5 / 36 / (2 * ROUND))


def test_several_arrivals_of_a_ray_are_one_contribution(tmp_path):
    """A beam that crosses a plane three times: squares are of the ray's total, in its own cells."""
    study = Study(tmp_path, length="mm")
    study.finish("metal", mirror=1.0)
    study.part("a", rectangle((2, 2), (0, 0, 1)), medium="sheet", finish="metal")
    study.part("b", rectangle((2, 2), (0, 0, 0)), medium="sheet", finish="metal")
    study.detector("middle", (0, 0, 0.5), UP, (1, 1), side="both")
    beam(study, 0.25, UP)
    sums = sums_of(world_of(study, events_max=3))
    weight = 1 / 1024
    assert sums.flux_square[0, 0] == pytest.approx(ROUND * (3 * weight) ** 2)
    assert sums.cell_square[0, 0] == pytest.approx(ROUND * (3 * weight) ** 2)
    assert sums.paths.square == pytest.approx(ROUND * weight**2)
    assert (sums.flux_most[0], sums.cell_most[0]) == (3, 3)


def test_rays_that_are_cut_off_are_counted_and_kept(tmp_path):
    """Light between two perfect mirrors: all of it is cut off, the first rays by number."""
    study = Study(tmp_path, length="mm")
    study.finish("metal", mirror=1.0)
    study.part("a", rectangle((2, 2), (0, 0, 1)), medium="sheet", finish="metal")
    study.part("b", rectangle((2, 2), (0, 0, 0)), medium="sheet", finish="metal")
    beam(study, 0.25, UP)
    world = world_of(study, events_max=20)
    sums = sums_of(world)
    rows = account_rows(2, 2)
    assert account_of(world, sums, rows.cut_off).value == pytest.approx(1, rel=1e-12)
    assert sums.lost_count == ROUND and len(sums.lost) == LOST_KEPT
    assert (sums.lost["ray"] == np.arange(LOST_KEPT)).all()
    assert (sums.lost["reason"] == CUT_OFF).all() and "events_max" in REASONS[CUT_OFF]
    assert sums.lost["weight"] == pytest.approx(1 / 1024)
    assert sums.lost["z"] == pytest.approx(0)  # after 20 events, an even number, at b
    assert np.hypot(sums.lost["x"] - 0.1, sums.lost["y"] - 0.03).max() <= 0.01


def test_more_parts_in_one_place_than_an_event_holds(tmp_path):
    """Told as unresolved, with the account closed."""
    study = Study(tmp_path, length="mm")
    study.finish("grey", diffuse=0.5)
    for k in range(30):
        study.part(f"sheet{k}", rectangle((2, 2)), medium="sheet", finish="grey")
    beam(study, 1)
    world = world_of(study)
    sums = sums_of(world)
    rows = account_rows(30, 30)
    assert account_of(world, sums, rows.unresolved).value == pytest.approx(1, rel=1e-12)
    assert sums.lost_count == ROUND
    assert {REASONS[r] for r in sums.lost["reason"]} == {
        "more parts meet in one place than the engine holds"
    }


@pytest.mark.parametrize("plane", [False, True])
def test_a_study_of_light_alone(tmp_path, plane):
    """No part, and perhaps not even a plane: everything escapes, the plane counts its share."""
    study = Study(tmp_path, length="mm")
    study.source("lamp", point=(0, 0, 0))
    if plane:
        study.detector("plane", (0, 0, 1), DOWN, (2, 2))
    world = world_of(study)
    sums = sums_of(world)
    assert account_of(world, sums, account_rows(0, 0).escaped).value == pytest.approx(1, rel=1e-12)
    if plane:  # a cube's face is a sixth of the sphere; z <= 4
        count = int(sums.flux_count.sum())
        assert abs(count / ROUND - 1 / 6) <= 4 * np.sqrt(5 / 36 / ROUND)
