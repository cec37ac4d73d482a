"""What is refused of a mesh, with part, count, place and advice; what is put right, and told."""

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from tests.unit.world_study import add_file, ascii_stl, binary_stl, built, new_study, refused, told
from tests.worlds import Mesh, box, joined, rectangle, sphere

CUBE = box((-1, -1, -1), (1, 1, 1))


def without(mesh: Mesh, *faces: int) -> Mesh:
    return Mesh(mesh.vertex, np.delete(mesh.corner, faces, axis=0))


def turned(mesh: Mesh, *faces: int) -> Mesh:
    corner = mesh.corner.copy()
    corner[list(faces)] = corner[list(faces), ::-1]
    return Mesh(mesh.vertex, corner)


@pytest.fixture
def study(tmp_path):
    return new_study(tmp_path)


POINTER = "version https://git-lfs.github.com/spec/v1\noid sha256:4d7a\nsize 12345\n"
HUGE = binary_stl(CUBE._replace(vertex=CUBE.vertex * 1e13))


@pytest.mark.parametrize(
    ("content", "file", "message"),
    [
        (b"", "a.stl", '"a.stl" is empty (0 bytes); export it again'),
        (POINTER, "a.stl", "is a pointer file of large-file storage, not a mesh; fetch it"),
        (binary_stl(CUBE)[:-30], "a.stl", "is cut short: it announces 12 faces (684 bytes) and"),
        (binary_stl(CUBE, count=11), "a.stl", "is too long for its count: it announces 11 faces"),
        (binary_stl(Mesh(CUBE.vertex, CUBE.corner[:0])), "a.stl", "holds no face"),
        ("# nothing\n", "a.obj", "holds no face"),
        (HUGE, "a.stl", "has 36 corners with coordinates beyond 1e+12, the first of face 1 at ("),
        ("v 0 0 0\nv nan 0 0\nv 0 1 0\nf 1 2 3\n", "a.obj", "the first of face 1 at (nan, 0, 0)"),
        ("v 0 0 0\nv inf 0 0\nv 0 1 0\nf 1 2 3\n", "a.obj", "has 1 corner with coordinates that"),
        ("v 0 0 0\nv 1 0 0\nv 2 0 0\nf 1 2 3\n", "a.obj", "has no face with an area, of 1"),
        ("v 0 0 0\nv 1 0 0\nv 1 0 0\nf 1 2 3\n", "a.obj", "has no face with an area, of 1"),
        ("v 0 0 0\nf 1 2 3\n", "a.obj", "vertex 3 of 1; the file may be cut short"),
        ("x", "a.ply", 'ends in ".ply"; allowed: .stl, .obj'),
    ],
)  # fmt: skip
def test_damaged_files_are_refused(study, content, file, message):
    add_file(study, "tray", content, file)
    text = refused(study)
    line = study.text().splitlines().index(f'mesh = "{file}"') + 1
    assert text.startswith(f"study.toml:{line}: part.tray.mesh: ")
    assert message in text


def test_nan_in_a_binary_stl_is_refused(study):
    mesh = CUBE._replace(vertex=CUBE.vertex.copy())
    mesh.vertex[5, 1] = np.nan
    add_file(study, "tray", binary_stl(mesh), "a.stl")
    text = refused(study)
    assert f"has {(mesh.corner == 5).sum()} corners with coordinates that are not finite" in text
    first = np.flatnonzero((mesh.corner == 5).any(axis=1))[0] + 1
    assert f"the first of face {first} at (1, nan, 1)" in text


def test_a_missing_file_is_refused_with_the_nearest_name(study):
    add_file(study, "tray", binary_stl(CUBE), "cover.stl")
    study.lists["part"][0]["mesh"] = "cower.stl"
    assert '"cower.stl" does not exist; did you mean "cover.stl"?' in refused(study)


def test_a_folder_for_a_mesh_is_called_a_folder(study):
    study.part("tray", CUBE, medium="opaque", finish="white")
    study.lists["part"][0]["mesh"] = "."
    text = refused(study)
    assert "part.tray.mesh: " in text
    assert f'"{study.folder.name}" is a folder; allowed: a file that ends in .stl, .obj' in text


@pytest.mark.parametrize(
    ("mesh", "message"),
    [
        (without(CUBE, 0), "is open: 3 edges with a face on one side only, the first at ("),
        (joined(CUBE, box((1, 1, -1), (2, 2, 1))), "has 1 edge with more than two faces"),
        (joined(CUBE, box((0, 0, 0), (3, 3, 3))), "crosses itself in "),
        (joined(CUBE, box((0, -1, -1), (2, 1, 1))), "crosses itself in "),
    ],
)
def test_a_medium_needs_a_surface_that_holds_it(study, mesh, message):
    study.part("cover", mesh, medium="clear")
    text = refused(study)
    assert "part.cover.mesh" in text and message in text and "clear" in text


