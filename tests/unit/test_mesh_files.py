"""Reading STL and OBJ: what a file holds, and that nothing damaged passes for something else."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from lumentrace.world.obj import read_obj
from lumentrace.world.raw import MeshFault
from lumentrace.world.stl import read_stl
from tests.unit.world_study import ascii_stl, binary_stl
from tests.worlds import Mesh, box

CUBE = box((0, 0, 0), (1, 2, 3))


def triangles(raw):
    return raw.vertex[raw.corner]


def test_binary_stl_keeps_order_and_float32_values():
    cube = CUBE.moved((0.1, 0.2, 0.3))
    raw = read_stl(binary_stl(cube))
    assert (triangles(raw) == cube.vertex.astype(np.float32)[cube.corner]).all()
    assert raw.vertex.dtype == np.float64


def test_ascii_stl_is_read_to_the_last_digit():
    cube = CUBE.moved((0.1, 0.2, 0.3))
    raw = read_stl(ascii_stl({"only": cube}).encode())
    assert (triangles(raw) == cube.vertex[cube.corner]).all()


def test_binary_stl_whose_title_begins_with_solid_is_binary():
    data = b"solid but binary".ljust(80) + binary_stl(CUBE)[80:]
    assert len(read_stl(data).corner) == 12


def test_one_solid_gives_no_tag_but_can_be_taken():
    raw = read_stl(ascii_stl({"body": CUBE}).encode())
    assert raw.tags.names == ("",)
    assert raw.labels[0].names == ("body",)


def test_several_solids_are_tags():
    raw = read_stl(ascii_stl({"a part": CUBE, "b": CUBE.moved((5, 0, 0))}).encode())
    assert raw.tags.names == ("a part", "b")
    assert (np.bincount(raw.tags.row) == [12, 12]).all()


@given(st.integers(1, 50 * 12 + 83))
def test_a_binary_stl_cut_anywhere_is_refused(cut):
    with pytest.raises(MeshFault, match="is cut short"):
        read_stl(binary_stl(CUBE)[:-cut])


@given(st.binary(min_size=1, max_size=60))
def test_a_binary_stl_with_anything_behind_it_is_refused(more):
    with pytest.raises(MeshFault, match="too long for its count"):
        read_stl(binary_stl(CUBE) + more)


@given(st.data())
def test_an_ascii_stl_cut_anywhere_is_refused(data):
    text = ascii_stl({"body": CUBE}).rstrip()
    whole = text.rindex("endsolid") + len("endsolid")
    cut = data.draw(st.integers(len("solid "), whole - 1))
    with pytest.raises(MeshFault):
        read_stl(text[:cut].encode())


def test_a_word_for_a_number_names_its_line():
    text = ascii_stl({"body": CUBE}).replace("vertex 0.0 0.0 0.0", "vertex 0.0 0,5 0.0", 1)
    line = text.splitlines().index("vertex 0.0 0,5 0.0") + 1
    with pytest.raises(MeshFault, match=f'line {line}: found "0.0 0,5 0.0", needs three numbers'):
        read_stl(text.encode())


SQUARE = "v 0 0 0\nv 1 0 0\nv 1 1 0\nv 0 1 0\n"


def test_obj_fans_polygons_and_reads_every_way_of_writing_a_corner():
    text = SQUARE + "vt 0 0\nvn 0 0 1\nf 1/1/1 2//1 3/1 4 # a comment\nf -4 -3 \\\n -2\n"
    raw = read_obj(text.encode())
    assert raw.corner.tolist() == [[0, 1, 2], [0, 2, 3], [0, 1, 2]]


def test_obj_materials_win_over_groups_and_groups_over_objects():
    faces = "o thing\ng flap\n{}f 1 2 3\ng rim top\nf 1 3 4\n"
    groups = read_obj((SQUARE + faces.format("")).encode())
    assert [groups.tags.names[row] for row in groups.tags.row] == ["flap", "rim top"]
    both = read_obj((SQUARE + faces.format("usemtl black\n")).encode())
    assert [both.tags.names[row] for row in both.tags.row] == ["black", "black"]
    assert {name for labels in both.labels for name in labels.names} >= {"thing", "flap", "rim top"}
    objects = read_obj((SQUARE + "f 1 2 3\no second\nf 1 3 4\n").encode())
    assert [objects.tags.names[row] for row in objects.tags.row] == ["", "second"]


@pytest.mark.parametrize(
    ("statement", "message"),
    [
        (
            "f 1 2 9",
            "has 1 face with vertices that are not there, the first at line 5: vertex 9 of",
        ),
        ("f 1 2 0", "line 5: a face uses vertex 0"),
        ("f 1 2 -5", "line 5: a face uses vertex -5"),
        ("f 1 2", "line 5: a face of 2 corners"),
        ("f 1 2 x", 'line 5: found "f 1 2 x", needs whole numbers'),
        ("v 1 2", 'line 5: found "v 1 2", needs three numbers'),
        ("f 1 2 \\", "is cut short: line 5 goes on"),
    ],
)
def test_obj_faults_name_their_line(statement, message):
    with pytest.raises(MeshFault, match=message):
        read_obj((SQUARE + statement).encode())


def test_obj_that_is_no_text_is_refused():
    with pytest.raises(MeshFault, match="not text"):
        read_obj(b"v 0 0 0\n\0\1\2")


def polygon_area(points, corner):
    return Mesh(points, corner).areas.sum()


def test_a_dented_polygon_is_fanned_from_the_corner_that_fills_it():
    ell = np.array([[0, 0, 0], [3, 0, 0], [3, 1, 0], [1, 1, 0], [1, 3, 0], [0, 3, 0]], float)
    for turn in range(6):
        points = np.roll(ell, turn, axis=0)
        text = "".join(f"v {x} {y} {z}\n" for x, y, z in points) + "f 1 2 3 4 5 6\n"
        raw = read_obj(text.encode())
        assert polygon_area(raw.vertex, raw.corner) == pytest.approx(5.0)  # 3 x 1 + 1 x 2
        assert (Mesh(raw.vertex, raw.corner).cross[:, 2] > 0).all()


def test_a_polygon_with_a_corner_on_its_side_gets_no_sliver():
    points = np.array([[0, 0, 0], [1, 0, 0], [2, 0, 0], [2, 2, 0], [0, 2, 0]], float)
    text = "".join(f"v {x} {y} {z}\n" for x, y, z in points) + "f 1 2 3 4 5\n"
    raw = read_obj(text.encode())
    assert Mesh(raw.vertex, raw.corner).areas.min() > 0.5


def test_a_polygon_that_no_fan_fills_is_refused():
    comb = [
        (0, 0),
        (7, 0),
        (7, 3),
        (6, 3),
        (6, 1),
        (4, 1),
        (4, 3),
        (3, 3),
        (3, 1),
        (1, 1),
        (1, 3),
        (0, 3),
    ]
    text = "".join(f"v {x} {y} 0\n" for x, y in comb)
    text += "f " + " ".join(str(i + 1) for i in range(len(comb)))
    with pytest.raises(MeshFault, match="has 1 polygon dented .* at line 13"):
        read_obj(text.encode())


KEYWORDS = ("solid", "endsolid", "facet", "outer", "vertex", "endloop", "endfacet", "usemtl")
NUMBERS = ("0", "1", "2", "3", "-1", "1e999", "nan", "1/2", "4//1")
WORDS = st.sampled_from([*KEYWORDS, "v", "f", "g", "o", *NUMBERS, "\\", "#", "x", *["\n"] * 8])


@given(
    st.lists(WORDS, max_size=60), st.sampled_from(["", "solid a\n", "v 0 0 0\nv 1 0 0\nv 0 1 0\n"])
)
def test_no_text_makes_a_reader_fail_in_another_way(words, head):
    data = (head + " ".join(words)).encode()
    for reader in (read_stl, read_obj):
        try:
            raw = reader(data)
        except MeshFault as fault:
            assert "\n" not in str(fault)
        else:
            assert raw.corner.shape[1] == 3 and raw.corner.max(initial=-1) < len(raw.vertex)
            assert len(raw.tags.row) == len(raw.corner)


@given(st.binary(max_size=400))
def test_no_bytes_make_a_reader_fail_in_another_way(data):
    for reader in (read_stl, read_obj):
        try:
            reader(data)
        except MeshFault as fault:
            assert str(fault)
