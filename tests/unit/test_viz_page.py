"""The sheet: texts that fit, names that keep apart, files written whole or not at all."""

import numpy as np
import pytest

from lumentrace.analysis.ledger import PathRow
from lumentrace.analysis.measures import Measure
from lumentrace.errors import UserError
from lumentrace_viz.legend import _lines
from lumentrace_viz.map_picture import _number
from lumentrace_viz.marks import spread
from lumentrace_viz.page import Page, fitting
from lumentrace_viz.ways import Drawn


def test_long_text_loses_its_middle():
    assert fitting("short", 10) == "short"
    shown = fitting("a" * 50 + "b" * 50, 40)
    assert len(shown) <= 40 and shown[0] == "a" and shown[-1] == "b" and "…" in shown


def test_names_keep_apart_in_their_order_and_inside():
    places = np.array([0.5, 0.5, 0.51, 0.02, 0.9, 0.99])
    moved = spread(places, 0.1, 0.05, 0.95)
    assert (np.diff(np.sort(moved)) > 0.099).all()
    assert np.argsort(moved, kind="stable").tolist() == np.argsort(places, kind="stable").tolist()
    assert moved.min() >= 0.05 and moved.max() <= 0.95
    assert spread(np.array([0.2, 0.8]), 0.1, 0.0, 1.0).tolist() == [0.2, 0.8], "room enough"


def test_a_long_path_breaks_between_steps_only():
    steps = tuple((f"housing:tag_{i}", "scatter x3+") for i in range(20))
    facts = dict.fromkeys(PathRow.__dataclass_fields__)
    row = PathRow(**facts | {"source": "led", "detector": "rx", "steps": steps})
    lines = _lines(Drawn(row, ()))
    assert len(lines) > 1
    assert all(line.endswith(",") for line in lines[:-1])
    assert " ".join(lines).replace("\N{NO-BREAK SPACE}", " ") == row.text


def test_a_page_is_written_whole_or_not_at_all(tmp_path):
    page = Page(300, "Title with $ and _ and 灯", "subtitle")
    file = page.save(tmp_path / "a.png")
    assert file.read_bytes()[:8] == b"\x89PNG\r\n\x1a\n"
    assert [p.name for p in tmp_path.iterdir()] == ["a.png"]
    with pytest.raises(UserError, match="cannot be written"):
        page.save(tmp_path / "missing" / "b.png")


@pytest.mark.parametrize(
    "name, value, error, unit, upper, text",
    [
        ("desk.mean", 12.3, 0.4, "lx", None, "12.3 ± 0.4 lx"),
        ("desk.min", 0.0, None, "lx", 2.5, "not hit, below 2.5 lx"),
        ("desk.uniformity", 0.0, None, "1", 0.125, "darkest cell not hit, below 0.125"),
        ("desk.uniformity", 0.0, None, "1", None, "darkest cell not hit"),
        ("desk.uniformity", None, None, "1", None, "not hit"),
    ],
)
def test_a_caption_tells_a_dark_cell_from_a_dark_detector(name, value, error, unit, upper, text):
    measure = Measure(name, value, error, unit, upper, unseen=0.0, effective=0.0, note="")
    assert _number(measure) == text
