"""A scene file becomes a Scene: meanings, defaults, units, included files, notices."""

import hashlib
import math
import pickle
import subprocess
import sys

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from lumentrace.errors import Notice, UserError
from lumentrace.scene import model
from lumentrace.scene.place import Place, one_line
from lumentrace.scene.read import read_scene

STUDY = """\
[study]
title  = "Bench luminaire with a clear cover"
length = "mm"                        # unit of every mesh and every length below
seed   = 7
include = ["../library/paints.toml"]

[medium.pmma]
index      = 1.492
absorption = 0.0008                  # 1/length

[finish.white_paint]
diffuse = 0.90
mirror  = 0.03
[finish.black_anodised]
diffuse = 0.04

[[part]]
name   = "tray"
mesh   = "tray.stl"
medium = "opaque"
finish = { default = "white_paint", outside = "black_anodised", rim = "black_anodised" }
turn   = { axis = [0, 0, 1], degrees = 0 }
at     = [0, 0, 0]

[[part.tag]]
name = "rim"
pick = { facing = [0, 0, -1], within = 5, box = [[-601, -31, -0.1], [601, 31, 0.1]] }
[[part.tag]]
name = "outside"
pick = { grow_from = [0, 0, 42], over = 180 }

[[part]]
name   = "die"
mesh   = "die.stl"
medium = "opaque"
finish = "white_paint"
at     = [-575, 0, 39]
repeat = { count = [24, 1, 1], step = [50, 0, 0] }
[[part.tag]]
name = "top"
pick = { facing = [0, 0, 1], within = 5 }

[[part]]
name   = "cover"
mesh   = "cover.obj"
medium = "pmma"

[[source]]
name     = "leds"
faces    = { part = "die", tag = "top" }
flux     = { lumens = 2400 }
pattern  = "lambertian"
spectrum = { line = 555 }

[[detector]]
name   = "desk"
plane  = { center = [0, 0, -800], normal = [0, 0, 1], across = [1, 0, 0], size = [1600, 1000], cells = [80, 50] }
counts = "illuminance"
side   = "front"
catch  = false

[trace]
rays  = 2_000_000
until = { measure = "desk.mean", relative_error = 0.005 }
rays_max = 100_000_000
events_max = 100_000
map_memory = "2 GiB"

[[limit]]
measure  = "desk.uniformity"
at_least = 0.6
note     = "task area"
"""  # noqa: E501

LIBRARY = '[study]\nlength = "in"\n[finish.grey]\ndiffuse = 0.5\n'

SPOT = """\
[[source]]
name = "spot"
point = [0, 0, 0]
flux = { watts = 1 }
spectrum = { line = 555 }
"""


@pytest.fixture
def read(tmp_path):
    """Writes files, reads the first."""

    def write_and_read(text, **others):
        for name, content in {"study/bench.toml": text, **others}.items():
            path = tmp_path / name
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_bytes(content if isinstance(content, bytes) else content.encode())
        return read_scene(tmp_path / "study/bench.toml")

    return write_and_read


