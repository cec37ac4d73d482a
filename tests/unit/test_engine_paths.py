"""Paths and their ledger: signatures, runs, what is too long or too much, and what-if sums."""

from collections import Counter

import numpy as np
import pytest

from lumentrace.engine import merge, runner
from lumentrace.engine.state import STEP, new_rays, new_tally
from lumentrace.engine.sums import REPEATS_MAX, STEPS_MAX, step_code, step_parts, what_if_keys
from lumentrace.engine.surface import take_step
from lumentrace.jit import kernel
from lumentrace.models.events import (
    EVENTS,
    MIRROR,
    REFLECT,
    SCATTER,
    SCATTER_THROUGH,
    THROUGH,
    TOTAL,
)
from tests.unit.engine_study import UP, beam, path_texts, slab, sums_of, world_of
from tests.worlds import ROUND, Study, box, hollow, joined, rectangle

N_EVENTS = len(EVENTS)


@kernel
def _take(rays, tally, tags, events):
    for i in range(len(tags)):
        take_step(rays[0], tally, tags[i], events[i])


def taken(*steps):
    """The ray, and {(tag, event): times} that it met, after these (tag, event) steps."""
    rays, tally = new_rays(), new_tally(1, 5, 1, 1)
    _take(rays, tally, np.array([t for t, _ in steps]), np.array([e for _, e in steps]))
    keys = tally.met[0, : rays[0]["n_met"]].tolist()
    return rays[0], {divmod(key, N_EVENTS): int(tally.repeats[0, key]) for key in keys}


def shown(ray):
    """[(tag, event, run)] of a ray."""
    n = int(ray["n_steps"])
    codes, runs = ray["step"][:n].tolist(), ray["run"][:n].tolist()
    return [(code >> 4, code & 15, run) for code, run in zip(codes, runs, strict=True)]


@pytest.mark.parametrize("event", [TOTAL, MIRROR, SCATTER, SCATTER_THROUGH])
@pytest.mark.parametrize("times", [1, 2, 3, 7])
def test_runs_at_one_tag_collapse(event, times):
    ray, met = taken((1, THROUGH), *[(2, event)] * times, (1, THROUGH))
    assert shown(ray) == [(1, THROUGH, 1), (2, event, times), (1, THROUGH, 1)]
    assert met == {(1, THROUGH): 2, (2, event): times}


@pytest.mark.parametrize("event", [THROUGH, REFLECT])
def test_through_and_reflect_never_collapse(event):
    ray, met = taken(*[(2, event)] * 4)
    assert shown(ray) == [(2, event, 1)] * 4
    assert met == {(2, event): 4}


def test_another_tag_or_event_ends_a_run():
    steps = [(1, SCATTER), (1, SCATTER), (2, SCATTER), (1, SCATTER), (1, MIRROR), (1, SCATTER)]
    ray, met = taken(*steps)
    assert [run for _, _, run in shown(ray)] == [2, 1, 1, 1, 1]
    assert met == {(1, SCATTER): 4, (2, SCATTER): 1, (1, MIRROR): 1}


def test_orders_are_counted_on_the_whole_path():
    """`reflections` counts reflect alone, `scatters` both kinds of scatter, runs in full."""
    steps = [(1, REFLECT)] * 2 + [(2, SCATTER)] * 5 + [(3, TOTAL)] * 4 + [(1, MIRROR)]
    ray, _ = taken(*steps, (2, SCATTER_THROUGH), (1, REFLECT))
    assert (ray["reflections"], ray["scatters"]) == (3, 6)


def test_a_path_that_is_too_long():
    """All that fits is kept, one more is too long; a run that goes on at the end still fits."""
    alternate = [(i % 2, MIRROR) for i in range(STEPS_MAX)]
    ray, _ = taken(*alternate, alternate[-1])
    assert ray["n_steps"] == STEPS_MAX and shown(ray)[-1][2] == 2
    ray, met = taken(*alternate, (4, SCATTER), *alternate)
    assert ray["n_steps"] == STEPS_MAX + 1
    assert met == {(0, MIRROR): STEPS_MAX, (1, MIRROR): STEPS_MAX, (4, SCATTER): 1}
    assert ray["scatters"] == 1


