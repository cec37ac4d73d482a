"""Tables are aligned, and no line is wider than asked."""

from lumentrace.report.table import lay_out, wrap


def test_columns_are_aligned_by_their_widest_cell():
    rows = [["name", "lm"], ["tray", "170.5"], ["a longer name", "9.1"]]
    assert lay_out(rows, "<>") == [
        "name              lm",
        "tray           170.5",
        "a longer name    9.1",
    ]


def test_long_name_is_wrapped_and_its_numbers_stay_on_its_first_line():
    rows = [["name", "lm"], ["alpha beta gamma delta epsilon", "9.1"]]
    assert lay_out(rows, "<>", width=24) == [
        "name                  lm",
        "alpha beta gamma     9.1",
        "  delta epsilon",
    ]


def test_name_without_a_space_is_broken():
    lines = lay_out([["x" * 100, "1"]], "<>", width=40)
    assert max(map(len, lines)) <= 40
    assert "".join(lines).replace(" ", "") == "x" * 37 + "1" + "x" * 63


def test_no_rows_give_no_lines():
    assert lay_out([], "<>") == []


def test_wrapped_text_keeps_grouped_digits_together():
    assert wrap("rounds of 65 536 rays", 14) == ["rounds of", "  65 536 rays"]
    assert wrap("", 14) == [""]