def test_a_whole_study(read, tmp_path):
    scene = read(STUDY, **{"library/paints.toml": LIBRARY})
    assert scene.path == tmp_path / "study/bench.toml"
    assert scene.study == model.Study(
        "Bench luminaire with a clear cover", "mm", 0.001, 7, "air", None, place=None
    )
    assert set(scene.media) == {"air", "vacuum", "pmma"}
    assert scene.media["air"].index == 1.0
    assert scene.media["vacuum"].index == 1 / 1.00027
    assert scene.media["pmma"] == model.Medium("pmma", 1.492, 0.0008, place=None)
    assert set(scene.finishes) == {"uncoated", "white_paint", "black_anodised", "grey"}
    assert scene.finishes["uncoated"].uncoated
    white = model.Finish("white_paint", 0.9, 0.03, 0.0, uncoated=False, place=None)
    assert scene.finishes["white_paint"] == white

    tray, die, cover = scene.parts
    black = model.SideFinish("black_anodised", "black_anodised")
    paint = model.SideFinish("white_paint", "white_paint")
    assert tray.finish == {"default": paint, "outside": black, "rim": black}
    assert tray.mesh == tmp_path / "study/tray.stl"
    assert tray.turn == (model.Turn((0, 0, 1), 0),)
    assert tray.medium == model.OPAQUE
    assert [rule.name for rule in tray.tags] == ["rim", "outside"]
    rim, outside = (rule.picks for rule in tray.tags)
    box = ((-601, -31, -0.1), (601, 31, 0.1))
    assert rim == (model.Pick((0, 0, -1), 5, box, None, None, None, None),)
    assert outside == (model.Pick(None, None, None, (0, 0, 42), 180, None, None),)
    assert die.repeat == model.Grid((24, 1, 1), (50, 0, 0))
    assert die.at == (-575, 0, 39)
    assert cover.finish == {"default": model.SideFinish("uncoated", "uncoated")}
    assert (cover.use, cover.priority, cover.flip, cover.take, cover.scale) == (
        (True, 0, False, None, 1.0)
    )
    (leds,) = scene.sources
    assert leds.shape == model.Faces("die", "top")
    assert leds.flux == model.Flux("lumens", 2400, each=False)
    assert leds.pattern == model.Pattern("lambertian", 0)
    assert (leds.wavelength, leds.group, leds.share) == (555, "leds", 1)
    (desk,) = scene.detectors
    assert (desk.center, desk.normal, desk.across) == ((0, 0, -800), (0, 0, 1), (1, 0, 0))
    assert (desk.size, desk.cells) == ((1600, 1000), (80, 50))
    assert (desk.counts, desk.side, desk.catch) == ("illuminance", "front", False)
    until = model.Until("desk.mean", 0.005)
    expected = model.TraceSettings(2_000_000, until, 100_000_000, 100_000, 2**31, place=None)
    assert scene.trace == expected
    assert scene.limits == (model.Limit("desk.uniformity", 0.6, None, "task area", place=None),)
    assert scene.notices == ()


def test_every_table_knows_its_lines(read):
    scene = read(STUDY, **{"library/paints.toml": LIBRARY})
    tray, die, _ = scene.parts
    assert tray.place.at("finish") == "bench.toml:21"
    assert tray.place.at("finish.rim") == "bench.toml:21"
    assert tray.place.at("priority") == "bench.toml:17"  # not written: the table's own line
    assert tray.tags[1].place.at("pick.grow_from") == "bench.toml:30"
    assert die.place.at() == "bench.toml:32"
    assert scene.finishes["grey"].place.at("diffuse") == "../library/paints.toml:4"
    assert scene.finishes["uncoated"].place is None
    assert scene.limits[0].place.at("note") == "bench.toml:72"
    assert scene.trace.place.at("until.measure") == "bench.toml:64"
    error = tray.place.error("finish.rim", "is odd")
    assert str(error) == "bench.toml:21: part.tray.finish.rim: is odd"


def test_a_place_made_by_hand(tmp_path):
    place = Place(tmp_path / "tray.toml", {"finish": 15}, 12)
    assert place.at("finish") == "tray.toml:15"
    assert place.at("mesh") == "tray.toml:12"
    assert str(place.error("finish", "a\nb")) == "tray.toml:15: finish: a\\nb"
    assert one_line("é\t\x1b[1m") == "é\\t\\x1b[1m"


def test_defaults(read):
    scene = read(SPOT)
    assert scene.study == model.Study("", "mm", 0.001, 1, "air", None, place=None)
    expected = model.TraceSettings(2**20, None, 100_000_000, 100_000, 2**31, place=None)
    assert scene.trace == expected
    (spot,) = scene.sources
    assert spot.pattern == model.Pattern("isotropic", 0)
    assert (spot.turn, spot.at, spot.use) == ((), (0, 0, 0), True)
    assert (scene.parts, scene.detectors, scene.limits) == ((), (), ())