def test_step_codes():
    for tag, event, run in ((0, 0, 1), (3, SCATTER, 2), (2**30, TOTAL, 3)):
        assert step_parts(step_code(tag, event, run)) == (tag, event, run)
    steps = np.zeros(1, STEP)
    for run, kept in ((1, 1), (2, 2), (3, 3), (1000, 3)):
        steps[0] = (7 << 4 | MIRROR, run)
        assert merge.signed_step(steps[0]) == step_code(7, MIRROR, kept)


def hashed(detector, source, *steps):
    """Hash of a path of (tag, event, run); other steps lie around it in the list."""
    rows = np.zeros(len(steps) + 2, STEP)
    rows[:] = (9 << 4, 1)
    for i, (tag, event, run) in enumerate(steps):
        rows[i + 1] = (tag << 4 | event, run)
    return int(merge.path_hash(detector, source, rows, 1, len(steps) + 1))


def test_path_hash():
    """Runs of three and more are one path; all else that differs is another."""
    a, b = (1, THROUGH, 1), (2, SCATTER, 1)
    runs = [hashed(0, 0, a, (2, SCATTER, run)) for run in (1, 2, 3, 4, 900)]
    assert len(set(runs)) == 3 and len(set(runs[2:])) == 1
    paths = [
        (0, 0), (1, 0), (0, 1), (1, 1), (0, 0, a), (0, 0, b), (0, 0, a, b), (0, 0, b, a),
        (0, 0, a, a), (0, 0, a, a, a), (0, 0, (1, REFLECT, 1)), (0, 0, (2, THROUGH, 1)),
    ]  # fmt: skip
    assert len({hashed(*path) for path in paths}) == len(paths)
    rng = np.random.default_rng(1)
    many = {
        tuple((int(t), int(e), int(r)) for t, e, r in rng.integers((0, 0, 1), (40, 7, 4), (n, 3)))
        for n in rng.integers(1, 12, 20_000)
    }
    assert len({hashed(0, 0, *path) for path in many}) == len(many)


@pytest.fixture
def study(tmp_path):
    return Study(tmp_path, length="mm")


def corridor(study, events_max):
    """Perfect mirrors a and b; a plane between counts every crossing until the ray is cut off."""
    study.finish("metal", mirror=1.0)
    study.part("a", rectangle((2, 2), (0, 0, 1)), medium="sheet", finish="metal")
    study.part("b", rectangle((2, 2), (0, 0, 0)), medium="sheet", finish="metal")
    study.detector("middle", (0, 0, 0.5), UP, (1, 1), side="both")
    beam(study, 0.25, UP)
    return world_of(study, events_max=events_max)


