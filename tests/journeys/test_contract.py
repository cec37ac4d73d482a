"""The stages import one way only, and every folder of code is installed."""

import tomllib

from importlinter.cli import lint_imports

from tests.journeys.command import ROOT


def test_stages_import_only_what_is_left_of_them(monkeypatch):
    monkeypatch.chdir(ROOT)
    assert lint_imports(config_filename="pyproject.toml", no_cache=True) == 0


def test_every_folder_of_code_is_a_package_that_is_installed():
    settings = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
    installed = set(settings["tool"]["setuptools"]["packages"])
    folders = {p.parent.relative_to(ROOT) for p in (ROOT / "lumentrace").rglob("*.py")}
    assert installed == {".".join(folder.parts) for folder in folders} | {"lumentrace_viz"}
