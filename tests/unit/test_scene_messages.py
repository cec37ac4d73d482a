"""What a user reads when a scene file is wrong: one exact line for each slip."""

import pytest

from lumentrace.errors import UserError
from lumentrace.scene.read import read_scene

BENCH = """\
[study]
length = "mm"

[medium.pmma]
index = 1.492

[finish.white]
diffuse = 0.90
mirror = 0.03
[finish.opal]
diffuse_through = 0.5

[[part]]
name = "tray"
mesh = "tray.stl"
medium = "opaque"
finish = { default = "white", rim = "white" }
[[part.tag]]
name = "rim"
pick = { facing = [0, 0, -1], within = 5 }

[[part]]
name = "cover"
mesh = "cover.obj"
medium = "pmma"

[[part]]
name = "shade"
mesh = "shade.stl"
medium = "sheet"
finish = { front = "white", back = "opal" }
repeat = { count = [24, 1, 1], step = [50, 0, 0] }

[[source]]
name = "leds"
faces = { part = "tray", tag = "rim" }
flux = { lumens = 2400 }
pattern = "lambertian"
spectrum = { line = 555 }

[[source]]
name = "spot"
rectangle = { center = [0, 0, 9], normal = [0, 0, 1], across = [1, 0, 0], size = [1, 2] }
flux = { irradiance = 1000 }
pattern = { collimated = 0.2667 }
spectrum = { line = 940 }

[[detector]]
name = "desk"
plane = { center = [0, 0, -800], normal = [0, 0, 1], across = [1, 0, 0], size = [16, 10], cells = [8, 5] }
counts = "illuminance"

[trace]
rays = 2e6
until = { measure = "desk.mean", relative_error = 0.005 }

[[limit]]
measure = "desk.uniformity"
at_least = 0.6
"""  # noqa: E501

NAMES = "parts, sources, groups and detectors share one set of names"
RESERVED = "is reserved (as are default, bulk, account, study, surroundings); choose another name"
LETTERS = "a name is a letter, then letters, digits, _ or -"
TOP = '"detector", "finish", "limit", "medium", "part", "source", "study", "trace"'
PLANE = "bench.toml:50: detector.desk.plane"
RIM = "bench.toml:20: part.tray.tag.rim"

