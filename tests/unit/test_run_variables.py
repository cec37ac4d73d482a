"""The declaration of what a run holds, and the check against it."""

import numpy as np

from lumentrace.run.variables import ATTRIBUTES, VARIABLES, as_markdown, declared, faults
from tests.unit.synthetic_run import run


def nodes(of):
    tree = {n.path.strip("/"): n.to_dataset(inherit=False) for n in of.data.subtree}
    return {path: (dict(node.attrs), dict(node.variables)) for path, node in tree.items()}


def test_each_variable_is_declared_once():
    names = [(v.node, v.name) for v in VARIABLES]
    assert len(set(names)) == len(names)


def test_a_run_is_as_declared_with_batches_and_without():
    assert faults(nodes(run())) == []
    assert faults(nodes(run(keep_batches=False))) == []


def test_a_run_holds_nothing_that_is_not_declared():
    for path, (attributes, arrays) in nodes(run()).items():
        node = "detectors/*" if path.startswith("detectors/") else path
        assert set(arrays) <= {v.name for v in declared(node)}
        assert set(attributes) <= {a.name for a in ATTRIBUTES if a.node.strip("/") == node}


def test_what_is_missing_or_otherwise_is_named():
    found = nodes(run())
    del found["ledger"][1]["square"]
    del found["detectors/desk"][0]["area"]
    arrays = found["account"][1]
    arrays["emitted"] = arrays["emitted"].astype(np.float32)
    arrays["bulk"] = arrays["bulk"].transpose("volume", "group", "batch")
    del found["lost"]
    assert sorted(faults(found)) == [
        "account/bulk is not as declared",
        "account/emitted is not as declared",
        "lacks ledger/square",
        "lacks lost",
        "lacks the attribute detectors/desk/area",
    ]


def test_the_documentation_names_everything():
    text = as_markdown()
    for thing in (*VARIABLES, *ATTRIBUTES):
        assert f"| {thing.name} " in text and thing.meaning in text


def test_units_follow_the_study_and_the_detector():
    tree = run(lengths=("in", 0.0254))
    desk, rx = tree.map("desk"), tree.map("rx")
    assert desk["across"].attrs["units"] == "in"
    assert (desk["value"].attrs["units"], rx["value"].attrs["units"]) == ("lx", "W/m2")
    assert desk["error"].attrs["units"] == "lx" and desk["effective"].attrs["units"] == "1"
    assert tree.detector("desk")["cell_square"].attrs["units"] == "lm2"
    assert "units" not in tree.ledger["flux"].attrs  # lm at the desk, W at the rx
    assert tree.ledger["flux_unit"].values.tolist() == ["lm", "W"]
    assert run(photometric=(True, True)).ledger["flux"].attrs["units"] == "lm"
