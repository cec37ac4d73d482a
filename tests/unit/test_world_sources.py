"""Sources: how rays are dealt, flux in W, where rays start, and in what."""

from fractions import Fraction
from hashlib import blake2b
from math import pi

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from lumentrace.errors import UserError
from lumentrace.models.registry import PATTERNS, STARTS
from lumentrace.world.arrays import BLOCK_RAYS
from lumentrace.world.dealing import deal_rays
from tests.unit.world_study import built, new_study, refused, told
from tests.worlds import box, rectangle

FLUXES = st.lists(
    st.tuples(st.floats(1e-9, 1e9), st.integers(0, 5), st.floats(1e-3, 1e3)),
    min_size=1,
    max_size=60,
)


@given(FLUXES)
def test_dealing_gives_every_source_a_ray_and_the_block_its_1024(sources):
    flux, group, share = zip(*sources, strict=True)
    rays = deal_rays(flux, group, share)
    assert rays.sum() == BLOCK_RAYS and rays.min() >= 1


@given(FLUXES)
def test_a_larger_claim_never_gets_fewer_rays(sources):
    flux, group, share = zip(*sources, strict=True)
    total = {g: sum(f for f, h in zip(flux, group, strict=True) if h == g) for g in group}
    claim = np.array([f / total[g] * s for f, g, s in sources])
    rays = deal_rays(flux, group, share)
    order = np.argsort(claim)
    larger = claim[order][1:] > claim[order][:-1] * (1 + 1e-6)
    assert (np.diff(rays[order])[larger] >= 0).all()


@given(st.lists(st.integers(1, 1000), min_size=1, max_size=40))
def test_dealing_is_the_largest_remainder_in_exact_numbers(flux):
    """Where every claim is above one ray; ties go to the first in the file."""
    claims = [Fraction(f * BLOCK_RAYS, sum(flux)) for f in flux]
    assume(min(claims) >= 1)
    expected = [int(claim) for claim in claims]
    order = sorted(range(len(flux)), key=lambda i: (-(claims[i] - expected[i]), i))
    for i in order[: BLOCK_RAYS - sum(expected)]:
        expected[i] += 1
    assert deal_rays(flux, [0] * len(flux), [1.0] * len(flux)).tolist() == expected


def test_groups_share_alike_and_share_multiplies():
    assert deal_rays([1, 1000], [0, 1], [1, 1]).tolist() == [512, 512]
    assert deal_rays([1, 1000], [0, 1], [3, 1]).tolist() == [768, 256]
    assert deal_rays([1, 3, 100], [0, 0, 1], [1, 1, 1]).tolist() == [128, 384, 512]
    assert deal_rays([1, 1, 1], [0, 1, 2], [1, 1, 1]).tolist() == [342, 341, 341]
    assert deal_rays([1e-9, 1], [0, 0], [1, 1]).tolist() == [1, 1023]


def test_as_many_sources_as_rays_have_one_each_and_one_more_is_refused():
    assert (deal_rays(range(1, 1025), [0] * 1024, [1] * 1024) == 1).all()
    with pytest.raises(UserError, match="1025 sources are in use; allowed: 1024"):
        deal_rays([1] * 1025, [0] * 1025, [1] * 1025)


@pytest.fixture
def study(tmp_path):
    new = new_study(tmp_path)
    new.lists["source"] = []
    return new


LAMBERTIAN = {"pattern": "lambertian"}


def test_flux_in_watts_whatever_its_unit(study):
    """683 lm/W at 555 nm (CIE 018:2019), where V is 1."""
    face = {"faces": {"part": "die"}, **LAMBERTIAN}
    study.part("die", box((0, 0, 0), (1, 1, 1)), medium="opaque", finish="white",
               repeat={"count": [3, 2, 1], "step": [5, 5, 0]})  # fmt: skip
    study.source("all", flux={"lumens": 683}, **face)
    study.source("each", flux={"lumens": 683, "each": True}, **face)
    disc = {"center": [0, 0, 99], "normal": [0, 0, -1], "radius": 10}
    study.source("sun", disc=disc, flux={"irradiance": 1000}, pattern={"collimated": 0})
    square = {"center": [0, 0, 99], "normal": [0, 0, 1], "across": [1, 0, 0], "size": [10, 20]}
    study.source("sky", rectangle=square, flux={"irradiance": 1000}, **LAMBERTIAN)
    world = built(study)
    assert world.source_flux == pytest.approx([1.0, 6.0, 1000 * pi * 0.01**2, 0.2])
    sources = world.arrays.sources
    rays = np.diff(sources.ray_first)
    assert rays.sum() == 1024
    assert sources.ray_flux * rays == pytest.approx(world.source_flux)


def test_a_source_of_faces_takes_them_from_all_copies(study):
    study.part("die", box((0, 0, 0), (1, 2, 3)), medium="opaque", finish="white", at=[9, 0, 0],
               repeat={"count": [1, 4, 1], "step": [0, 5, 0]},
               tag=[{"name": "top", "pick": {"facing": [0, 0, 1], "within": 1}}])  # fmt: skip
    study.source("leds", faces={"part": "die", "tag": "top"}, **LAMBERTIAN)
    arrays = built(study).arrays
    sources, mesh = arrays.sources, arrays.mesh
    assert sources.face_first.tolist() == [0, 8]
    assert (mesh.normal[sources.face] == [0, 0, 1]).all()
    assert sorted(mesh.body[sources.face]) == [0, 0, 1, 1, 2, 2, 3, 3]
    assert sources.face_area == pytest.approx(np.arange(1, 9))