# (what is replaced in BENCH, by what, the message)
CASES = [
    # names
    ('name = "cover"', 'name = "tray"',
     f'bench.toml:23: part.tray.name: "tray" already names a part at bench.toml:14; {NAMES}'),
    ('name = "desk"', 'name = "leds"',
     f'bench.toml:49: detector.leds.name: "leds" already names a source at bench.toml:35; {NAMES}'),
    ('name = "leds"', 'name = "leds"\ngroup = "desk"',
     'bench.toml:36: source.leds.group: "desk" already names a detector at bench.toml:50; '
     f"{NAMES}"),
    ('name = "leds"', 'name = "leds"\ngroup = "spot"',
     f'bench.toml:36: source.leds.group: "spot" already names a source at bench.toml:43; {NAMES}'),
    ('name = "cover"', 'name = "2nd cover"',
     f'bench.toml:23: part.2nd cover.name: found "2nd cover"; {LETTERS}'),
    ('name = "cover"', 'name = "account"',
     f'bench.toml:23: part.account.name: "account" {RESERVED}'),
    ('name = "rim"', 'name = "bulk"',
     f'bench.toml:19: part.tray.tag.bulk.name: "bulk" {RESERVED}'),
    ("[[part.tag]]", '[[part.tag]]\nname = "rim"\npick = { tag = "x" }\n[[part.tag]]',
     'bench.toml:22: part.tray.tag.rim.name: "rim" stands twice, first at bench.toml:19; '
     "a pick may be a list"),
    ("[medium.pmma]", "[medium.opaque]",
     'bench.toml:4: medium.opaque: found "opaque" as the name of a medium; "opaque" has a meaning '
     "of its own"),
    ("[finish.opal]", '[finish."o pal"]',
     f'bench.toml:10: finish.o pal: found "o pal" as the name of a finish; {LETTERS}'),
    # unknown names
    ('medium = "pmma"', 'medium = "pnma"',
     'bench.toml:25: part.cover.medium: no medium is named "pnma"; did you mean "pmma"?'),
    ('rim = "white"', 'rim = "wite"',
     'bench.toml:17: part.tray.finish.rim: no finish is named "wite"; did you mean "white"?'),
    ('back = "opal"', 'back = "gold"',
     'bench.toml:31: part.shade.finish.back: no finish is named "gold"; allowed: "opal", '
     '"uncoated", "white"'),
    ('part = "tray", tag', 'part = "try", tag',
     'bench.toml:36: source.leds.faces.part: no part is named "try"; did you mean "tray"?'),
    ('length = "mm"', 'surroundings = "water"',
     'bench.toml:2: study.surroundings: no medium is named "water"; allowed: "air", "pmma", '
     '"vacuum"'),
    # finishes
    ("mirror = 0.03", "mirror = 0.2",
     "bench.toml:7: finish.white: the shares add up to 1.1 (diffuse 0.9 + mirror 0.2); at most 1"),
    ("mirror = 0.03", "mirror = 1.5",
     "bench.toml:9: finish.white.mirror: found 1.5; must be at most 1"),
    ("mirror = 0.03", "mirror = -0.1",
     "bench.toml:9: finish.white.mirror: found -0.1; must be at least 0"),
    ('default = "white", rim', 'default = "opal", rim',
     'bench.toml:17: part.tray.finish.default: "opal" has diffuse_through = 0.5, and an opaque '
     "part has no light inside"),
    ('default = "white", rim', 'default = "uncoated", rim',
     'bench.toml:17: part.tray.finish.default: "uncoated" lets light in, and an opaque part has '
     "no light inside"),
    ('front = "white"', 'front = "uncoated"',
     'bench.toml:31: part.shade.finish.front: "uncoated" is for the face of a medium, and a sheet '
     "has no inside"),
    ('default = "white", rim', "rim",
     "bench.toml:17: part.tray.finish.default: is missing; an opaque part needs a finish for all "
     "its faces"),
    ('default = "white", rim = "white"', 'front = "white", back = "white"',
     "bench.toml:17: part.tray.finish.default: is missing; an opaque part needs a finish for all "
     "its faces; front and back are for sheets"),
    ('finish = { default = "white", rim = "white" }\n', "",
     "bench.toml:13: part.tray.finish: is missing; an opaque part needs a finish for all its "
     "faces"),
    ('front = "white", back = "opal"', 'front = "white"',
     "bench.toml:31: part.shade.finish.back: the name of a finish is needed for either side"),
    ('rim = "white"', 'rim = { front = "white", back = "white" }',
     "bench.toml:17: part.tray.finish.rim: front and back are for sheets; name one finish"),
    ('rim = "white"', 'bulk = "white"',
     'bench.toml:17: part.tray.finish.bulk: "bulk" is the inside of a part and has no finish'),
    ('finish = { default = "white", rim = "white" }', "finish = 3",
     "bench.toml:17: part.tray.finish: found 3; the name of a finish is needed, or a table of "
     "them by tag"),
    # keys
    ('mesh = "cover.obj"', 'mehs = "cover.obj"',
     'bench.toml:24: part.cover.mehs: unknown key; did you mean "mesh"?'),
    ('mesh = "cover.obj"\n', "",
     "bench.toml:22: part.cover.mesh: is missing (STL or OBJ file, relative to this file)"),
    ("[trace]", "[gate]",
     f"bench.toml:53: gate: unknown key; allowed: {TOP}"),
    ("[trace]", "[[sweep]]\n[trace]",
     f"bench.toml:53: sweep: unknown key; allowed: {TOP}"),
    ("[trace]", "[[contact]]\n[trace]",
     f"bench.toml:53: contact: unknown key; allowed: {TOP}"),
    ("diffuse = 0.90", "film = { reflect = 0.005 }",
     'bench.toml:8: finish.white.film: unknown key; allowed: "diffuse", "diffuse_through", '
     '"mirror"'),
    ("index = 1.492", "index = { table = \"nk.csv\" }",
     "bench.toml:5: medium.pmma.index: found a table; a number is needed"),
    ("index = 1.492", "index = 1.492\nscattering = 0.3",
     'bench.toml:6: medium.pmma.scattering: unknown key; allowed: "absorption", "index"'),
    ("line = 555", "table = \"s.csv\"",
     'bench.toml:39: source.leds.spectrum.table: unknown key; allowed: "line"'),
    ('medium = "pmma"', 'medium = "pmma"\nsmooth = "curved"',
     'bench.toml:26: part.cover.smooth: unknown key; allowed: "at", "finish", "flip", "length", '
     '"medium", "mesh", "name", "priority" and 5 more'),
    ('counts = "illuminance"', 'counts = "exitance"',
     'bench.toml:51: detector.desk.counts: found "exitance"; allowed: "irradiance", "illuminance"'),
    ("at_least = 0.6", 'at_least = "60 %"',
     'bench.toml:59: limit.at_least: found "60 %"; a number is needed'),
    # values
    ("line = 555", "line = 99.5",
     "bench.toml:39: source.leds.spectrum.line: found 99.5; wavelengths run from 100 nm to "
     "100000 nm (100 um)"),
    ("line = 555", "line = 1e6",
     "bench.toml:39: source.leds.spectrum.line: found 1000000.0; wavelengths run from 100 nm to "
     "100000 nm (100 um)"),
    ("line = 555", "line = 850",
     "bench.toml:37: source.leds.flux.lumens: light of 850 nm is invisible and has no lumens "
     "(visible: 360 to 830 nm); give watts"),
    ("index = 1.492", "index = nan",
     "bench.toml:5: medium.pmma.index: found nan; a finite number is needed"),
    ("index = 1.492", "index = inf",
     "bench.toml:5: medium.pmma.index: found inf; a finite number is needed"),
    ("index = 1.492", "index = 1492",
     "bench.toml:5: medium.pmma.index: found 1492; must be at most 10"),
    ("index = 1.492", "index = true",
     "bench.toml:5: medium.pmma.index: found true; a number is needed"),
    ("center = [0, 0, -800]", "center = [0, 0, 1e20]",
     f"{PLANE}.center: value 3: found 1e+20; must be at most 1e+15"),
    ("center = [0, 0, -800]", "center = [0, 0]",
     f"{PLANE}.center: found 2 values; needed: 3"),
    ("center = [0, 0, -800]", "center = [0, 0, 0, 1]",
     f"{PLANE}.center: found 4 values; needed: 3"),
    ("center = [0, 0, -800]", "center = 0",
     f"{PLANE}.center: found 0; a list in [ ] is needed"),
    ("center = [0, 0, -800], normal = [0, 0, 1]", "center = [0, 0, 0], normal = [0, 0, 0]",
     f"{PLANE}.normal: found [0, 0, 0]; a direction must have a length"),
    ("across = [1, 0, 0], size = [16", "across = [0, 0, -2], size = [16",
     f"{PLANE}.across: is parallel to normal; it must run along the plane"),
    ("across = [1, 0, 0], size = [1,", "across = [0, 0, 1], size = [1,",
     "bench.toml:43: source.spot.rectangle.across: is parallel to normal; it must run along the "
     "plane"),
    ("size = [16, 10]", "size = [16, -10]",
     f"{PLANE}.size: value 2: found -10; must be above 0"),
    ("cells = [8, 5]", "cells = [0, 5]",
     f"{PLANE}.cells: value 1: found 0; must be at least 1"),
    ("cells = [8, 5]", "cells = [8.5, 5]",
     f"{PLANE}.cells: value 1: found 8.5; a whole number is needed"),
    ("cells = [8, 5]", "cells = [1e5, 1e5]",
     f"{PLANE}.cells: makes 10 000 000 000 cells in all; at most 100 000 000"),
    ("count = [24, 1, 1]", "count = [1000, 1000, 1000]",
     "bench.toml:32: part.shade.repeat.count: found 1 000 000 000 copies; at most 1 000 000"),
    ("count = [24, 1, 1], step = [50, 0, 0]", "count = 24",
     "bench.toml:32: part.shade.repeat.axis: is missing (Direction of the axis)"),
    ("repeat = { count = [24, 1, 1], step = [50, 0, 0] }", "repeat = 24",
     "bench.toml:32: part.shade.repeat: found 24; a table with count and step, or with count, "
     "axis and degrees"),
    ("rays = 2e6", "rays = 0", "bench.toml:54: trace.rays: found 0; must be at least 1"),
    ("rays = 2e6", "rays = 2.5", "bench.toml:54: trace.rays: found 2.5; a whole number is needed"),
    ("rays = 2e6", "rays = true",
     "bench.toml:54: trace.rays: found true; a whole number is needed"),
    ("rays = 2e6", 'map_memory = "2GB"',
     'bench.toml:54: trace.map_memory: found "2GB"; write a number and one of B, KiB, MiB, GiB, '
     'TiB, as in "2 GiB"'),
    ("relative_error = 0.005", "relative_error = 1.5",
     "bench.toml:55: trace.until.relative_error: found 1.5; must be below 1"),
    ('length = "mm"', 'length = "km"',
     'bench.toml:2: study.length: found "km"; allowed: "mm", "cm", "m", "in", "ft"'),
    ('length = "mm"', "seed = -1", "bench.toml:2: study.seed: found -1; must be at least 0"),
    ('length = "mm"', "title = 3", "bench.toml:2: study.title: found 3; text in quotes is needed"),
    ('counts = "illuminance"', "catch = 1",
     "bench.toml:51: detector.desk.catch: found 1; true or false is needed"),
    # picks
    ("pick = { facing = [0, 0, -1], within = 5 }", "pick = {}",
     f"{RIM}.pick: is empty; allowed: facing, within, box, grow_from, over, tube, tag"),
    (", within = 5", "", f"{RIM}.pick: has facing and no within; they go together"),
    ("within = 5", "within = 181", f"{RIM}.pick.within: found 181; must be at most 180"),
    ("facing = [0, 0, -1], within = 5", "over = 3",
     f"{RIM}.pick: has over and no grow_from; they go together"),
    ("facing = [0, 0, -1], within = 5", "box = [[1, 0, 0], [0, 1, 1]]",
     f"{RIM}.pick.box: the first corner must be the smaller one, in x, y and z"),
    ("facing = [0, 0, -1], within = 5",
     "tube = { from = [0, 0, 0], to = [0, 0, 1], radius = [2, 1] }",
     f"{RIM}.pick.tube.radius: found [2, 1]; the inner radius comes first"),
    ("facing = [0, 0, -1], within = 5",
     "tube = { from = [0, 0, 0], to = [0, 0, 0], radius = [1, 2] }",
     f"{RIM}.pick.tube.to: is the same point as from; the tube has no length"),
    ("pick = { facing = [0, 0, -1], within = 5 }", "pick = []",
     f"{RIM}.pick: found an empty list; a pick is needed"),
    ("pick = { facing = [0, 0, -1], within = 5 }", 'pick = [{ tag = "a" },\n{ over = 1 }]',
     "bench.toml:21: part.tray.tag.rim.pick: has over and no grow_from; they go together"),
    # sources
    ('faces = { part = "tray", tag = "rim" }\n', "",
     "bench.toml:34: source.leds: found none; one of faces, point, disc, rectangle is needed"),
    ('name = "leds"', 'name = "leds"\npoint = [0, 0, 0]',
     "bench.toml:34: source.leds: found faces and point; one of faces, point, disc, rectangle is "
     "needed"),
    ('faces = { part = "tray", tag = "rim" }', "point = [0, 0, 0]",
     'bench.toml:38: source.leds.pattern: a point has no normal; its pattern is "isotropic"'),
    ('pattern = "lambertian"\n', "",
     'bench.toml:34: source.leds.pattern: is missing; allowed: "lambertian", "isotropic", '
     "{ cosine_power = m } or { collimated = degrees }"),
    ('pattern = "lambertian"', 'pattern = "lambert"',
     'bench.toml:38: source.leds.pattern: found "lambert"; allowed: "lambertian", "isotropic"'),
    ('pattern = "lambertian"', "pattern = {}",
     "bench.toml:38: source.leds.pattern: found none; one of cosine_power, collimated is needed"),
    ("lumens = 2400", "lumens = 2400, watts = 3",
     "bench.toml:37: source.leds.flux: found watts and lumens; one of watts, lumens, irradiance "
     "is needed"),
    ("lumens = 2400", "irradiance = 3",
     "bench.toml:37: source.leds.flux.irradiance: is for a disc or a rectangle, not for faces"),
    ("lumens = 2400", "lumens = 0",
     "bench.toml:37: source.leds.flux.lumens: found 0; must be above 0"),
    ("irradiance = 1000", "irradiance = 1000, each = true",
     "bench.toml:44: source.spot.flux.each: is for faces of a part, not for a rectangle"),
    ("lumens = 2400 }", "lumens = 2400 }\nat = [0, 0, 1]",
     'bench.toml:38: source.leds.at: its faces stand where the part "tray" does; move the part'),
    ('mesh = "tray.stl"', 'mesh = "tray.stl"\nuse = false',
     'bench.toml:37: source.leds.faces.part: the part "tray" is left out (use = false)'),
    # measures
    ('"desk.uniformity"', '"desk.unformity"',
     'bench.toml:58: limit.measure: no measure is named "desk.unformity"; did you mean '
     '"desk.uniformity"?'),
    ('"desk.uniformity"', '"dusk.mean"',
     'bench.toml:58: limit.measure: no measure is named "dusk.mean"; did you mean "desk.mean"?'),
    ('"desk.uniformity"', '"tray:bulk.absorbed"',
     'bench.toml:58: limit.measure: "tray:bulk.absorbed": there is no light inside the part '
     '"tray"'),
    ('"desk.uniformity"', '"traay:rim.absorbed"',
     'bench.toml:58: limit.measure: no measure is named "traay:rim.absorbed"; did you mean '
     '"tray.absorbed"?'),
    ('"desk.mean"', '"desk"',
     'bench.toml:55: trace.until.measure: no measure is named "desk"; did you mean "desk.min"?'),
    ('name = "desk"', 'name = "desk"\nuse = false',
     'bench.toml:56: trace.until.measure: "desk.mean": the detector "desk" is left out '
     "(use = false)"),
    ("at_least = 0.6\n", "", "bench.toml:57: limit: has no bound; at_least or at_most is needed"),
    ("at_least = 0.6", "at_least = 0.6\nat_most = 0.5",
     "bench.toml:59: limit.at_least: found 0.6, above at_most = 0.5; no value lies between"),
    # the traps of TOML
    ("within = 5 }", 'within = 5 }\nat = [0, 0, 1]',
     "bench.toml:21: part.tray.tag.rim.at: belongs to the part, not to its tag; move it above "
     "line 18"),
    ('[[part]]\nname = "tray"', '[part]\nname = "tray"',
     "bench.toml:13: part: found [part]; write [[part]], in double brackets"),
    ('[[part]]\nname = "cover"', '[part]\nname = "cover"',
     "bench.toml:22: part: found [part]; write [[part]], in double brackets"),
    ("[[part.tag]]", "[part.tag]",
     "bench.toml:18: part.tray.tag: found [part.tag]; write [[part.tag]], in double brackets"),
    ("[[detector]]", "[detector]",
     "bench.toml:48: detector: found [detector]; write [[detector]], in double brackets"),
    ('[[source]]\nname = "spot"', '[source]\nname = "spot"',
     "bench.toml:41: source: found [source]; write [[source]], in double brackets"),
    ("[[limit]]", "[limit]",
     "bench.toml:57: limit: found [limit]; write [[limit]], in double brackets"),
    ("[study]", "[[study]]", "bench.toml:1: study: found [[study]]; write [study], in single "
     "brackets"),
    ("[medium.pmma]", "[[medium.pmma]]",
     "bench.toml:4: medium.pmma: found [[medium.pmma]]; write [medium.pmma], in single brackets"),
    ("[medium.pmma]", "[[medium]]",
     "bench.toml:4: medium: found [[medium]]; write [medium.NAME], in single brackets"),
    ("[study]", '[[part.tag]]\nname = "x"\n[study]',
     "bench.toml:1: part.tag: a tag belongs to the [[part]] above it, and there is none"),
    ("{ facing = [0, 0, -1], within = 5 }", "{ facing = [0, 0, -1],\n  within = 5 }",
     "bench.toml:20: a table in { } must end on the line where it begins"),
    ("{ facing = [0, 0, -1], within = 5 }", "{  # which\n facing = [0, 0, -1], within = 5 }",
     "bench.toml:20: a table in { } must end on the line where it begins"),
    ("diffuse = 0.90", "diffuse = .90",
     "bench.toml:8: found .90; write 0.90, with a digit on either side"),
    ("diffuse = 0.90", "diffuse = -.90",
     "bench.toml:8: found -.90; write -0.90, with a digit on either side"),
    ("diffuse = 0.90", "diffuse = 1.",
     "bench.toml:8: found 1.; write 1.0, with a digit on either side"),
    ("step = [50, 0, 0]", "step = [.5, 0, 0]",
     "bench.toml:32: found .5; write 0.5, with a digit on either side"),
    ('"cover.obj"', '"cad\\cover.obj"',
     "bench.toml:24: found a backslash in quotes; write paths with / between folders"),
    ('"tray.stl"', '"cad\\tray.stl"',
     'bench.toml:15: part.tray.mesh: found "cad\\tray.stl"; write paths with / between folders, '
     "not with a backslash"),
    ('"cover.obj"', "'cad\\cover.obj'",
     'bench.toml:24: part.cover.mesh: found "cad\\cover.obj"; write paths with / between folders, '
     "not with a backslash"),
    ('"cover.obj"', '""',
     'bench.toml:24: part.cover.mesh: found ""; the name of a file is needed'),
    ("[finish.opal]", "[finish.white]", "bench.toml:10: finish.white: stands twice, first at "
     "line 7"),
    ("index = 1.492", "index = 1.492\nindex = 1.5",
     "bench.toml:6: medium.pmma.index: stands twice, first at line 5"),
    ('length = "mm"', 'length = mm', "bench.toml:2: not TOML: invalid value"),
    ('length = "mm"', "title.x = 1\ntitle.x.y = 2",
     "bench.toml:3: adds to a table or a value that is complete where it was written"),
    # several slips: the first in the file is told
    ("index = 1.492\n\n[finish.white]", 'index = "1.492"\n[finish.white]\ngloss = 1',
     'bench.toml:5: medium.pmma.index: found "1.492"; a number is needed'),
    ("mirror = 0.03", "mirror = 7\ngloss = 1",
     'bench.toml:10: finish.white.gloss: unknown key; allowed: "diffuse", "diffuse_through", '
     '"mirror"'),
]  # fmt: skip


