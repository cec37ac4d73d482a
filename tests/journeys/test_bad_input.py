"""Bad input: exit 2, one line that names file, line and key, nothing on standard output, nothing
written, no traceback.

A case is what to replace in a good file, by what, how the line must begin and what else it must
say. Each stands for one kind of mistake; all mistakes of a kind are tested with their reader.
"""

import struct

import pytest

from tests.journeys.command import PLATE, SCENE, lumentrace, small_scene

SCENE_FAULTS = {
    "a medium that is not there": (
        'medium = "glass"', 'medium = "glas"',
        "plate.toml:16: part.window.medium: ", 'did you mean "glass"?',
    ),
    "a finish that is not there": (
        'finish = "grey"', 'finish = "gray"',
        "plate.toml:23: part.floor.finish: ", 'did you mean "grey"?',
    ),
    "an opaque part without a finish": (
        'finish = "grey"\n', "", "plate.toml:19: part.floor.finish: ", "missing",
    ),
    "shares above one": (
        "diffuse = 0.5", "diffuse = 0.5\nmirror = 0.6", "plate.toml:10: finish.grey: ", "1.1",
    ),
    "an unknown key": ("title  =", "titel  =", "plate.toml:2: study.titel: ", '"title"?'),
    "a word of a later version": (
        "diffuse = 0.5", "rough = 0.5", "plate.toml:11: finish.grey.rough: ", "unknown key",
    ),
    "an unknown unit": ('"mm"', '"furlong"', "plate.toml:3: study.length: ", '"mm", "cm", "m"'),
    "single brackets": (
        '[[part]]\nname   = "window"', '[part]\nname   = "window"',
        "plate.toml:13: part: ", "[[part]]",
    ),
    "a number that begins with its point": (
        "absorption = 0.01", "absorption = .01", "plate.toml:8: ", "0.01",
    ),
    "an inline table over two lines": (
        "{ lumens = 100 }", "{\n lumens = 100 }", "plate.toml:29: ", "end on the line",
    ),
    "a backslash in a path": (
        'mesh   = "plate.obj"\nmedium = "glass"', 'mesh   = "a\\plate.obj"\nmedium = "glass"',
        "plate.toml:15: ", "backslash",
    ),
    "a key of the part after a tag": (
        "at     = [0, 0, 10]",
        '[[part.tag]]\nname = "top"\npick = { facing = [0, 0, 1], within = 5 }\nat = [0, 0, 10]',
        "plate.toml:20: part.window.tag.top.at: ", "move it above line 17",
    ),
    "a name used twice": (
        'name   = "floor"', 'name   = "window"', "plate.toml:20: part.window.name: ", "toml:14",
    ),
    "lumens of invisible light": (
        "line = 555", "line = 940", "plate.toml:29: source.lamp.flux.lumens: ", "invisible",
    ),
    "an unknown measure": (
        '"desk.mean"', '"desk.men"', "plate.toml:42: limit.measure: ", '"desk.mean"?',
    ),
    "a direction without a length": (
        "normal = [0, 0, 1]", "normal = [0, 0, 0]", "plate.toml:35: detector.desk.plane.normal: ",
        "must have a length",
    ),
    "a number that is none": (
        "[0, 0, 10]", "[0, 0, nan]", "plate.toml:17: part.window.at: ", "nan",
    ),
    "a mesh that is not there": (
        'mesh   = "plate.obj"\nmedium = "glass"', 'mesh   = "plate.ob"\nmedium = "glass"',
        "plate.toml:15: part.window.mesh: ", "plate.ob",
    ),
    "a rule that takes no face": (
        "at     = [0, 0, 10]\n",
        "at     = [0, 0, 10]\n"
        '[[part.tag]]\nname = "top"\npick = { facing = [1, 1, 1], within = 5 }\n',
        "plate.toml:20: part.window.tag.top.pick: ", "no face",
    ),
    "a tag that the mesh does not have": (
        '"desk.mean"', '"floor:abve.absorbed"', "plate.toml:42: limit.measure: ", "above",
    ),
    "equal priorities where parts cross": (
        "at     = [0, 0, 10]\n", "at     = [0, 0, 10]\nturn = { axis = [0, 0, 1], degrees = 0 }\n"
        '[[part]]\nname = "other"\nmesh = "plate.obj"\nmedium = "glass"\nat = [3, 3, 10.5]\n',
        "plate.toml:", "window",
    ),
}  # fmt: skip


