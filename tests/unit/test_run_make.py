"""From sums to labelled arrays."""

from dataclasses import replace

import numpy as np
import pytest

from lumentrace.errors import UserError
from lumentrace.run.make import make_run
from lumentrace.run.variables import FATES
from lumentrace.world.arrays import Media
from tests.unit.synthetic_run import (
    AWAY,
    CELL_AREA,
    COVER,
    DESK,
    ROWS,
    RX,
    only,
    run,
    sums,
    world,
)


def test_map_is_flux_per_area_with_the_error_of_its_batches():
    found = sums(world(), rounds=2)
    made = make_run(world(), found).map("desk")
    batch = found.cell_batch[:, :12].sum(axis=0).reshape(3, 4, 64) / 2 / CELL_AREA
    assert made["value"].dims == ("up", "across")
    assert made["value"].values == pytest.approx(batch.mean(axis=-1), rel=1e-13)
    assert made["error"].values == pytest.approx(batch.std(axis=-1, ddof=1) / 8, rel=1e-12)


def test_effective_number_counts_the_weights_of_rays():
    found = sums(world(), rounds=2)
    made = make_run(world(), found).map("desk")
    total, square = found.cell_batch[:, :12].sum(axis=(0, 2)), found.cell_square[:, :12].sum(axis=0)
    assert made["effective"].values.ravel() == pytest.approx(total**2 / square, rel=1e-12)


def test_without_batches_the_values_are_the_same_and_the_errors_agree():
    """Both estimate one standard error; that of 64 batches is known to 1 / sqrt(126) = 9 %,
    so that 13 cells stay within 4.2 times that unless a formula is wrong."""
    kept, blocks = run(rounds=2), run(rounds=2, keep_batches=False)
    for name in ("desk", "rx"):
        assert "cell_batch" not in blocks.detector(name)
        a, b = kept.map(name), blocks.map(name)
        assert a["value"].values.tolist() == b["value"].values.tolist()
        assert np.abs(a["error"].values / b["error"].values - 1).max() < 4.2 * 0.09


def test_cells_stand_at_their_centres_in_the_unit_of_the_study():
    desk = run(lengths=("in", 0.0254)).map("desk")
    step = 0.2 / 0.0254
    assert desk["across"].values == pytest.approx(step * np.array([-1.5, -0.5, 0.5, 1.5]))
    assert desk["up"].values == pytest.approx(step * np.array([-1.0, 0.0, 1.0]))


def test_cells_are_told_apart_along_across_and_up():
    """The first cell of the toy is the dark one: -across, -up."""
    value = run().map("desk")["value"]
    assert float(value.sel(across=-300, up=-200)) == float(value.min())


def test_a_cell_that_was_not_hit_has_no_error():
    rx = run(chance=only(AWAY)).map("rx")
    assert rx["value"].values.tolist() == [[0.0]]
    assert np.isnan(rx["error"].values).all() and (rx["effective"].values == 0).all()


def test_every_batch_estimates_the_whole_study():
    made, found = run(rounds=3), sums(world(), rounds=3)
    account = made.account
    assert account["absorbed"].values == pytest.approx(found.account[:, :3] / 3)
    assert account["ended"].sel(fate="escaped").values == pytest.approx(
        found.account[:, ROWS.escaped] / 3
    )
    assert tuple(account["fate"].values) == FATES
    assert made.detector("rx")["flux"].values == pytest.approx(found.flux[RX] / 3)
    assert made.detector("desk")["flux_count"].values.tolist() == found.flux_count[DESK].tolist()


def test_volumes_that_absorb_are_marked():
    assert run().account["filled"].values.tolist() == [0, 1, 0]
    of = world()
    media = Media(of.tables.media.model, of.tables.media.values + [0, 0.01, 0, 0])
    foggy = replace(of, tables=of.tables._replace(media=media))
    made = make_run(foggy, sums(foggy))
    assert made.account["filled"].to_series().to_dict() == {
        "wall": 0,
        "cover": 1,
        "surroundings": 1,
    }


def test_the_ledger_has_codes_and_tables():
    ledger = run().ledger
    first = ledger.isel(path=0)
    assert ledger["tag"].values[first["step_tag_id"]].tolist() == ["cover:inner", "cover:outer"]
    assert ledger["event"].values[first["step_event_id"]].tolist() == ["through", "through"]
    direct = ledger.isel(path=int(np.argmin(ledger["n_steps"].values)))
    assert direct["step_tag_id"].values.tolist() == [-1, -1]
    assert np.isnan(direct["run_mean"].values).all()
    assert float(first["optical_length"]) == pytest.approx(800.0)


def test_what_if_sums_add_up_to_the_flux_of_their_paths():
    """All light that reaches the rx has met cover:inner, through, once."""
    made = run()
    met = made.node("what_if")["by_lobe"].sel(detector="rx", tag="cover:inner", event="through")
    flux = made.detector("rx")["flux"].values
    assert met.sel(passes=1).values == pytest.approx(flux)
    assert not met.sel(passes=slice(2, 16)).values.any()


def test_a_run_keeps_copies():
    of, found = world(), sums(world())
    made = make_run(of, found)
    before = {n.path: n.to_dataset(inherit=False).copy(deep=True) for n in made.data.subtree}
    for array in (*vars(found).values(), *vars(found.paths).values()):
        if isinstance(array, np.ndarray):
            array[...] = np.zeros(1, array.dtype)[0]
    for path, node in before.items():
        assert made.data[path].to_dataset(inherit=False).identical(node)


def test_provenance_names_no_machine():
    facts = run(rounds=2).data.attrs
    assert facts["scene"] == "toy.toml" and facts["seed"] == 7
    assert (facts["rays"], facts["rounds"], facts["lost_count"] > 0) == (131072, 2, True)
    assert not any("somewhere" in str(value) for value in facts.values())


def test_the_run_answers_by_name():
    made = run(chance=only(COVER))
    assert made.detectors == ("desk", "rx")
    assert made.limits == [
        {"measure": "desk.mean", "at_least": 500.0, "at_most": None, "note": "task"}
    ]
    assert made.mesh_digests == {"wall": "11", "cover": "22"}
    assert (made.length, made.metre, made.blocks, made.title) == ("mm", 0.001, 64, "Toy")
    with pytest.raises(UserError, match='no detector is named "desc"; did you mean "desk"'):
        made.map("desc")