def test_rays_is_the_default_of_rays_max(read):
    desk = STUDY[STUDY.index("[[detector]]") : STUDY.index("[trace]")]
    until = 'until = { measure = "desk.mean", relative_error = 0.1 }\n'
    assert read(f"{SPOT}{desk}[trace]\nrays = 3e5\n{until}").trace.rays_max == 300_000
    scene = read(f"{SPOT}[trace]\nrays_max = 3e5\n")
    text = "bench.toml:7: trace.rays_max: without until it has no effect"
    assert scene.notices == (Notice("doubtful", text),)


def test_other_sources(read):
    scene = read("""\
[[source]]
name = "sun"
disc = { center = [1, 2, 3], normal = [0, 3, 4], radius = 5 }
flux = { irradiance = 1000 }
pattern = { collimated = 0.2667 }
spectrum = { line = 555.5 }
group = "sky"
share = 3
turn = [{ axis = [0, 0, 2], degrees = 30 }, { axis = [1, 0, 0], degrees = -5 }]
at = [0, 0, 1]
[[source]]
name = "panel"
rectangle = { center = [0, 0, 0], normal = [0, 0, 1], across = [1, 1, 1], size = [2, 3] }
flux = { watts = 0.02 }
pattern = { cosine_power = 1.4 }
spectrum = { line = 940 }
group = "sky"
use = false
""")
    sun, panel = scene.sources
    assert sun.shape == model.Disc((1, 2, 3), (0, 0.6, 0.8), 5)
    assert sun.flux == model.Flux("irradiance", 1000, each=False)
    assert sun.pattern == model.Pattern("collimated", 0.2667)
    assert sun.turn == (model.Turn((0, 0, 1), 30), model.Turn((1, 0, 0), -5))
    assert (sun.group, sun.share, sun.at) == ("sky", 3, (0, 0, 1))
    third = 1 / math.sqrt(3)
    assert panel.shape.across == pytest.approx((third, third, third), rel=1e-15)
    assert panel.shape.size == (2, 3)
    assert panel.pattern == model.Pattern("cosine_power", 1.4)
    assert (panel.group, panel.use) == ("sky", False)


def test_sheets_repeats_picks_and_units(read, tmp_path):
    scene = read(f"""\
[study]
length = "cm"
touch = 0.001
surroundings = "vacuum"
[finish.white]
diffuse = 0.9
[finish.film]
diffuse = 0.4
diffuse_through = 0.5
[[part]]
name = "blade"
mesh = "../cad/blade.obj"
medium = "sheet"
finish = {{ default = {{ front = "white", back = "film" }}, edge = "white" }}
repeat = {{ count = 12, axis = [0, 0, 5], degrees = 30, center = [1, 0, 0] }}
take = ["outer", "inner"]
length = "in"
priority = -2
flip = true
[[part.tag]]
name = "tips"
pick = [
  {{ tag = "vane tips" }},
  {{ tube = {{ from = [0, 0, 0], to = [0, 0, 9], radius = [1, 2] }}, facing = [0, 0, 7], within = 0 }},
]
[[part]]
name = "screen"
mesh = "screen.stl"
medium = "sheet"
finish = {{ front = "film", back = "white" }}
use = false
{SPOT}""")  # noqa: E501
    blade, screen = scene.parts
    assert (scene.study.metre, scene.study.touch) == (0.01, 0.001)
    assert scene.study.surroundings == "vacuum"
    assert blade.mesh.resolve() == tmp_path / "cad/blade.obj"
    assert blade.finish == {
        "default": model.SideFinish("white", "film"),
        "edge": model.SideFinish("white", "white"),
    }
    assert screen.finish == {"default": model.SideFinish("film", "white")}
    assert blade.repeat == model.Ring(12, (0, 0, 1), 30, (1, 0, 0))
    assert (blade.take, blade.priority, blade.flip) == (("outer", "inner"), -2, True)
    assert blade.scale == 2.54  # cm in an inch: the unit of this file
    tagged, tube = blade.tags[0].picks
    assert tagged == model.Pick(None, None, None, None, None, None, "vane tips")
    assert tube.tube == model.Tube((0, 0, 0), (0, 0, 9), 1, 2)
    assert (tube.facing, tube.within) == ((0, 0, 1), 0)
    assert not screen.use


