"""The JSON Schema that editors use says what the reader checks."""

import json
import tomllib

import jsonschema
import pytest

from lumentrace.scene import forms
from lumentrace.scene.schema import json_schema

SCENE = """\
[study]
title = "Bench"
length = "mm"
seed = 1e3
include = ["paints.toml"]
[medium.pmma]
index = 1.492
absorption = 0.0008
[finish.white]
diffuse = 0.9
[[part]]
name = "tray"
mesh = "tray.stl"
medium = "opaque"
finish = { default = "white", rim = "white" }
turn = { axis = [0, 0, 1], degrees = 30 }
repeat = { count = [2, 1, 1], step = [1, 0, 0] }
[[part.tag]]
name = "rim"
pick = { facing = [0, 0, 1], within = 5 }
[[part.tag]]
name = "top"
pick = [{ tag = "x" }, { tube = { from = [0, 0, 0], to = [0, 0, 1], radius = [0, 1] } }]
[[part]]
name = "blade"
mesh = "blade.stl"
medium = "sheet"
finish = { front = "white", back = "white" }
repeat = { count = 12, axis = [0, 0, 1], degrees = 30 }
[[source]]
name = "leds"
faces = { part = "tray", tag = "rim" }
flux = { lumens = 100, each = true }
pattern = { cosine_power = 1.4 }
spectrum = { line = 555 }
[[source]]
name = "lamp"
point = [0, 0, 1]
flux = { watts = 1 }
spectrum = { line = 940 }
turn = [{ axis = [0, 0, 1], degrees = 30 }]
[[detector]]
name = "desk"
plane = { center = [0, 0, 0], normal = [0, 0, 1], across = [1, 0, 0], size = [1, 2], cells = [3, 4] }
[trace]
rays = 2e6
until = { measure = "desk.mean", relative_error = 0.01 }
map_memory = "2 GiB"
[[limit]]
measure = "desk.mean"
at_least = 500
"""  # noqa: E501


@pytest.fixture(scope="module")
def validator():
    return jsonschema.Draft202012Validator(json_schema())


def test_it_is_a_schema():
    schema = json_schema()
    assert schema["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    jsonschema.Draft202012Validator.check_schema(schema)
    assert json.loads(json.dumps(schema)) == schema


def test_it_accepts_a_scene_that_the_reader_accepts(validator):
    data = tomllib.loads(SCENE)
    assert list(validator.iter_errors(data)) == []
    forms.SceneForm.model_validate(data)


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("title", "titel"),
        ("[study]", "[gate]"),
        ('length = "mm"', 'length = "km"'),
        ("index = 1.492\n", ""),
        ("index = 1.492", "index = true"),
        ("diffuse = 0.9", "diffuse = 1.9"),
        ('name = "tray"', 'name = "2 trays"'),
        ("[0, 0, 1], within", "[0, 0], within"),
        (", within = 5", ""),
        ('mesh = "tray.stl"', "mesh = 3"),
        ("[1, 0, 0] }\n[[part.tag]]", '[1, 0, "x"] }\n[[part.tag]]'),
        ("lumens = 100", "lumens = 100, watts = 1"),
        ("point = [0, 0, 1]\n", ""),
        ("line = 940", "line = 99"),
        ("cells = [3, 4]", "cells = [3, 0]"),
        ("relative_error = 0.01", "relative_error = 1"),
        ("at_least = 500", ""),
        ("at_least = 500", "within = 5"),
        ('finish = { default = "white"', "finish = { default = 3"),
        ("[trace]", "[[trace]]"),
    ],
)
def test_it_refuses(validator, old, new):
    assert old in SCENE
    assert list(validator.iter_errors(tomllib.loads(SCENE.replace(old, new, 1))))


def test_every_key_tells_its_meaning():
    for name, table in json_schema()["$defs"].items():
        assert table["description"], name
        assert not table["additionalProperties"]
        assert all(entry["description"] for entry in table["properties"].values()), name


def test_no_key_may_be_null():
    assert '"null"' not in json.dumps(json_schema())