def moebius(n: int = 24) -> Mesh:
    """A band with one half turn."""
    angle = 2 * np.pi * np.arange(n) / n
    ring = []
    for side in (-0.3, 0.3):
        radius = 1 + side * np.cos(angle / 2)
        ring.append(
            np.stack(
                [radius * np.cos(angle), radius * np.sin(angle), side * np.sin(angle / 2)], axis=1
            )
        )
    i = np.arange(n)
    j, low, high = (i + 1) % n, np.where(i == n - 1, n, 0), np.where(i == n - 1, 0, n)
    corner = np.concatenate(
        [np.stack([i, j + low, j + high], 1), np.stack([i, j + high, i + n], 1)]
    )
    return Mesh(np.concatenate(ring), corner)


def test_a_one_sided_sheet_is_used_and_doubted(study):
    study.part("band", moebius(), medium="sheet", finish="white")
    assert any("disagree on the front" in text for text in told(built(study), "doubtful"))


def test_an_open_opaque_part_is_used_and_told(study):
    study.part("tray", without(CUBE, 0), medium="opaque", finish="white")
    world = built(study)
    assert any("is open at 3 edges" in text and "used as it is" in text for text in told(world))
    assert len(world.arrays.mesh.corner) == 11
    assert not world.parts[0].closed and world.parts[0].volume is None


def said(study, text: str) -> str:
    """A remark on the mesh of the part cover, with its place."""
    line = study.text().splitlines().index('mesh = "cover.obj"') + 1
    return f"study.toml:{line}: part.cover.mesh: {text}"


@pytest.mark.parametrize("medium", ["clear", "opaque"])
def test_inside_out_is_turned_and_told(study, medium):
    finish = {"finish": "white"} if medium == "opaque" else {}
    study.part("cover", CUBE.inward(), medium=medium, **finish)
    world = built(study)
    assert told(world) == [said(study, '"cover.obj" is inside out: turned')]
    assert world.parts[0].volume == pytest.approx(8.0)


def test_faces_wound_against_their_neighbours_are_turned_and_told(study):
    study.part("cover", turned(CUBE, 3, 7), medium="clear")
    world = built(study)
    assert told(world) == [
        said(study, '"cover.obj" has 2 faces wound against the neighbours: turned')
    ]
    assert world.parts[0].volume == pytest.approx(8.0)


def test_a_hollow_keeps_normals_that_point_into_it(study):
    hollow = box((-0.5, -0.5, -0.5), (0.5, 0.5, 0.5))
    study.part("cover", joined(CUBE, hollow.inward()), medium="clear")
    assert told(built(study)) == []
    assert built(study).parts[0].volume == pytest.approx(7.0)
    study.part("other", joined(CUBE, hollow).moved((9, 0, 0)), medium="clear")
    world = built(study)
    assert any("closed surfaces of 12 faces inside out" in text for text in told(world))
    assert world.parts[1].volume == pytest.approx(7.0)


def test_a_sheet_keeps_its_winding_unless_flipped(study):
    study.part("up", rectangle((2, 2)), medium="sheet", finish="white")
    study.part("down", rectangle((2, 2)), medium="sheet", finish="white", flip=True, at=[0, 0, 9])
    world = built(study)
    assert (world.arrays.mesh.normal[:, 2] == [1, 1, -1, -1]).all()
    assert told(world) == told(world, "doubtful") == []


def test_flip_of_a_closed_part_is_refused(study):
    study.part("tray", CUBE, medium="opaque", finish="white", flip=True)
    assert "part.tray.flip" in refused(study)


def test_repeated_vertices_are_welded_and_told(study):
    mesh = Mesh(CUBE.vertex[CUBE.corner].reshape(-1, 3), np.arange(36).reshape(-1, 3))
    mesh.vertex[mesh.vertex == 0] = -0.0
    study.part("cover", mesh, medium="clear")
    world = built(study)
    assert told(world) == [said(study, '"cover.obj" repeats 28 vertices: welded')]
    assert len(world.arrays.mesh.vertex) == 8


def test_minus_zero_is_zero(study):
    flat = box((0, 0, 0), (1, 1, 1))
    mesh = Mesh(flat.vertex[flat.corner].reshape(-1, 3), np.arange(36).reshape(-1, 3))
    mesh.vertex[::2] = np.where(mesh.vertex[::2] == 0, -0.0, mesh.vertex[::2])
    study.part("cover", mesh, medium="clear")
    assert len(built(study).arrays.mesh.vertex) == 8