def test_included_numbers_are_in_their_own_unit(read, tmp_path):
    parts = f"""\
[study]
length = "in"
[medium.glass]
index = 1.5
absorption = 2.54
[[part]]
name = "block"
mesh = "cad/block.stl"
medium = "glass"
at = [1, 2, 3]
repeat = {{ count = [2, 1, 1], step = [10, 0, 0] }}
[[part.tag]]
name = "top"
pick = {{ box = [[0, 0, 0], [1, 1, 1]] }}
[[part]]
name = "ring"
mesh = "ring.stl"
medium = "glass"
length = "ft"
repeat = {{ count = 3, axis = [0, 0, 1], degrees = 9, center = [1, 0, 0] }}
[[source]]
name = "sun"
disc = {{ center = [1, 0, 0], normal = [0, 0, 1], radius = 2 }}
flux = {{ irradiance = 3 }}
pattern = "isotropic"
spectrum = {{ line = 555 }}
at = [0, 1, 0]
{SPOT.replace("[0, 0, 0]", "[1, 1, 1]")}
[[detector]]
name = "plane"
plane = {{ center = [1, 0, 0], normal = [0, 0, 1], across = [1, 0, 0], size = [1, 2], cells = [3, 4] }}
at = [0, 0, 1]
"""  # noqa: E501
    scene = read(
        '[study]\nlength = "cm"\ninclude = ["../library/parts.toml"]\n',
        **{"library/parts.toml": parts},
    )
    block, ring = scene.parts
    assert scene.media["glass"].absorption == 1.0  # 2.54 per inch
    assert block.mesh.resolve() == tmp_path / "library/cad/block.stl"
    assert block.at == pytest.approx((2.54, 5.08, 7.62), rel=1e-15)
    assert block.repeat == model.Grid((2, 1, 1), (25.4, 0, 0))
    assert block.scale == 2.54
    assert block.tags[0].picks[0].box == ((0, 0, 0), (1, 1, 1))  # the mesh file's own
    assert ring.scale == 30.48
    assert ring.repeat.center == (2.54, 0, 0)
    sun, spot = scene.sources
    assert (sun.shape.center, sun.shape.radius, sun.at) == ((2.54, 0, 0), 5.08, (0, 2.54, 0))
    assert sun.flux.value == 3  # W/m2 in any unit of length
    assert spot.shape.at == (2.54, 2.54, 2.54)
    (plane,) = scene.detectors
    assert (plane.center, plane.size, plane.at) == ((2.54, 0, 0), (2.54, 5.08), (0, 0, 2.54))


def test_an_included_file_without_a_unit_has_that_of_the_study(read):
    part = "[medium.glass]\nindex = 1.5\nabsorption = 3\n"
    text = f'[study]\nlength = "ft"\ninclude = ["part.toml"]\n{SPOT}'
    scene = read(text, **{"study/part.toml": part})
    assert scene.media["glass"].absorption == 3


def test_nested_and_shared_includes(read):
    scene = read(
        f'[study]\ninclude = ["../a/one.toml", "../two.toml"]\n[medium.m0]\nindex = 1\n{SPOT}',
        **{
            "a/one.toml": '[study]\ninclude = ["b/three.toml"]\n[medium.m1]\nindex = 1.1\n',
            "two.toml": '[study]\ninclude = ["a/b/three.toml"]\n[medium.m2]\nindex = 1.2\n',
            "a/b/three.toml": "[medium.m3]\nindex = 1.3\n",
        },
    )
    assert list(scene.media) == ["air", "vacuum", "m0", "m1", "m3", "m2"]
    assert scene.media["m3"].place.at() == "../a/b/three.toml:1"


