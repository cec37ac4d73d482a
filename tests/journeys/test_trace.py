"""`trace`: measures, account and limits on the screen, the run on disk."""

import os
import re
import signal
import subprocess
import sys

import pytest

import lumentrace as package
from tests.journeys.command import (
    ONE_ROUND,
    SCENE,
    SCENES,
    answer,
    assert_narrow,
    lumentrace,
    ok,
    runs_of,
    small_scene,
)


def test_trace_prints_measures_account_and_what_to_type_next(tmp_path):
    scene = small_scene(tmp_path)
    text = ok("trace", scene.name, cwd=tmp_path)
    assert_narrow(text)
    (run,) = runs_of(scene)
    assert re.fullmatch(r"plate-[0-9a-f]{8}\.nc", run.name)
    assert re.search(r"^65 536 rays in \S+ s, seed 3\.$", text, re.M)
    mean = r"^desk\.mean +\d[\d.]* +[\d.]+ +lx\n  at least +100 +[\d.]+ inside$"
    assert re.search(mean, text, re.M)
    assert re.search(r"^desk\.min .*\n  by halves +\d", text, re.M)
    assert "\n100 lm (0.1464 W) went to" in text
    assert re.search(r"^floor:above +[\d.]+ +[\d.]+ +[\d.]+$", text, re.M)
    assert re.search(r"^Sum less emitted: -?\de[+-]\d\d of the emitted\.$", text, re.M)
    assert text.endswith(
        "Simulated: confirm by measurement.\n"
        f"Written:  runs/{run.name}\n"
        f"Paths:    lumentrace ledger runs/{run.name}\n"
        f"Pictures: lumentrace draw runs/{run.name}\n"
    )


def test_trace_stays_narrow_and_honest_where_light_is_lost(tmp_path):
    """Cut off after four events, with names and two-sided limits as wide as they come."""
    scene = small_scene(tmp_path)
    limits = "".join(
        f'[[limit]]\nmeasure = "floor_of_the_desk.{kind}"\nat_least = {low}\nat_most = {high}\n'
        for kind, low, high in (
            ("mean", 123.456, 123456.7), ("uniformity", 0.123456, 0.987654),
            ("uniformity_split", 0.0000123, 0.912345), ("flux", 1e-6, 9),
        )
    )  # fmt: skip
    text = SCENE.replace("desk", "floor_of_the_desk").replace(
        "= 65_536", "= 65_536\nevents_max = 4"
    )
    text = text.replace("diffuse = 0.5", "diffuse = 0.3\nmirror = 0.7")
    scene.write_text(text[: text.index("[[limit]]")] + limits, encoding="utf-8")
    shown = ok("trace", scene.name, cwd=tmp_path)
    assert_narrow(shown)
    assert re.search(r"^measure .* unseen +errors away$", shown, re.M)
    for name in ("mean", "uniformity", "flux"):
        assert re.search(rf"^floor_of_the_desk\.{name} .*\n  at least .*\n  at most ", shown, re.M)
    assert "open: unseen\n" in shown
    assert re.search(r"^\d+( \d{3})* rays could not be followed to the end", shown, re.M)
    assert "\nNothing absorbed: floor:below, floor:above, floor:rim.\n" in shown  # no window
    told = "Light cut off or unresolved could add up to "
    assert told in ok("ledger", scene.name, cwd=tmp_path)


def test_trace_for_machines(tmp_path):
    scene = small_scene(tmp_path)
    found = answer("trace", scene.name, cwd=tmp_path)
    mean = found["measures"]["desk.mean"]
    assert mean.keys() == {"value", "error", "unit", "upper", "unseen", "effective"}
    assert mean["unit"] == "lx" and 0 < mean["error"] < 0.05 * mean["value"]
    (limit,) = found["limits"]
    assert limit["distance"] == pytest.approx((mean["value"] - 100) / mean["error"])
    account = found["account"]
    ways = ("detected", "escaped", "cut_off", "unresolved", "sampling")
    spent = sum(account[way]["value"] for way in ways)
    spent += sum(flow["value"] for flow in account["absorbed"].values())
    assert spent == pytest.approx(account["emitted"]["value"], rel=1e-9)
    assert account["absorbed"].keys() >= {"floor:above", "window:bulk"}
    assert found["lost"] == {"count": 0, "rays": []}
    assert (found["rays"], found["seed"]) == (65536, 3)

    run = package.open_run(tmp_path / found["file"])
    assert package.measures(run)["desk.mean"].value == mean["value"]


def test_a_value_agrees_with_the_closed_form(tmp_path):
    """Without the plate the floor's detector sees the bare lamp: E = I cos^3 / h^2.

    A point of 100 lm, 100 / (4 pi) cd, 19 mm above a detector of 8 x 8 mm; inverse-square and
    cosine law integrated over the square (closed form of the solid angle of a rectangle on axis,
    4 asin(a^2 / (a^2 + h^2)) with a half the side; elementary geometry).
    """
    from math import asin, pi

    scene = small_scene(tmp_path)
    window = SCENE[SCENE.index("[[part]]") : SCENE.index('[[part]]\nname   = "floor"')]
    scene.write_text(SCENE.replace(window, ""), encoding="utf-8")
    flux = answer("trace", scene.name, "--rays", "2e6", cwd=tmp_path)["measures"]["desk.flux"]
    expected = 100 / (4 * pi) * 4 * asin(4**2 / (4**2 + 19**2))
    assert flux["error"] < 0.01 * expected
    assert abs(flux["value"] - expected) <= 4 * flux["error"]