@pytest.mark.parametrize("case", SCENE_FAULTS)
def test_a_fault_in_the_scene_file(case, tmp_path):
    old, new, start, said = SCENE_FAULTS[case]
    assert SCENE.count(old) == 1
    small_scene(tmp_path).write_text(SCENE.replace(old, new), encoding="utf-8")
    _refused("trace", tmp_path, start, said)


def _stl(count: int, kept: int) -> bytes:
    """A binary STL that announces `count` triangles and holds `kept`."""
    triangle = struct.pack("<12fH", 0, 0, 1, 0, 0, 0, 1, 0, 0, 0, 1, 0, 0)
    return b"\0" * 80 + struct.pack("<I", count) + triangle * kept


MESH_FAULTS = {
    "cut short": ("plate.stl", _stl(12, 11), "12"),
    "empty": ("plate.stl", b"", "empty"),
    "a pointer of large-file storage": (
        "plate.stl",
        b"version https://git-lfs.github.com/spec/v1\noid sha256:0\nsize 684\n",
        "pointer",
    ),
    "a coordinate that is no number": (
        "plate.obj", PLATE.replace("v 5 -5 1", "v nan -5 1").encode(), "nan",
    ),
    "an index out of range": ("plate.obj", PLATE.replace("f 4 1 5 8", "f 4 1 5 9").encode(), "9"),
    "open where a medium fills it": (
        "plate.obj", PLATE.replace("f 4 1 5 8\n", "").encode(), "open",
    ),
}  # fmt: skip


@pytest.mark.parametrize("case", MESH_FAULTS)
def test_a_fault_in_a_mesh(case, tmp_path):
    file, content, said = MESH_FAULTS[case]
    scene = SCENE.replace('mesh   = "plate.obj"', f'mesh   = "{file}"')
    small_scene(tmp_path).write_text(scene, encoding="utf-8")
    (tmp_path / file).write_bytes(content)
    _refused("check", tmp_path, "plate.toml:15: part.window.mesh: ", said)


def _refused(verb, folder, start, said):
    before = sorted(folder.iterdir())
    done = lumentrace(verb, "plate.toml", cwd=folder)
    assert done.returncode == 2
    assert done.stdout == ""
    assert done.stderr.startswith(start), done.stderr
    assert said in done.stderr
    assert done.stderr.count("\n") == 1, done.stderr
    assert sorted(folder.iterdir()) == before


def test_a_scene_without_a_run_names_the_command_to_type(tmp_path):
    scene = small_scene(tmp_path)
    for verb in ("ledger", "draw"):
        done = lumentrace(verb, scene.name, cwd=tmp_path)
        assert done.returncode == 2
        assert done.stdout == ""
        assert done.stderr == "plate.toml: has no run yet; type: lumentrace trace plate.toml\n"


def test_a_file_that_is_no_run_is_refused(tmp_path):
    (tmp_path / "old.nc").write_text("no run", encoding="ascii")
    done = lumentrace("ledger", "old.nc", cwd=tmp_path)
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.startswith("old.nc: ")
    assert done.stderr.count("\n") == 1


def test_a_folder_that_is_a_file_is_refused_before_anything_is_traced(tmp_path):
    scene = small_scene(tmp_path)
    done = lumentrace("trace", scene.name, "--out", "plate.obj", "--rays", "1e12", cwd=tmp_path)
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.startswith("plate.obj: ")
    assert done.stderr.count("\n") == 1
