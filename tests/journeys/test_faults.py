"""A fault of the program itself: one line, a report on disk, exit 2, no traceback."""

import tempfile
from pathlib import Path

from lumentrace import study
from lumentrace.cli.main import run


def test_a_fault_is_one_line_and_a_log_file(monkeypatch, capsys, tmp_path):
    def broken(path):
        raise ZeroDivisionError("by nothing")

    monkeypatch.setattr(study, "load", broken)
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path))
    assert run(["check", "a.toml"]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.count("\n") == 1
    assert err.startswith("A fault of lumentrace itself (ZeroDivisionError); the details are in ")
    report = Path(err.strip().rpartition(" ")[2])
    assert report.parent == tmp_path
    text = report.read_text(encoding="utf-8")
    assert "by nothing" in text and "Traceback" in text


def test_a_fault_with_no_place_for_its_report(monkeypatch, capsys):
    def broken(path):
        raise ZeroDivisionError("by nothing")

    monkeypatch.setattr(study, "load", broken)
    monkeypatch.setattr(tempfile, "tempdir", "/nowhere/at/all")
    assert run(["check", "a.toml"]) == 2
    assert "no place to write its details" in capsys.readouterr().err
