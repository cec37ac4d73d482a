"""What a ray is inside: contacts, nested and overlapping media, sources within.

z <= 4; indices and lengths exact. Normal incidence: R = ((n1 - n2) / (n1 + n2))^2.
"""

from itertools import permutations, product

import numpy as np
import pytest

from tests.hand import follow_rays, started_inside, unit
from tests.unit.engine_study import (
    DOWN,
    UP,
    beam,
    different,
    path_flux,
    path_texts,
    slab,
    sums_of,
    world_of,
)
from tests.worlds import Study, agree, box, precise, rectangle, sphere


@pytest.fixture
def new(tmp_path):
    """A maker of studies, each in a folder of its own."""
    count = iter(range(100))

    def made():
        folder = tmp_path / str(next(count))
        folder.mkdir()
        study = Study(folder, length="mm")
        for name, index in (("light", 1.2), ("crown", 1.5), ("flint", 1.8)):
            study.medium(name, index)
        study.finish("white", diffuse=0.9)
        study.finish("grey", diffuse=0.5)
        return study

    return made


def reflectance(n1, n2):
    return ((n1 - n2) / (n1 + n2)) ** 2


def measured(study, low, high):
    """Catching planes below and above everything."""
    study.detector("below", (0, 0, low), UP, (8, 8), catch=True, side="both")
    study.detector("above", (0, 0, high), DOWN, (8, 8), catch=True, side="both")


def stack(new, first, priority):
    """A crown plate on a flint plate, which touch; `first` in the file."""
    study = new()
    parts = {"upper": (slab(0, 1), "crown"), "lower": (slab(-1, 0), "flint")}
    for name in sorted(parts, key=lambda name: name != first):
        mesh, medium = parts[name]
        study.part(name, mesh, medium=medium, priority=priority.get(name, 0))
    beam(study, 2)
    measured(study, -2, 3)
    return world_of(study)


@pytest.mark.parametrize(
    ("first", "priority", "named"),
    [
        ("upper", {}, "upper:bottom"),
        ("lower", {}, "lower:top"),
        ("upper", {"lower": 1}, "lower:top"),
        ("lower", {"upper": 1}, "upper:bottom"),
        ("lower", {"lower": -1}, "upper:bottom"),
    ],
)
def test_optical_contact_is_one_event(new, first, priority, named):
    """R of the two indices, never air between; the outranking face is named, and only it."""
    world = stack(new, first, priority)
    sums = sums_of(world, rounds=2)
    texts = path_texts(world, sums)
    direct = f"below: upper:top through, {named} through, lower:bottom through"
    r01, r12, r20 = reflectance(1, 1.5), reflectance(1.5, 1.8), reflectance(1.8, 1)
    precise(path_flux(world, sums, direct), (1 - r01) * (1 - r12) * (1 - r20))
    back = f"above: upper:top through, {named} reflect, upper:top through"
    agree([path_flux(world, sums, back)], [(1 - r01) ** 2 * r12])
    other = {"upper:bottom": "lower:top", "lower:top": "upper:bottom"}[named]
    assert not any(other in text for text in texts)
    row = texts.index(direct)
    length = sums.paths.optical[row] / sums.paths.batch[row].sum()
    assert length == pytest.approx(1 + 1.5 + 1.8 + 1, rel=1e-9)


def test_who_is_named_changes_no_number(new):
    """The same rays go the same ways, to the last bit."""
    one, *others = [
        sums_of(stack(new, first, priority))
        for first, priority in (("upper", {}), ("lower", {}), ("lower", {"upper": 3}))
    ]
    for other in others:
        assert not {"flux", "cell_batch", "flux_count"} & set(different(one, other))


def test_a_finish_named_in_contact_acts_for_both(new):
    """A grey face between two clear plates: half is lost there, half scattered back."""
    for finished in ("upper", "lower"):
        study = new()
        finish = {"upper": {"bottom": "grey"}, "lower": {"top": "grey"}}[finished]
        for name, mesh in (("upper", slab(0, 1)), ("lower", slab(-1, 0))):
            given = {"default": "uncoated", **finish} if name == finished else "uncoated"
            study.part(name, mesh, medium="crown", finish=given)
        beam(study, 2)
        measured(study, -2, 3)
        world = world_of(study)
        sums = sums_of(world)
        tag = world.tag_names.index("upper:bottom" if finished == "upper" else "lower:top")
        texts = path_texts(world, sums)
        assert not any(text.startswith("below") for text in texts)
        assert sums.account[0, tag].sum() / 64 > 0.5 * (1 - 0.04) * 0.99