@pytest.mark.parametrize(
    ("library", "message"),
    [
        ('[study]\ninclude = ["../study/bench.toml"]\n',
         '../lib/one.toml:2: study.include: "../study/bench.toml" includes this file in its turn'),
        ('[study]\ninclude = ["one.toml"]\n',
         '../lib/one.toml:2: study.include: "one.toml" includes this file in its turn'),
        ('[study]\nlength = "mm"\ninclude = [\n"two.toml",\n"none.toml"]\n',
         '../lib/one.toml:5: study.include: "none.toml" does not exist'),
        ('[study]\nseed = 3\n',
         "../lib/one.toml:2: study.seed: of [study] an included file may give only length and "
         "include"),
        ("[study]\nsead = 3\n",
         '../lib/one.toml:2: study.sead: unknown key; allowed: "include", "length"'),
        ("[trace]\nrays = 3\n",
         "../lib/one.toml:1: trace: only the study's own file may hold it, not an included one"),
        ('[[limit]]\nmeasure = "x"\n',
         "../lib/one.toml:1: limit: only the study's own file may hold it, not an included one"),
        ("[medium.glass]\nindex = 1\n",
         "../lib/one.toml:1: medium.glass: is defined twice, first at bench.toml:3"),
        ("[finish.x]\ndiffuse = .3\n",
         "../lib/one.toml:2: found .3; write 0.3, with a digit on either side"),
        (SPOT,
         '../lib/one.toml:2: source.spot.name: "spot" already names a source at bench.toml:6; '
         "parts, sources, groups and detectors share one set of names"),
    ],
)  # fmt: skip
def test_faults_in_included_files(read, library, message):
    text = f'[study]\ninclude = ["../lib/one.toml"]\n[medium.glass]\nindex = 1.5\n{SPOT}'
    with pytest.raises(UserError) as caught:
        read(text, **{"lib/one.toml": library, "lib/two.toml": ""})
    assert str(caught.value) == message


def test_the_digest_covers_included_files(read):
    text = f'[study]\ninclude = ["one.toml"]\n{SPOT}'
    first = read(text, **{"study/one.toml": "# a\n"})
    hashes = [hashlib.sha256(part).digest() for part in (text.encode(), b"# a\n")]
    assert first.digest == hashlib.sha256(b"".join(hashes)).hexdigest()
    assert read(text, **{"study/one.toml": "# b\n"}).digest != first.digest
    assert read(text + "#", **{"study/one.toml": "# a\n"}).digest != first.digest


def test_what_is_told(read):
    scene = read(
        b"\xef\xbb\xbf[medium.air]\nindex = 1.1\n[finish.uncoated]\ndiffuse = 0.5\n"
        + SPOT.replace("555", "940").encode()
        + STUDY[STUDY.index("[[detector]]") : STUDY.index("[trace]")].encode()
    )
    assert scene.media["air"].index == 1.1
    assert not scene.finishes["uncoated"].uncoated
    assert scene.notices == (
        Notice("told", "bench.toml: begins with a byte-order mark; it was passed over"),
        Notice("told", "bench.toml:1: medium.air: used in place of the built-in one"),
        Notice("told", "bench.toml:3: finish.uncoated: used in place of the built-in one"),
        Notice(
            "doubtful",
            "bench.toml:13: detector.desk.counts: no source gives visible light; every value is "
            "0 lx",
        ),
    )


@pytest.mark.parametrize(
    "measure",
    [
        *(f"desk.{of}" for of in ("flux", "mean", "min", "max", "uniformity")),
        *("desk.min_split", "desk.max_split", "desk.uniformity_split", "study.escaped"),
        *("tray.absorbed", "tray:rim.absorbed", "cover:bulk.absorbed", "cover:any-name.absorbed"),
    ],
)
def test_measures_that_limits_may_name(read, measure):
    text = STUDY.replace('"desk.uniformity"', f'"{measure}"')
    scene = read(text, **{"library/paints.toml": LIBRARY})
    assert scene.limits[0].measure == measure


def test_whole_numbers_may_have_a_power_of_ten(read):
    scene = read(f"[study]\nseed = 1e3\n{SPOT}[trace]\nrays = 1e6\nevents_max = 2.5e2\n")
    assert (scene.study.seed, scene.trace.rays, scene.trace.events_max) == (1000, 1_000_000, 250)
    assert all(type(n) is int for n in (scene.study.seed, scene.trace.rays))


