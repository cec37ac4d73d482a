"""Help is quick, fits a terminal and shows an example; a slip of the keyboard gets one line."""

import subprocess
import sys

import pytest

import lumentrace as package
from tests.journeys.command import assert_narrow, lumentrace, ok

VERBS = ("check", "trace", "ledger", "draw", "schema")
HEAVY = ("numba", "numpy", "xarray", "trimesh", "pydantic", "pyvista", "rich", "scipy")


@pytest.mark.parametrize("verb", VERBS)
def test_help_of_each_verb(verb):
    text = ok(verb, "--help")
    assert f"Usage: lumentrace {verb}" in text
    assert text.count(f"Example: lumentrace {verb}") == 1
    assert_narrow(text)


def test_help_lists_every_verb_at_full_length():
    text = ok("--help")
    assert all(f"\n  {verb} " in text for verb in VERBS)
    assert "..." not in text.partition("Commands:")[2]
    assert_narrow(text)
    assert ok() == text


def test_version():
    assert ok("--version") == f"lumentrace {package.__version__}\n"


@pytest.mark.parametrize("words", [["--help"], *([verb, "--help"] for verb in VERBS)])
def test_help_imports_nothing_heavy(words):
    assert _heavy(f"from lumentrace.cli.main import run; run({words!r})") == "[]"


def test_import_of_the_package_imports_nothing_heavy():
    assert _heavy("import lumentrace; lumentrace.UserError") == "[]"


def _heavy(statement: str) -> str:
    """Which heavy packages a statement leaves imported, as the last line that it prints."""
    code = f"import sys; {statement}; print([m for m in {HEAVY!r} if m in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    return done.stdout.splitlines()[-1]


@pytest.mark.parametrize(
    ("words", "line"),
    [
        (["tarce"], 'lumentrace: "tarce" is not a verb; did you mean "trace"?'),
        (["trace"], "lumentrace trace: SCENE is missing; see lumentrace trace --help"),
        (
            ["trace", "a.toml", "--ray", "3"],
            'lumentrace trace: --ray: no such option; did you mean "--rays"?',
        ),
        (
            ["trace", "a.toml", "--rays", "1.5"],
            'lumentrace trace: --rays: "1.5" is not a whole number; '
            "write 2000000, 2_000_000 or 2e6",
        ),
        (
            ["trace", "a.toml", "--threads", "0"],
            "lumentrace trace: --threads: 0 is out of range; allowed: 1 to 1024",
        ),
        (
            ["check", "a.toml", "--rays", "5"],
            'lumentrace check: --rays: no such option; allowed: "--help", "--json", "-h"\n',
        ),
        (
            ["trace", "a.toml", "--rays"],
            "lumentrace trace: --rays: its value is missing; allowed: 1 to 1000000000000000\n",
        ),
        (
            ["ledger", "a.toml", "--detector"],
            "lumentrace ledger: --detector: its value is missing; allowed: NAME\n",
        ),
        (["check", "a.toml", "--json=3"], "lumentrace check: --json: takes no value\n"),
        (
            ["check", "a.toml", "b.toml", "c"],
            "lumentrace check: too many words: b.toml c; allowed: SCENE and options\n",
        ),
        (["schema", "a"], "lumentrace schema: too many words: a; allowed: options only\n"),
        (
            ["draw", "a.toml", "--top", "11"],
            "lumentrace draw: --top: 11 is out of range; allowed: 1 to 10\n",
        ),
        (["check", "none.toml"], "none.toml: "),
        (["ledger", "none.nc"], "none.nc: "),
    ],
)
def test_a_wrong_command_is_refused_in_one_line(words, line, tmp_path):
    done = lumentrace(*words, cwd=tmp_path)
    assert done.returncode == 2
    assert done.stdout == ""
    assert done.stderr.startswith(line)
    assert done.stderr.count("\n") == 1
    assert not list(tmp_path.iterdir())