def test_nested_parts_of_equal_priority(new):
    """The inner one fills what they share, whatever the order of the file; all bits agree."""
    boxes = {"outer": (6, "light"), "middle": (4, "crown"), "inner": (2, "flint")}
    way = ["outer", "middle", "inner", "inner", "middle", "outer"]
    direct = "below: " + ", ".join(f"{name}:default through" for name in way)
    indices = [1, 1.2, 1.5, 1.8]
    passed = np.prod([1 - reflectance(*pair) for pair in zip(indices, indices[1:], strict=False)])
    first = None
    for order in permutations(boxes):
        study = new()
        for name in order:
            half, medium = boxes[name]
            study.part(name, box([-half] * 3, [half] * 3), medium=medium)
        beam(study, 7)
        measured(study, -8, 9)
        world = world_of(study)
        sums = sums_of(world)
        agree([path_flux(world, sums, direct)], [passed**2])
        row = path_texts(world, sums).index(direct)
        length = sums.paths.optical[row] / sums.paths.batch[row].sum()
        assert length == pytest.approx(1 + 4 * 1.2 + 4 * 1.5 + 4 * 1.8 + 2, rel=1e-9)
        first = first or sums
        assert not {"flux", "cell_batch", "flux_count", "lost"} & set(different(sums, first))


@pytest.mark.parametrize(("winner", "first"), list(product("ab", "ab")))
def test_overlapping_parts_by_priority(new, winner, first):
    """The larger priority fills the overlap; the other's surface in it leaves no trace."""
    study = new()
    parts = {"a": (slab(0, 2), "crown"), "b": (slab(1, 3), "flint")}
    for name in sorted("ab", key=lambda name: name != first):
        mesh, medium = parts[name]
        study.part(name, mesh, medium=medium, priority=2 if name == winner else 1)
    beam(study, -1, UP)
    measured(study, -2, 4)
    world = world_of(study)
    sums = sums_of(world, rounds=2)
    shared = {"a": "a:top", "b": "b:bottom"}
    hidden = {"a": "b:bottom", "b": "a:top"}[winner]
    texts = path_texts(world, sums)
    assert not any(hidden in text for text in texts)
    direct = f"above: a:bottom through, {shared[winner]} through, b:top through"
    passed = (1 - reflectance(1, 1.5)) * (1 - reflectance(1.5, 1.8)) * (1 - reflectance(1.8, 1))
    precise(path_flux(world, sums, direct), passed)
    row = texts.index(direct)
    length = sums.paths.optical[row] / sums.paths.batch[row].sum()
    crown, flint = (2, 1) if winner == "a" else (1, 2)
    assert length == pytest.approx(1 + 1.5 * crown + 1.8 * flint + 1, rel=1e-9)


@pytest.mark.parametrize("other", ["flint", "opaque"])
def test_a_gap_within_touch_changes_nothing(new, other):
    """Rays aimed at the diagonals by which both faces of a contact are cut into triangles.

    Whether the faces lie in one plane or 1e-6 apart, which triangle of each is met, and that the
    two need not overlap, must not matter: none is lost, all goes the same way (relative 1e-5).
    """
    rng = np.random.default_rng(1)
    n = 20_000
    along = rng.uniform(-0.9, 0.9, n)
    target = np.column_stack([along, along, np.zeros(n)])
    target[:, :2] += rng.normal(size=(n, 2)) * 2e-6
    origin = target + 0.05 * unit(rng.normal(size=(n, 3)) * (1, 1, 0) + (0, 0, 0.7))
    fates = []
    for gap in (0.0, 1e-6):
        study = new()
        study.medium("dark", 1.5, 1.0)
        study.part("upper", box((-1, -1, 0), (1, 1, 1)), medium="dark")
        finish = {"finish": "grey"} if other == "opaque" else {}
        study.part("lower", box((-1, -1, -1), (1, 1, -gap)), medium=other, **finish)
        study.source("lamp", point=(0, 0, 5))
        world = world_of(study, touch=1e-4)
        fates.append(follow_rays(world, origin, unit(target - origin)))
    for fate in fates:
        assert fate.lost == () and fate.unresolved == 0
        assert fate.open < 1e-12
    assert fates[1].absorbed == pytest.approx(fates[0].absorbed, rel=1e-5)
    assert fates[1].escaped == pytest.approx(fates[0].escaped, rel=1e-5)


