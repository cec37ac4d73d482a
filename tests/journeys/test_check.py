"""`check`: what a scene holds, what is doubtful; it traces and writes nothing."""

import pytest

from tests.journeys.command import SCENE, SCENES, answer, assert_narrow, lumentrace, ok, small_scene


def test_check_tells_what_it_understood(tmp_path):
    scene = small_scene(tmp_path)
    text = ok("check", scene.name, cwd=tmp_path)
    assert_narrow(text)
    lines = [" ".join(line.split()) for line in text.splitlines()]
    assert "plate.toml: A plate of glass over a floor" in lines
    assert "2 parts, 1 source, 1 detector, 1 limit. Unit mm." in lines
    assert "window 10 x 10 x 1 0.01 x 0.01 x 0.001 12 glass" in lines
    assert "window:rim 8 40 16.7 % uncoated" in lines
    assert "floor:above 2 100 41.7 % grey" in lines
    assert "Planned: 65 536 rays." in lines
    lamp = (
        "lamp point, 100 lm (0.1464 W) at 555 nm, isotropic, 100 % of the rays, starts in index 1"
    )
    assert lamp in " ".join(lines)
    assert "desk 2 x 2 4 x 4 illuminance, lx from the front, passes" in lines
    assert "desk.mean at least 100 lx" in lines
    assert lines[-1] == "Nothing wrong, 0 doubtful. Nothing was traced."


def test_check_for_machines_holds_the_same_facts(tmp_path):
    scene = small_scene(tmp_path)
    found = answer("check", scene.name, cwd=tmp_path)
    assert found["parts"]["window"]["size"] == pytest.approx([10, 10, 1])
    assert found["parts"]["window"]["volume"] == pytest.approx(100)
    assert found["tags"]["window:rim"]["area"] == pytest.approx(40)
    assert found["sources"]["lamp"]["ray_share"] == 1.0
    # 100 lm / (683 lm/W V(555 nm)), V = 1.000 from the CIE table
    assert found["sources"]["lamp"]["flux"] == pytest.approx(100 / 683, rel=1e-3)
    assert found["sources"]["lamp"]["pattern"] == {"kind": "isotropic", "value": 0.0}
    assert found["sources"]["lamp"]["faces"] is None and found["sources"]["lamp"]["share"] == 1.0
    assert found["trace"] == {"rays": 65536, "until": None, "rays_max": 65536}
    assert found["detectors"]["desk"]["cells"] == [2, 2]
    assert found["limits"] == [
        {"measure": "desk.mean", "at_least": 100.0, "at_most": None, "note": ""}
    ]
    assert sorted(p.name for p in tmp_path.iterdir()) == ["plate.obj", "plate.toml"]


def test_check_compiles_nothing(tmp_path):
    scene = small_scene(tmp_path)
    cache = tmp_path / "cache"
    done = lumentrace("check", scene.name, cwd=tmp_path, env={"LUMENTRACE_CACHE": str(cache)})
    assert done.returncode == 0
    assert not list(cache.rglob("*.nbi"))


def test_parts_that_touch_are_listed_with_what_was_taken(tmp_path):
    scene = small_scene(tmp_path)
    scene.write_text(SCENE.replace("at     = [0, 0, 10]", "at     = [0, 0, 0]"), encoding="utf-8")
    contact = answer("check", scene.name, cwd=tmp_path)["contacts"]
    assert [c["parts"] for c in contact] == [["window", "floor"]]
    assert contact[0]["area"] == pytest.approx(100)
    assert contact[0]["taken"] == "dry"


def changed(folder, *pairs):
    """The small scene with texts of its file replaced."""
    scene = small_scene(folder)
    text = SCENE
    for old, new in pairs:
        assert old in text
        text = text.replace(old, new)
    scene.write_text(text, encoding="utf-8")
    return scene


def words(text: str) -> str:
    """The text with each run of white space as one blank."""
    return " ".join(text.split())


def test_the_tolerance_of_touching_and_parts_that_overlap_are_shown(tmp_path):
    scene = changed(
        tmp_path,
        ("seed   = 3", "seed   = 3\ntouch  = 0.001"),
        ("at     = [0, 0, 10]", "at     = [0, 0, -0.3]"),
    )
    text = ok("check", scene.name, cwd=tmp_path)
    assert "\ntouching (within 0.001 mm)  area mm2  gap mm  taken as\n" in text
    assert "window, floor - - overlaps; the opaque face acts" in words(text)
    assert_narrow(text)
    *_, contact = answer("check", scene.name, cwd=tmp_path)["contacts"]
    assert contact == {
        "parts": ["window", "floor"],
        "area": None,
        "gap": None,
        "taken": "overlaps; the opaque face acts",
    }