def test_names_key_the_random_numbers(study):
    study.source("a", point=[0, 0, 0])
    study.source("sun", point=[0, 0, 0])
    keys = built(study).arrays.sources.key
    expected = [
        int.from_bytes(blake2b(n, digest_size=8).digest(), "little") for n in (b"a", b"sun")
    ]
    assert keys.dtype == np.uint64 and keys.tolist() == expected


def test_patterns_starts_and_groups(study):
    study.source("p", point=[1, 2, 3], group="both")
    disc = {"center": [0, 0, 9], "normal": [0, 3, 0], "radius": 2}
    study.source("d", disc=disc, pattern={"cosine_power": 1.4}, group="both")
    study.source("e", disc=disc, pattern={"collimated": 60}, use=False)
    study.source("f", disc=disc, pattern={"collimated": 60})
    world = built(study)
    sources = world.arrays.sources
    assert world.group_names == ("both", "f") and sources.group.tolist() == [0, 0, 1]
    assert world.source_names == ("p", "d", "f")
    assert [PATTERNS[i].name for i in sources.pattern] == [
        "isotropic",
        "cosine_power",
        "collimated",
    ]
    assert [STARTS[i].name for i in sources.start] == ["point", "disc", "disc"]
    assert sources.pattern_values[1:, 0] == pytest.approx([1.4, 0.5])
    assert np.diff(sources.ray_first).tolist() == [256, 256, 512]
    frame = sources.place[1, 1:]
    assert frame @ frame.T == pytest.approx(np.eye(3)) and frame[0].tolist() == [0, 1, 0]
    assert np.cross(frame[0], frame[1]) == pytest.approx(frame[2])
    assert sources.size.tolist() == [[0, 0], [2, 0], [2, 0]]


def start_of(study, **keys):
    study.source("here", **keys)
    world = built(study)
    return world.source_start[-1], world


BLOCK = box((-5, -5, -5), (5, 5, 5))


def test_rays_start_in_the_open_air(study):
    study.part("cover", BLOCK, medium="clear")
    text, world = start_of(study, point=[0, 0, 50])
    assert text == "index 1" and world.arrays.sources.immersed.tolist() == [False]
    assert told(world, "doubtful") == []


def test_rays_start_in_the_body_that_acts_at_the_point(study):
    study.medium("oil", 1.4, 0.01)
    study.part("cover", BLOCK, medium="clear")
    study.part("core", box((-1, -1, -1), (1, 1, 1)), medium="oil")
    text, world = start_of(study, point=[0.2, 0.1, 0])
    assert text == "index 1.4 (oil of core)" and world.arrays.sources.immersed.tolist() == [True]
    (doubt,) = told(world, "doubtful")
    line = study.text().splitlines().index("point = [0.2, 0.1, 0]") + 1
    start = f"study.toml:{line}: source.here.point: starts in index 1.4 (oil of core)"
    assert doubt.startswith(start)


def test_a_die_in_a_lens_starts_in_the_lens_and_light_may_be_trapped(study):
    study.medium("clear", 1.5, 0.0)
    study.part("lens", BLOCK, medium="clear")
    study.part("die", box((-1, -1, -1), (1, 1, 1)), medium="opaque", finish="white")
    text, world = start_of(study, faces={"part": "die"}, **LAMBERTIAN)
    assert text == "index 1.5 (clear of lens)"
    assert any(
        "absorbs nothing" in doubt and "events_max" in doubt for doubt in told(world, "doubtful")
    )


def test_rays_of_a_face_in_dry_contact_start_in_the_gap(study):
    study.part("lens", BLOCK, medium="clear")
    study.part("die", box((-1, -1, -7), (1, 1, -5)), medium="opaque", finish="white",
               tag=[{"name": "top", "pick": {"facing": [0, 0, 1], "within": 1}}])  # fmt: skip
    text, world = start_of(study, faces={"part": "die", "tag": "top"}, **LAMBERTIAN)
    assert text == "index 1 (air of the gap to lens)" and told(world, "doubtful") == []
    assert world.arrays.sources.immersed.tolist() == [True]


def test_a_disc_on_a_face_starts_in_what_lies_before_it(study):
    study.part("lens", BLOCK, medium="clear")
    disc = {"center": [0, 0, 5], "radius": 2}
    assert start_of(study, disc={**disc, "normal": [0, 0, 1]}, **LAMBERTIAN)[0] == "index 1"
    study.lists["source"] = []
    text, _ = start_of(study, disc={**disc, "normal": [0, 0, -1]}, **LAMBERTIAN)
    assert text == "index 1.5 (clear of lens)"


def test_a_source_may_start_in_several_media(study):
    study.part("lens", BLOCK, medium="clear")
    disc = {"center": [5, 0, 0], "normal": [0, 0, 1], "radius": 2}
    text, _ = start_of(study, disc=disc, **LAMBERTIAN)
    assert set(text.split(" and ")) == {"index 1", "index 1.5 (clear of lens)"}


def test_the_surroundings_are_named_where_they_are_not_air(study):
    study.medium("water", 1.33)
    text = study.text
    study.text = lambda: text().replace('length = "mm"', 'length = "mm"\nsurroundings = "water"')
    shown, world = start_of(study, point=[0, 0, 0])
    assert shown == "index 1.33 (water)"
    assert world.arrays.media.values[:, 0].tolist() == [1.33, 1.0]


def test_a_source_on_faces_without_area_is_refused(study):
    sliver = rectangle((2, 2))
    sliver.vertex[3] = sliver.vertex[[0, 2]].mean(axis=0)
    sliver = sliver._replace(tags=["plate", "edge"])
    study.part("plate", sliver, medium="sheet", finish="white")
    study.source("leds", faces={"part": "plate", "tag": "edge"}, **LAMBERTIAN)
    assert "source.leds.faces: " in refused(study)