def test_a_hidden_part_changes_nothing(new):
    """A part wholly inside one of larger priority might as well not be there: all bits agree."""
    results = []
    for hidden in (False, True):
        study = new()
        study.part("glass", sphere(2, 2.0), medium="crown", priority=1)
        beam(study, 4)
        measured(study, -5, 5)
        if hidden:
            study.part("core", sphere(2, 1.0), medium="flint")
        results.append(sums_of(world_of(study)))
    assert not {"flux", "cell_batch", "flux_count"} & set(different(*results))
    assert results[0].paths.batch.tobytes() == results[1].paths.batch.tobytes()


def test_a_source_within_two_nested_parts(new):
    """Rays start in the inner one: its index, and the way out through both."""
    study = new()
    study.part("outer", box([-4] * 3, [4] * 3), medium="crown")
    study.part("inner", box([-2] * 3, [2] * 3), medium="flint")
    beam(study, 0.5)
    measured(study, -5, 5)
    world = world_of(study)
    sums = sums_of(world)
    direct = "below: inner:default through, outer:default through"
    passed = (1 - reflectance(1.8, 1.5)) * (1 - reflectance(1.5, 1))
    agree([path_flux(world, sums, direct)], [passed])
    row = path_texts(world, sums).index(direct)
    length = sums.paths.optical[row] / sums.paths.batch[row].sum()
    assert length == pytest.approx(2.5 * 1.8 + 2 * 1.5 + 1, rel=1e-9)


def test_surroundings_have_their_own_index(new):
    """In a medium like the plate's nothing is reflected, and lengths are those of the medium."""
    study = new()
    study.part("plate", slab(-1, 0), medium="crown")
    beam(study, 1)
    measured(study, -2, 2)
    world = world_of(study, surroundings="crown")
    sums = sums_of(world)
    assert path_texts(world, sums) == ["below: plate:top through, plate:bottom through"]
    assert sums.flux[0].sum() == pytest.approx(64 * 1.0, rel=1e-9)
    assert sums.paths.optical[0] / sums.paths.batch[0].sum() == pytest.approx(4.5, rel=1e-9)


def test_what_a_start_lies_in(new):
    """20,000 places among parts that nest, overlap, touch and stand in the way: by parity."""
    study = new()
    boxes = {
        "big": ((-5, -5, -5), (5, 5, 5)),
        "nested": ((-3, -3, -3), (3, 3, 3)),
        "flush": ((-1, -1, -5), (1, 1, -3)),  # shares a face with each of the two
        "next": ((5, -5, -5), (8, 5, 5)),  # touches the big one
        "above": ((-5, -5, 5), (5, 5, 6)),
        "across": ((-6, 1, 1), (6, 2, 2)),
    }
    for priority, (name, (low, high)) in enumerate(boxes.items()):
        study.part(name, box(low, high), medium="crown", priority=priority)
    study.part("block", box((-2, -2, -2), (-1, 2, 2)), medium="opaque", finish="white")
    study.part("screen", rectangle((4, 4), (0, 0, 4)), medium="sheet", finish="white")
    study.source("lamp", point=(0, 0, 20))
    study.detector("plane", (0, 0, 3), UP, (20, 20))
    world = world_of(study)
    rng = np.random.default_rng(1)
    place = rng.uniform(-9, 9, (20_000, 3))
    found = started_inside(world, place)
    for name, (low, high) in boxes.items():
        expected = ((place > low) & (place < high)).all(axis=1)
        assert (found[:, world.body_names.index(name)] == expected).all(), name
        assert expected.any()
    for name in ("block", "screen"):
        assert not found[:, world.body_names.index(name)].any()