def test_a_source_shows_its_faces_its_copies_its_group_and_what_is_planned(tmp_path):
    scene = changed(
        tmp_path,
        ('"grey"\n', '"grey"\nrepeat = { count = [4, 1, 1], step = [20, 0, 0] }\n'),
        ("point    = [0, 0, 20]", 'faces = { part = "floor", tag = "above" }\ngroup = "room"'),
        ('"isotropic"', '"lambertian"'),
        ("rays = 65_536", 'until = { measure = "desk.mean", relative_error = 0.005 }'),
    )  # fmt: skip
    text = ok("check", scene.name, cwd=tmp_path)
    lamp = "lamp floor:above, 4 x 25 lm = 100 lm (0.1464 W) at 555 nm, lambertian, group room,"
    assert lamp in words(text)
    planned = "Planned: until desk.mean is known within 0.5 %, at most 100 000 000 rays."
    assert f"\n{planned}\n" in text
    assert_narrow(text)
    found = answer("check", scene.name, cwd=tmp_path)
    assert found["sources"]["lamp"]["faces"] == {"part": "floor", "tag": "above"}
    assert found["trace"]["until"] == {"measure": "desk.mean", "relative_error": 0.005}


def test_a_limit_with_two_bounds_and_a_note_keeps_within_the_terminal(tmp_path):
    name = "window_of_the_laboratory_on_the_upper_floor"
    both = f'measure  = "{name}:above.absorbed"\nat_least = 0.25\nat_most  = 12.5\n'
    note = "as agreed with the people who work there"
    scene = changed(
        tmp_path,
        ("window", name),
        ('measure  = "desk.mean"\n', f'{both}note = "{note}"\n[[limit]]\nmeasure = "desk.mean"\n'),
    )  # fmt: skip
    text = ok("check", scene.name, cwd=tmp_path)
    assert_narrow(text)
    lines = text.splitlines()
    first = next(i for i, line in enumerate(lines) if line.startswith(f"{name}:above.absorbed"))
    assert [words(line) for line in lines[first : first + 4]] == [
        f"{name}:above.absorbed at least 0.25 %",
        "at most 12.5 %",
        f"note: {note}",
        "desk.mean at least 100 lx",
    ]
    assert lines[first + 1].index("at most") == lines[first].index("at least")


def test_a_sheet_is_not_called_open_and_an_open_part_is(tmp_path):
    scene = changed(tmp_path, ('"opaque"', '"sheet"'))
    mesh = tmp_path / "half.obj"
    mesh.write_text((tmp_path / "plate.obj").read_text().replace("f 4 1 5 8\n", ""))
    text = scene.read_text().replace(
        'mesh   = "plate.obj"\nmedium = "sheet"', 'mesh   = "half.obj"\nmedium = "sheet"'
    )
    scene.write_text(text)
    assert "10 sheet\n" in "\n".join(map(words, ok("check", scene.name, cwd=tmp_path).splitlines()))
    scene.write_text(text.replace('"sheet"', '"opaque"'))
    shown = "\n".join(map(words, ok("check", scene.name, cwd=tmp_path).splitlines()))
    assert "10 opaque, open\n" in shown


def test_doubtful_and_told_lines_leave_the_exit_status_at_zero(tmp_path):
    scene = small_scene(tmp_path)
    scene.write_text(SCENE.replace("555", "940").replace("lumens", "watts"), encoding="utf-8")
    text = ok("check", scene.name, cwd=tmp_path)
    assert "\ndoubtful: plate.toml:36: detector.desk.counts: no source gives visible" in text
    assert text.endswith("Nothing wrong, 1 doubtful. Nothing was traced.\n")


@pytest.mark.parametrize("name", ["bench_lamp", "range_finder"])
def test_the_scenes_of_the_project_are_without_doubt(name):
    text = ok("check", SCENES / name / f"{name}.toml")
    assert_narrow(text)
    assert text.endswith("Nothing wrong, 0 doubtful. Nothing was traced.\n")


def test_long_names_keep_within_the_terminal(tmp_path):
    scene = small_scene(tmp_path)
    name = "window_with_a_name_that_is_quite_long_even_for_a_part_of_a_cad_export_of_2026"
    scene.write_text(SCENE.replace("window", name), encoding="utf-8")
    assert_narrow(ok("check", scene.name, cwd=tmp_path))


def test_schema_accepts_what_the_reader_accepts_and_knows_no_later_word():
    schema = answer("schema")
    assert schema["properties"].keys() == {
        "study", "medium", "finish", "part", "source", "detector", "trace", "limit",
    }  # fmt: skip
    assert lumentrace("schema").stdout == lumentrace("schema", "--json").stdout
