"""Joints of several things in one place: sheets in gaps, sources on faces, detectors in gaps."""

import numpy as np
import pytest

from lumentrace.engine.retrace import retrace
from lumentrace.engine.sums import account_rows
from lumentrace.scene.read import read_scene
from tests.unit.engine_study import DOWN, UP, account_of, slab, sums_of, world_of
from tests.worlds import Study, box, rectangle

ACROSS = (1.0, 0.0, 0.0)


@pytest.fixture
def study(tmp_path):
    study = Study(tmp_path, length="mm")
    study.medium("clear", 1.5)
    study.medium("tinted", 1.5, 0.2)
    study.finish("black", diffuse=0.0)
    study.finish("half", diffuse_through=0.5)
    return study


def film(
    study: Study, name: str, z: float, up: bool = True, finish: str = "half", half: float = 10
):
    sheet = rectangle((2 * half, 2 * half), (0, 0, z))
    study.part(name, sheet if up else sheet.inward(), medium="sheet", finish=finish)


def shares(world, rounds: int = 1) -> dict:
    """W by row of the account, of 1 W; nothing may be unresolved or cut off."""
    sums = sums_of(world, rounds)
    rows = account_rows(len(world.tag_names), len(world.part_names))
    found = {name: account_of(world, sums, i).value for i, name in enumerate(world.tag_names)}
    for name in ("detected", "escaped", "cut_off", "unresolved", "surroundings"):
        found[name] = account_of(world, sums, getattr(rows, name)).value
    for i, name in enumerate(world.part_names):
        found[f"{name}:bulk"] = account_of(world, sums, rows.bulk + i).value
    assert found["unresolved"] == found["cut_off"] == 0.0
    return found


@pytest.mark.parametrize("up", [True, False])
def test_a_sheet_on_an_emitting_face_takes_its_share(study, up):
    """Half of 1 W stays in the sheet, half goes through and away; nothing goes anywhere else."""
    study.part("die", slab(-1, 0), medium="opaque", finish="black")
    film(study, "film", 0.0, up)
    study.part("glass", box((50, 50, 50), (51, 51, 51)), medium="tinted")  # far off
    study.source("led", faces={"part": "die", "tag": "top"}, pattern="lambertian")
    found = shares(world_of(study))
    assert found["film:default"] == pytest.approx(0.5, rel=1e-12)
    assert found["escaped"] == pytest.approx(0.5, abs=0.01)
    assert found["film:bulk"] == found["glass:bulk"] == found["surroundings"] == 0.0


def test_a_sheet_between_two_plates_passes_light_on(study):
    """A beam straight up: what the lower plate passes loses half in the sheet."""
    study.part("lower", slab(-2, 0), medium="clear")
    film(study, "film", 0.0)
    study.part("upper", slab(0, 2), medium="clear")
    beam = {"center": (0, 0, -5), "normal": UP, "radius": 1.0}
    study.source("beam", disc=beam, pattern={"collimated": 0})
    found = shares(world_of(study))
    assert 0.4 < found["film:default"] < 0.55
    assert found["escaped"] == pytest.approx(1.0 - found["film:default"], abs=0.01)


def test_a_sheet_between_a_plate_and_a_black_part_keeps_light_out_of_it(study):
    study.part("plate", slab(0, 2), medium="clear")
    film(study, "film", 0.0)
    study.part("black", slab(-2, 0), medium="opaque", finish="black")
    beam = {"center": (0, 0, 5), "normal": DOWN, "radius": 1.0}
    study.source("beam", disc=beam, pattern={"collimated": 0})
    found = shares(world_of(study))
    assert found["black:bottom"] == found["black:side"] == 0.0
    reached = (1 - 0.04) ** 2 / (1 - 0.04**2)  # through both faces of the plate, R = 0.04 each
    assert found["film:default"] == pytest.approx(reached / 2, abs=0.005)
    assert found["black:top"] == pytest.approx(reached / 2, abs=0.005)