@pytest.mark.parametrize(("old", "new", "message"), CASES)
def test_one_slip(tmp_path, old, new, message):
    assert old in BENCH
    path = tmp_path / "bench.toml"
    path.write_text(BENCH.replace(old, new, 1), encoding="utf-8")
    with pytest.raises(UserError) as caught:
        read_scene(path)
    assert str(caught.value) == message


def test_bench_itself_is_right(tmp_path):
    path = tmp_path / "bench.toml"
    path.write_text(BENCH, encoding="utf-8")
    assert read_scene(path).notices == ()


def test_no_file(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "folder").mkdir()
    (tmp_path / "bytes.toml").write_bytes(b"[study]\ntitle = '\xff'\n")
    for name, text in (
        ("sub/none.toml", "sub/none.toml: does not exist"),
        ("folder", "folder: is a folder; a file is needed"),
        ("bytes.toml", "bytes.toml:2: found byte 0xff; a scene file is text in UTF-8"),
        ("bytes.toml/x", "bytes.toml/x: does not exist"),
        ("x" * 300, f"{'x' * 300}: cannot be read: File name too long"),
        ("/dev/null", "/dev/null: is not a file"),
    ):
        with pytest.raises(UserError) as caught:
            read_scene(name)
        assert str(caught.value) == text


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "bench.toml: source: no source is in use; a study needs a [[source]]"),
        ("x = " + "[" * 5000, "bench.toml: brackets are nested too deeply"),
        ("x = " + "1" * 5000, "bench.toml: a whole number has too many digits"),
        ("x", "bench.toml:1: not TOML: expected '=' after a key in a key/value pair"),
        ('"a\\nb" = 1', f"bench.toml:1: a\\nb: unknown key; allowed: {TOP}"),
        ("part = 3", "bench.toml:1: part: found 3; a list in [ ] is needed"),
        ("part = [3]", "bench.toml:1: part: value 1: found 3; a table is needed"),
        ("[study]\ntitle = '''\n", "bench.toml:2: not TOML: expected \"'''\""),
    ],
)
def test_hardly_a_scene(tmp_path, text, message):
    path = tmp_path / "bench.toml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(UserError) as caught:
        read_scene(path)
    assert str(caught.value) == message


def test_more_sources_than_a_block_has_rays(tmp_path):
    source = (
        '[[source]]\nname = "s{}"\npoint = [0, 0, 0]\nflux = {{ watts = 1 }}\n'
        "spectrum = {{ line = 555 }}\n"
    )
    path = tmp_path / "bench.toml"
    path.write_text("".join(source.format(n) for n in range(1024)), encoding="utf-8")
    assert len(read_scene(path).sources) == 1024
    path.write_text("".join(source.format(n) for n in range(1025)), encoding="utf-8")
    with pytest.raises(UserError, match="^bench.toml:5121: source.s1024: found 1 025 sources; "):
        read_scene(path)