def test_a_long_history_exactly(study):
    """52 crossings of each ray, the k-th after k events: paths, what is other, what-if sums."""
    world = corridor(study, 52)
    sums = sums_of(world)
    assert sums.flux[0].sum() / 64 == pytest.approx(52)
    assert sums.flux_count[0, 0] == 52 * ROUND and sums.flux_most[0] == 52
    assert sorted(sums.paths.n_steps.tolist()) == list(range(STEPS_MAX + 1))
    assert (sums.paths.count == ROUND).all()
    assert sums.paths.batch.sum(axis=1) / 64 == pytest.approx(1.0)
    assert sums.paths.optical / sums.paths.batch.sum(axis=1) == pytest.approx(
        [0.25 + n for n in sums.paths.n_steps.tolist()]
    )
    assert sums.paths.other_count[0, 0] == (51 - STEPS_MAX) * ROUND
    assert sums.paths.other.sum() / 64 == pytest.approx(51 - STEPS_MAX)
    at_a = Counter((k + 1) // 2 for k in range(52))
    at_b = Counter(k // 2 for k in range(52))
    at_part = {"a": at_a, "b": at_b}
    n_tags = len(world.tag_names)
    what_if = sums.what_if[0, 0].sum(axis=0) / 64
    for row, part in enumerate(world.part_names):
        keys = [row * N_EVENTS + MIRROR, n_tags * N_EVENTS + row, n_tags * (N_EVENTS + 1) + row]
        for key in keys:
            check_passes(what_if[key], at_part[part])
        what_if[keys] = 0
    assert (what_if == 0).all()


def check_passes(found, times):
    """Sums of one key against {times met: arrivals}, each of 1 W."""
    for k in range(1, REPEATS_MAX + 1):
        assert found[k - 1] == pytest.approx(times[k]), k
    beyond = {k: n for k, n in times.items() if k > REPEATS_MAX}
    assert found[REPEATS_MAX] == pytest.approx(sum(beyond.values()))
    assert found[REPEATS_MAX + 1] == pytest.approx(sum(k * n for k, n in beyond.items()))


def test_a_run_at_one_tag_keeps_its_mean(study):
    """Both mirrors one tag: paths of 0, 1, 2 and 3 or more events, the last with its mean."""
    study.finish("metal", mirror=1.0)
    pair = joined(rectangle((2, 2), (0, 0, 1)), rectangle((2, 2), (0, 0, 0)))
    study.part("pair", pair, medium="sheet", finish="metal")
    study.detector("middle", (0, 0, 0.5), UP, (1, 1), side="both")
    beam(study, 0.25, UP)
    world = world_of(study, events_max=20)
    sums = sums_of(world)
    texts = path_texts(world, sums)
    start = "middle: pair:default mirror"
    assert texts == ["middle: ", start, f"{start} x2", f"{start} x3"]
    flux = sums.paths.batch.sum(axis=1) / 64
    assert flux == pytest.approx([1, 1, 1, 17])
    assert sums.paths.run_sum[3, 0] / 64 == pytest.approx(sum(range(3, 20)))
    assert sums.paths.square == pytest.approx(np.array([1, 1, 1, 17**2]) * ROUND / 1024**2)


def test_a_full_ledger(study, monkeypatch):
    """Paths that find no row go to "other" whole; the rows that are kept stay as they were."""
    world = corridor(study, 12)
    whole = sums_of(world)
    monkeypatch.setattr(runner, "PATHS_MAX", 5)
    cut = sums_of(world)
    assert len(cut.paths.hash) == 5 < len(whole.paths.hash) == 12
    assert (cut.paths.hash == whole.paths.hash[:5]).all()
    assert (cut.paths.batch == whole.paths.batch[:5]).all()
    assert cut.paths.other.sum() / 64 == pytest.approx(7)
    assert cut.paths.other_count[0, 0] == 7 * ROUND
    assert (cut.flux == whole.flux).all()


@pytest.fixture(scope="module")
def plates(tmp_path_factory):
    """Two clear plates over a grey floor in a grey hall, two sources, two planes: (world, sums)."""
    study = Study(tmp_path_factory.mktemp("plates"), length="mm")
    study.finish("grey", diffuse=0.2, mirror=0.2)
    study.medium("glass", 1.5, 0.01)
    study.finish("black", diffuse=0.0)
    finish = {"default": "uncoated", "side": "black"}  # so that no light is guided for long
    study.part("upper", slab(1, 2), medium="glass", finish=finish)
    study.part("lower", slab(-1, 0), medium="glass", finish=finish)
    hall = hollow(box((-11, -11, -4), (11, 11, 4)).tagged("wall"))
    study.part("hall", hall, medium="opaque", finish="grey")
    study.source("lamp", point=(0, 0, 3))
    down = {"center": (1, 1, 3.5), "normal": (0, 0, -1), "radius": 1}
    study.source("beam", disc=down, pattern={"collimated": 5})
    study.detector("between", (0, 0, 0.5), UP, (6, 6), (2, 2), side="both")
    study.detector("under", (0, 0, -2), UP, (8, 8), counts="illuminance")
    world = world_of(study)
    return world, sums_of(world)


def passes(world, codes):
    """({what-if key: times} of a path, keys that it met in a run of three or more)."""
    n_tags = len(world.tag_names)
    times, vague = Counter(), set()
    for code in codes:
        tag, event, run = step_parts(code)
        keys = [tag * N_EVENTS + event]
        if event != THROUGH:
            keys += [n_tags * N_EVENTS + tag]
            keys += [n_tags * (N_EVENTS + 1) + int(world.arrays.tags.part[tag])]
        for key in keys:
            times[key] += run
            if run == 3:
                vague.add(key)
    return times, vague


def test_what_if_sums_are_those_of_the_ledger(plates):
    """Every key that no collapsed run blurs: the flux met so often, batch by batch.

    What was not met at all, by difference, is the flux of the paths without the key.
    """
    world, sums = plates
    paths, group_of = sums.paths, world.arrays.sources.group
    assert paths.other_count.sum() == 0
    n_keys = what_if_keys(len(world.tag_names), len(world.part_names))
    assert sums.what_if.shape == (2, 2, 64, n_keys, REPEATS_MAX + 2)
    expected = np.zeros((2, 2, n_keys, REPEATS_MAX + 1, 64))
    blurred = np.zeros((2, 2, n_keys), bool)
    for row in range(len(paths.hash)):
        d, g = paths.detector[row], group_of[paths.source[row]]
        times, vague = passes(world, paths.step[row, : paths.n_steps[row]].tolist())
        blurred[d, g, list(vague)] = True
        met = np.zeros(n_keys, int)
        met[list(times)] = list(times.values())
        known = np.flatnonzero(met <= REPEATS_MAX)
        expected[d, g, known, met[known]] += paths.batch[row]
    found = np.moveaxis(sums.what_if, 2, -1)  # (detector, group, key, passes, batch)
    absent = sums.flux[:, :, None] - found[:, :, :, : REPEATS_MAX + 1].sum(axis=3)
    found = np.concatenate([absent[:, :, :, None], found], axis=3)
    clear = ~blurred
    assert found[clear][:, : REPEATS_MAX + 1] == pytest.approx(expected[clear], rel=1e-9, abs=1e-9)
    assert (found[clear][:, REPEATS_MAX + 1 :] == 0).all()
    assert (expected[clear][:, 1:].sum(axis=(1, 2)) > 0).sum() > 50  # keys that were met
    assert (expected[clear][:, 2:].sum(axis=(1, 2)) > 0).sum() > 20  # twice and more


def test_passes_never_exceed_the_flux(plates):
    """Blurred keys too: what was not met is never negative."""
    _, sums = plates
    met = sums.what_if[..., : REPEATS_MAX + 1].sum(axis=-1)
    assert (sums.flux[..., None] - met).min() >= -1e-9 * sums.flux.max()


def test_a_tag_counts_all_its_reflecting_lobes(plates):
    """The mean number of passes of a tag is the sum of those of its events but through."""
    world, sums = plates
    n_tags = len(world.tag_names)
    k = np.r_[1 : REPEATS_MAX + 1]
    what_if = sums.what_if
    mean = what_if[..., :REPEATS_MAX] @ k + what_if[..., REPEATS_MAX + 1]
    for tag in range(n_tags):
        lobes = [tag * N_EVENTS + e for e in range(N_EVENTS) if e != THROUGH]
        assert mean[..., n_tags * N_EVENTS + tag] == pytest.approx(
            mean[..., lobes].sum(axis=-1), rel=1e-9, abs=1e-12
        )
    for part in range(len(world.part_names)):
        tags = np.flatnonzero(world.arrays.tags.part == part) + n_tags * N_EVENTS
        assert mean[..., n_tags * (N_EVENTS + 1) + part] == pytest.approx(
            mean[..., tags].sum(axis=-1), rel=1e-9, abs=1e-12
        )


def test_the_ledger_makes_up_the_flux(plates):
    world, sums = plates
    for detector in range(2):
        for group in range(2):
            rows = (sums.paths.detector == detector) & (
                world.arrays.sources.group[sums.paths.source] == group
            )
            total = sums.paths.batch[rows].sum(axis=0) + sums.paths.other[detector, group]
            assert total == pytest.approx(sums.flux[detector, group], rel=1e-9)
            count = sums.paths.count[rows].sum() + sums.paths.other_count[detector, group]
            assert count == sums.flux_count[detector, group]