def test_two_sheets_in_one_place_each_act_once(study):
    """Lit from below: half stays in the first, the black second takes the rest."""
    film(study, "veil", 0.0)
    film(study, "stop", 0.0, finish="black")
    beam = {"center": (0, 0, -5), "normal": UP, "radius": 1.0}
    study.source("beam", disc=beam, pattern={"collimated": 0})
    found = shares(world_of(study))
    assert found["veil:default"] == pytest.approx(0.5, rel=1e-9)
    assert found["stop:default"] == pytest.approx(0.5, rel=1e-9)
    assert found["escaped"] == 0.0


@pytest.mark.parametrize("turn", [0.0, 30.0])
@pytest.mark.parametrize("normal", [UP, DOWN])
def test_a_disc_on_a_clear_face_starts_on_its_own_side(study, turn, normal):
    """With the normal out of the glass no ray meets its face; with the normal into it all start
    inside, and none meets the face from outside: whatever rounding the scene is turned by."""
    about = {"axis": [0.3, 1, 0.2], "degrees": turn}
    study.part("plate", slab(-5, 0), medium="tinted", turn=about)
    disc = {"center": (0, 0, 0), "normal": normal, "radius": 2.0}
    study.source("lamp", disc=disc, pattern={"collimated": 5}, turn=about)
    found = shares(world_of(study))
    if normal is UP:
        assert found["escaped"] == pytest.approx(1.0, rel=1e-12)
    else:
        straight = 1.0 - np.exp(-0.2 * 5)  # at least, once through the plate
        assert found["plate:bulk"] > straight - 0.001


def test_a_detector_in_a_gap_loses_no_light(study):
    """A gap of 0.05 that the study calls touching, crossed by planes at right angles."""
    study.part("die", slab(-1, 0), medium="opaque", finish="black")
    study.part("plate", slab(0.05, 2), medium="clear")
    study.source("led", faces={"part": "die", "tag": "top"}, pattern="lambertian")
    for i in range(5):
        study.detector(f"wall{i}", (2.0 * i - 4.0, 0, 0.5), ACROSS, (20, 2), across=(0, 1, 0))
    text = study.text().replace("[study]", "[study]\ntouch = 0.06", 1)
    path = study.folder / "study.toml"
    path.write_text(text, encoding="utf-8")
    from lumentrace.world.build import build_world

    found = shares(build_world(read_scene(path)))
    assert found["escaped"] > 0.3 and found["die:top"] > 0.05


def test_planes_that_let_light_pass_are_no_events(study):
    """Twenty of them, with one surface event allowed."""
    for i in range(20):
        study.detector(f"plane{i}", (0, 0, 1.0 + i), UP, (50, 50), (1, 1), side="both")
    beam = {"center": (0, 0, 0), "normal": UP, "radius": 1.0}
    study.source("beam", disc=beam, pattern={"collimated": 0})
    world = world_of(study, events_max=1)
    sums = sums_of(world)
    flux = sums.flux.sum(axis=1).mean(axis=-1)
    assert flux == pytest.approx(np.ones(20), rel=1e-12)


def test_a_ray_of_many_arrivals_is_found_again(study):
    """Light trapped in a clear cube crosses a plane in it hundreds of times; every arrival of a
    ray that is traced again has its own end on the plane."""
    study.part("cube", slab(-2, 2, 2.0), medium="clear")
    study.source("lamp", point=(0.1, 0.2, 0.3), pattern="isotropic")
    study.detector("inside", (0, 0, 0), UP, (4, 4), (1, 1), side="both")
    world = world_of(study, events_max=2000)
    way = max((retrace(world, i) for i in range(40)), key=lambda w: len(w.arrivals))
    assert len(way.arrivals) > 500
    marks = [a.marks for a in way.arrivals]
    assert min(marks) > 0 and marks == sorted(marks)
    ends = np.array([way.points[m - 1] for m in marks if m <= len(way.points)])
    assert np.abs(ends[:, 2]).max() < 1e-9