def test_line_ends_of_windows(read):
    text = STUDY.replace("\n", "\r\n")
    scene = read(text, **{"library/paints.toml": LIBRARY})
    assert scene.limits[0].place.at("note") == "bench.toml:72"


def test_a_scene_can_be_sent_to_another_process(read):
    scene = read(STUDY, **{"library/paints.toml": LIBRARY})
    assert pickle.loads(pickle.dumps(scene)) == scene


def test_reading_imports_nothing_heavy():
    code = "import sys, lumentrace.scene.read; print(*sys.modules)"
    names = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    loaded = set(names.stdout.split())
    assert "pydantic" in loaded
    assert not loaded & {"numpy", "numba", "scipy", "trimesh", "xarray"}


# What may stand where a value stood; all of it is TOML or near it.
JUNK = [
    *("0", "-1", "1e400", "nan", "-inf", "1e-320", "9" * 400, "true", "1979-05-27", "07:32:00"),
    *('""', '"x"', '"a\\nb"', "'''a\nb'''", '"\\u0000"', "[]", "{}", "[[]]", "[1, 2]", '["a"]'),
    *("[0, 0, 0]", "[1, 2, 3, 4]", "[{ axis = [0, 0, 1], degrees = 1 }]", "{ x = 1 }"),
    *("]", "}", "= =", ".5", ""),
]


def assert_read_or_one_line(folder, raw):
    path = folder / "bench.toml"
    path.write_bytes(raw)
    try:
        scene = read_scene(path)
    except UserError as error:
        text = str(error)
        assert text.isprintable()
        assert text
        return
    assert isinstance(scene, model.Scene)


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    folder = tmp_path_factory.mktemp("mutants")
    (folder / "paints.toml").write_text(LIBRARY, encoding="utf-8")
    return folder


MUTANT = STUDY.replace("../library/", "")


@settings(max_examples=300, deadline=None, derandomize=True)
@given(cut=st.tuples(st.integers(0, len(MUTANT)), st.integers(0, 30)), raw=st.binary(max_size=12))
def test_damaged_bytes(folder, cut, raw):
    data = MUTANT.encode()
    start, length = cut
    assert_read_or_one_line(folder, data[:start] + raw + data[start + length :])


@settings(max_examples=100, deadline=None, derandomize=True)
@given(raw=st.binary(max_size=200))
def test_bytes_that_are_no_scene(folder, raw):
    assert_read_or_one_line(folder, raw)


@settings(max_examples=600, deadline=None, derandomize=True)
@given(data=st.data())
def test_wrong_values(folder, data):
    lines = MUTANT.split("\n")
    rows = [row for row, line in enumerate(lines) if "=" in line]
    for _ in range(data.draw(st.integers(1, 3))):
        row = data.draw(st.sampled_from(rows))
        cuts = [i + 1 for i, c in enumerate(lines[row]) if c in "=,[{"]
        start = data.draw(st.sampled_from(cuts)) if cuts else 0
        ends = [i for i, c in enumerate(lines[row]) if c in ",]}" and i >= start]
        end = data.draw(st.sampled_from([*ends, len(lines[row])]))
        junk = data.draw(st.sampled_from(JUNK))
        lines[row] = f"{lines[row][:start]} {junk} {lines[row][end:]}"
    assert_read_or_one_line(folder, "\n".join(lines).encode())


@settings(max_examples=300, deadline=None, derandomize=True)
@given(data=st.data())
def test_lines_moved_doubled_and_lost(folder, data):
    lines = MUTANT.split("\n")
    for _ in range(data.draw(st.integers(1, 3))):
        row = data.draw(st.integers(0, len(lines) - 1))
        kept = lines[row] if data.draw(st.booleans()) else lines.pop(row)
        lines.insert(data.draw(st.integers(0, len(lines))), kept)
    assert_read_or_one_line(folder, "\n".join(lines).encode())
