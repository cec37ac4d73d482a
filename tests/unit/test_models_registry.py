"""The registries, and the choice among their models in compiled code."""

import inspect

import numpy as np
import pytest

from lumentrace.models import dispatch, events
from lumentrace.models.registry import DETECTORS, LOBES, MEDIA, PATTERNS, STARTS, number
from lumentrace.photometry import luminosity_table
from tests.unit.world_study import built, new_study
from tests.worlds import box

FUNCTIONS = {
    "lobes": (LOBES, ("sample", "value", "pdf", "albedo")),
    "patterns": (PATTERNS, ("emit", "pdf")),
    "starts": (STARTS, ("start",)),
    "media": (MEDIA, ("index", "advance")),
    "detectors": (DETECTORS, ("intersect", "bin_of")),
}
LADDERS = {
    "lobe_sample": (LOBES, "sample"),
    "lobe_albedo": (LOBES, "albedo"),
    "pattern_emit": (PATTERNS, "emit"),
    "start_of": (STARTS, "start"),
    "medium_index": (MEDIA, "index"),
    "medium_advance": (MEDIA, "advance"),
    "detector_intersect": (DETECTORS, "intersect"),
    "detector_bin_of": (DETECTORS, "bin_of"),
}


def parameters(model, function):
    return list(inspect.signature(getattr(model, function).py_func).parameters)


@pytest.mark.parametrize("kind", FUNCTIONS)
def test_models_of_a_kind_have_the_same_functions(kind):
    """Same names, same parameters in the same order, each with a docstring."""
    models, functions = FUNCTIONS[kind]
    for function in functions:
        for model in models:
            assert parameters(model, function) == parameters(models[0], function)
            assert getattr(model, function).py_func.__doc__


@pytest.mark.parametrize("kind", FUNCTIONS)
def test_numbers_by_name(kind):
    models, _ = FUNCTIONS[kind]
    names = [model.name for model in models]
    assert len(set(names)) == len(names)
    assert [number(models, name) for name in names] == list(range(len(models)))
    with pytest.raises(ValueError):
        number(models, "no such model")


def test_events_are_numbered_by_their_names():
    assert [getattr(events, name.upper()) for name in events.EVENTS] == list(range(7))
    assert events.ARRIVED not in range(len(events.EVENTS))


@pytest.mark.parametrize("ladder", LADDERS)
def test_ladder_text_can_be_read(ladder):
    """One branch a model in the order of the registry, the last without a question."""
    models, function = LADDERS[ladder]
    text = dispatch.ladder_text(models, function)
    assert text.startswith(f"def {function}(kind, {', '.join(parameters(models[0], function))}):")
    assert text.count("return ") == len(models)
    for i in range(len(models)):
        assert f"return model_{i}(" in text
        assert (f"if kind == {i}:" in text) == (i < len(models) - 1)
    compile(text, "ladder", "exec")
    assert callable(getattr(dispatch, ladder))


@pytest.fixture(scope="module")
def arrays(tmp_path_factory):
    study = new_study(tmp_path_factory.mktemp("ladders"))
    study.part("block", box((0, 0, 0), (2, 3, 1)), medium="opaque", finish="white")
    frame = {"center": [5, 5, 5], "normal": [0, 0, 1]}
    study.source("a", faces={"part": "block"}, pattern="lambertian")
    study.source("b", disc={**frame, "radius": 1}, pattern="lambertian")
    rectangle = {**frame, "across": [1, 0, 0], "size": [1, 2]}
    study.source("c", rectangle=rectangle, pattern="lambertian")
    study.detector("plane", (0, 0, 3), (0, 0, 1), (4, 4), (2, 2))
    return built(study).arrays


def arguments(ladder, arrays, kind):
    """Arguments that every model of that kind takes."""
    incoming, u = (0.6, 0.0, -0.8), (0.3, 0.6, 0.2, 0.9)
    values = np.array([1.5, 0.4, 0.0, 0.0])
    ray = ((0.3, 0.2, 5.0), (0.0, 0.0, -1.0))
    if ladder == "start_of":
        s = arrays.sources.start.tolist().index(kind)
        return arrays.mesh, arrays.sources, s, u
    return {
        "lobe_sample": (incoming, 1.0, 1.5, u),
        "lobe_albedo": (incoming, 1.0, 1.5),
        "pattern_emit": (np.array([0.5, 0.0]), 0.3, 0.6),
        "medium_index": (values,),
        "medium_advance": (values, 555.0, *ray, 2.0, u),
        "detector_intersect": (arrays.detectors, 0, *ray),
        "detector_bin_of": (arrays.detectors, 0, 0.7, 0.2, True, 555.0, luminosity_table()),
    }[ladder]


@pytest.mark.parametrize("ladder", LADDERS)
def test_a_ladder_picks_the_model_of_that_number(ladder, arrays):
    models, function = LADDERS[ladder]
    answers = []
    for kind, model in enumerate(models):
        given = arguments(ladder, arrays, kind)
        answers.append(getattr(dispatch, ladder)(kind, *given))
        assert answers[-1] == getattr(model, function)(*given)
    if function in ("sample", "emit", "start"):
        assert len(set(answers)) == len(models)  # so that a wrong choice would show