def test_stl_is_welded_without_a_word(study):
    add_file(study, "cover", binary_stl(CUBE), "cover.stl", medium="clear")
    world = built(study)
    assert told(world) == [] and len(world.arrays.mesh.vertex) == 8 and world.parts[0].closed


def test_faces_with_equal_corners_are_dropped_and_told(study):
    mesh = Mesh(CUBE.vertex, np.concatenate([CUBE.corner, [[0, 0, 1]]]))
    study.part("cover", mesh, medium="clear")
    world = built(study)
    assert len(world.arrays.mesh.corner) == 12
    assert "has 1 face with two equal corners, the first at (-1, -1, -1): dropped" in told(world)[0]


def sliver_cube() -> Mesh:
    """A cube of which one edge has a corner in its middle on one of its two sides only."""
    vertex = np.concatenate([CUBE.vertex, [[0.0, -1.0, -1.0]]])
    a, b = 0, 1  # the edge from (-1, -1, -1) to (1, -1, -1)
    split = next(
        f for f, c in enumerate(CUBE.corner) if {a, b} <= set(c) and (CUBE.vertex[c, 2] == -1).all()
    )
    face = list(CUBE.corner[split])
    while not (face[0] in (a, b) and face[1] in (a, b)):
        face = face[1:] + face[:1]
    corner = np.delete(CUBE.corner, split, axis=0).tolist()
    corner += [[face[0], 8, face[2]], [8, face[1], face[2]], [face[0], face[1], 8]]
    return Mesh(vertex, np.array(corner))


def test_slivers_are_kept_for_closedness_and_never_hit(study):
    study.part("cover", sliver_cube(), medium="clear", turn={"axis": [1, 2, 3], "degrees": 17})
    world = built(study)
    assert "has 1 sliver without area" in told(world)[0] and "never hit" in told(world)[0]
    mesh = world.arrays.mesh
    assert len(mesh.corner) == 14 and world.parts[0].closed
    flat = ~mesh.normal.any(axis=1)
    assert flat.tolist() == [False] * 13 + [True]
    assert np.linalg.norm(mesh.normal[:13], axis=1) == pytest.approx(1.0)


def test_a_crossing_is_told_from_a_touch_at_an_edge(study):
    """Two bodies of one file that meet along part of an edge, without a common vertex."""
    study.part("cover", joined(CUBE, box((1, 1, -0.5), (2, 2, 0.5))), medium="clear")
    assert told(built(study)) == []


def test_take_limits_a_part_to_named_solids(study):
    solids = {"pipe.1": CUBE, "cap": CUBE.moved((9, 0, 0)), "lid": CUBE.moved((0, 9, 0))}
    for name in (["pipe.1"], ["pipe_1", "cap"]):
        study.lists["part"] = []
        add_file(study, "a", ascii_stl(solids), "a.stl", medium="clear", take=name)
        world = built(study)
        assert world.parts[0].faces == 12 * len(name)
        assert world.tag_names == tuple(f"a:{n}" for n in ("pipe_1", "cap")[: len(name)])
    study.lists["part"][0]["take"] = ["pips"]
    assert '"a.stl" names nothing "pips"; did you mean' in refused(study)


def test_names_of_a_mesh_file_are_made_fit_and_told(study):
    names = ["Vane tips", "Vane.tips", "2nd", "bulk", "rim"]
    mesh = CUBE._replace(tags=[names[i % 5] for i in range(12)])
    study.part("cover", mesh, medium="clear")
    world = built(study)
    tags = [name.partition(":")[2] for name in world.tag_names]
    assert tags[0] == "Vane_tips" and tags[-1] == "rim" and len(tags) == 4 and "bulk" not in tags
    assert '"Vane tips" is called Vane_tips' in told(world)[0]
    assert "several names that become one tag: Vane_tips" in told(world)[1]
    assert world.tags[0].faces == 6


@settings(
    deadline=None, max_examples=25, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(
    st.integers(0, 2**32 - 1),
    st.floats(-1e3, 1e3, allow_subnormal=False),
    st.floats(1e-3, 1e3),
)
def test_any_order_and_winding_of_a_closed_mesh_gives_the_same_body(
    tmp_path_factory, seed, shift, size
):
    rng = np.random.default_rng(seed)
    ball = sphere(1, 1.0)
    mesh = Mesh(ball.vertex * size + shift, rng.permutation(ball.corner))
    flip = rng.random(len(mesh.corner)) < 0.5
    mesh = turned(mesh, *np.flatnonzero(flip))
    study = new_study(tmp_path_factory.mktemp("any"))
    study.part("ball", mesh, medium="clear")
    facts = built(study).parts[0]
    assert facts.closed and facts.faces == 80
    assert facts.volume == pytest.approx(ball.volume * size**3, rel=1e-6)