@pytest.mark.parametrize("name", ["bench_lamp", "range_finder"])
def test_same_bytes_for_any_number_of_threads(name, tmp_path):
    scene = SCENES / name / f"{name}.toml"
    written = []
    for threads in (1, 2):
        out = tmp_path / str(threads)
        ok("trace", scene, *ONE_ROUND, "--threads", threads, "--out", out)
        (run,) = out.iterdir()
        written.append((run.name, run.read_bytes()))
    assert written[0] == written[1]


def test_another_seed_is_another_run(tmp_path):
    scene = small_scene(tmp_path)
    ok("trace", scene.name, cwd=tmp_path)
    ok("trace", scene.name, "--seed", "3", cwd=tmp_path)
    assert len(runs_of(scene)) == 1
    assert answer("trace", scene.name, "--seed", "4", cwd=tmp_path)["seed"] == 4
    assert len(runs_of(scene)) == 2


@pytest.mark.parametrize("rays", ["1e5", "100_000", "100000"])
def test_rays_are_rounded_up_and_it_is_told(rays, tmp_path):
    scene = small_scene(tmp_path)
    text = ok("trace", scene.name, "--rays", rays, cwd=tmp_path)
    told = " ".join(text.split())
    assert "131 072 rays in " in told
    assert "Rounded up from 100 000 to whole rounds." in told


def test_until_ends_the_trace_once_the_measure_is_known(tmp_path):
    scene = small_scene(tmp_path)
    until = "until = { measure = 'desk.mean', relative_error = 0.01 }\nrays_max = 50_000_000"
    scene.write_text(SCENE.replace("rays = 65_536", until), encoding="utf-8")
    text = ok("trace", scene.name, cwd=tmp_path)
    assert "Stopped: desk.mean known within 1 %." in text
    rays = int(re.search(r"^([\d ]+) rays in ", text, re.M)[1].replace(" ", ""))
    assert rays < 50_000_000
    looks = [65_536 * 2**k for k in range(10)]
    assert rays in looks


def test_until_that_is_not_reached_is_told(tmp_path):
    scene = small_scene(tmp_path)
    until = "until = { measure = 'desk.mean', relative_error = 1e-6 }\nrays_max = 131_072"
    scene.write_text(SCENE.replace("rays = 65_536", until), encoding="utf-8")
    text = ok("trace", scene.name, cwd=tmp_path)
    assert "131 072 rays" in text
    assert "Not within 0.0001 %: desk.mean is known within " in " ".join(text.split())


def test_a_scene_without_detectors_has_its_account(tmp_path):
    scene = small_scene(tmp_path)
    detector, limit = SCENE.index("[[detector]]"), SCENE.index("[[limit]]")
    trace = SCENE.index("[trace]")
    scene.write_text(SCENE[:detector] + SCENE[trace:limit], encoding="utf-8")
    text = ok("trace", scene.name, cwd=tmp_path)
    assert "\n0.1464 W went to" in text and "measure " not in text
    assert "The scene has no detector." in ok("ledger", scene.name, cwd=tmp_path)
    assert "detector  " not in ok("check", scene.name, cwd=tmp_path)


def test_nothing_is_said_on_standard_error_once_compiled(tmp_path):
    scene = small_scene(tmp_path)
    ok("trace", scene.name, cwd=tmp_path)
    assert lumentrace("trace", scene.name, cwd=tmp_path).stderr == ""


def test_the_first_trace_tells_that_it_compiles(tmp_path):
    scene = small_scene(tmp_path)
    cache = {"LUMENTRACE_CACHE": str(tmp_path / "cache")}
    for said in ("Compiling the tracer for this machine, once", ""):
        done = lumentrace("trace", scene.name, "--json", cwd=tmp_path, env=cache)
        assert done.returncode == 0
        assert done.stderr.startswith(said)
        assert done.stderr.count("\n") == (1 if said else 0)


@pytest.mark.skipif(sys.platform == "win32", reason="needs a pseudo-terminal")
def test_ctrl_c_stops_the_trace_and_leaves_nothing(tmp_path):
    """On a terminal a bar is shown; Ctrl-C ends with 130 and one line, and no file is written."""
    scene = small_scene(tmp_path)
    screen, terminal = os.openpty()
    command = [sys.executable, "-m", "lumentrace", "trace", scene.name, "--rays", "1e12"]
    with subprocess.Popen(
        command, cwd=tmp_path, stdout=subprocess.PIPE, stderr=terminal, text=True
    ) as traced:
        os.close(terminal)
        before = _read(screen, until=b"M rays")
        traced.send_signal(signal.SIGINT)
        shown = _read(screen)
        out = traced.stdout.read()
    assert b"M rays" in before, before
    assert traced.returncode == 130
    assert out == ""
    assert b"Stopped. Nothing was written." in shown
    assert b"Traceback" not in shown
    assert not runs_of(scene)
    assert sorted(p.name for p in tmp_path.iterdir()) == ["plate.obj", "plate.toml"]


def _read(screen: int, until: bytes | None = None) -> bytes:
    """What is written to a pseudo-terminal up to some text, or to its end."""
    shown = b""
    while until is None or until not in shown:
        try:
            shown += os.read(screen, 4096)
        except OSError:  # how Linux says that the other end is closed
            break
    return shown
