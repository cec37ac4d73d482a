"""A run on disk: whole or not at all, the same bytes for the same run, honest on opening."""

import os
import signal
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import xarray

from lumentrace.errors import UserError
from lumentrace.run import store
from lumentrace.run.make import make_run
from lumentrace.run.store import open_run, write_run
from tests.unit.synthetic_run import AWAY, only, run, sums, world

ROOT = Path(__file__).parents[2]


@pytest.fixture
def made():
    return run()


@pytest.fixture
def written(made, tmp_path):
    path = tmp_path / "toy.nc"
    write_run(made, path)
    return path


@pytest.mark.parametrize("keep_batches", [True, False])
def test_what_was_written_is_opened(tmp_path, keep_batches):
    made = run(keep_batches=keep_batches)
    write_run(made, tmp_path / "toy.nc")
    assert open_run(tmp_path / "toy.nc").data.identical(made.data)


def test_an_opened_run_writes_the_same_bytes(written, tmp_path):
    write_run(open_run(written), tmp_path / "again.nc")
    assert (tmp_path / "again.nc").read_bytes() == written.read_bytes()


def test_the_same_run_gives_the_same_bytes_in_another_process(written, tmp_path):
    """Under another hash seed, at another time, under another name."""
    again = tmp_path / "elsewhere" / "other.nc"
    again.parent.mkdir()
    code = (
        "import sys; from tests.unit.synthetic_run import run; "
        "from lumentrace.run.store import write_run; write_run(run(), sys.argv[1])"
    )
    environment = {**os.environ, "PYTHONHASHSEED": "12345", "TZ": "Asia/Tokyo"}
    subprocess.run([sys.executable, "-c", code, again], check=True, env=environment, cwd=ROOT)
    assert again.read_bytes() == written.read_bytes()


def test_nothing_of_the_machine_is_in_the_file(written):
    content = written.read_bytes()
    for text in (
        b"somewhere",
        os.fsencode(written.parent.name),
        os.fsencode(Path.home()),
    ):
        assert text not in content


def test_numbers_are_packed_and_names_are_stored_once(written, made):
    raw = sum(n.to_dataset(inherit=False).nbytes for n in made.data.subtree)
    assert written.stat().st_size < raw / 3


def test_any_netcdf_reader_finds_units(written):
    with xarray.open_dataset(written, group="detectors/desk", engine="h5netcdf") as desk:
        assert desk["value"].attrs["units"] == "lx"
        assert desk["value"].dims == ("up", "across")


def test_a_run_without_detectors_paths_or_hits_is_kept(tmp_path):
    dark = run(chance=only(AWAY))
    of, found = world(), sums(world(), chance=only(AWAY))
    arrays = of.tables._replace(
        detectors=type(of.tables.detectors)(*(a[:0] for a in of.tables.detectors))
    )
    blind = make_run(
        replace(of, detector_names=(), tables=arrays),
        replace(
            found,
            what_if=found.what_if[:0],
            paths=replace(
                found.paths, other=found.paths.other[:0], other_count=found.paths.other_count[:0]
            ),
        ),
    )
    for name, made in (("dark", dark), ("blind", blind)):
        assert made.ledger.sizes["path"] == 0
        write_run(made, tmp_path / f"{name}.nc")
        assert open_run(tmp_path / f"{name}.nc").data.identical(made.data)
    assert blind.detectors == ()


@pytest.mark.parametrize("fault", [OSError(28, "No space left on device"), KeyboardInterrupt()])
def test_a_stopped_write_leaves_the_old_file_and_nothing_else(written, monkeypatch, fault):
    before = written.read_bytes()

    def stop(path):
        raise fault

    monkeypatch.setattr(store, "_flush", stop)
    expected = UserError if isinstance(fault, OSError) else KeyboardInterrupt
    with pytest.raises(expected):
        write_run(run(seed=2), written)
    assert written.read_bytes() == before
    assert [p.name for p in written.parent.iterdir()] == ["toy.nc"]


def test_a_killed_write_leaves_the_old_file_whole(written):
    """Killed, not interrupted, after all bytes are written aside and before they are in place."""
    before = written.read_bytes()
    code = (
        "import os, signal, sys; from lumentrace.run import store; "
        "from tests.unit.synthetic_run import run; "
        "store._flush = lambda path: os.kill(os.getpid(), signal.SIGKILL); "
        "store.write_run(run(seed=2), sys.argv[1])"
    )
    done = subprocess.run([sys.executable, "-c", code, written], cwd=ROOT)
    assert done.returncode == -signal.SIGKILL
    assert written.read_bytes() == before
    assert [p.name for p in written.parent.glob("*.nc")] == ["toy.nc"]


def test_a_folder_that_is_not_there_is_the_users_fault(made, tmp_path):
    with pytest.raises(UserError, match="toy.nc: cannot be written"):
        write_run(made, tmp_path / "nowhere" / "toy.nc")


def test_the_file_is_closed_and_may_be_replaced(written):
    opened = open_run(written)
    written.unlink()
    assert np.isfinite(opened.map("desk")["value"].values).all()


def refused(path) -> str:
    with pytest.raises(UserError) as raised:
        open_run(path)
    text = str(raised.value)
    assert text.startswith(f"{path}: ") and "\n" not in text
    return text


def test_a_missing_file_is_named(tmp_path):
    assert "No such file" in refused(tmp_path / "none.nc")
    assert "directory" in refused(tmp_path)


@pytest.mark.parametrize("content", [b"", b"not a run\n", b"solid box\n" * 50])
def test_a_foreign_file_is_refused(tmp_path, content):
    path = tmp_path / "foreign.nc"
    path.write_bytes(content)
    assert "is not a run of lumentrace" in refused(path)


def test_foreign_netcdf_is_refused(tmp_path):
    path = tmp_path / "weather.nc"
    xarray.Dataset({"t": ("x", [1.0, 2.0])}, attrs={"title": "t"}).to_netcdf(
        path, engine="h5netcdf"
    )
    assert refused(path).endswith("is not a run of lumentrace")


@pytest.mark.parametrize("share", [0.001, 0.1, 0.5, 0.9, 0.999])
def test_a_file_cut_short_is_refused(written, share):
    content = written.read_bytes()
    written.write_bytes(content[: int(share * len(content))])
    refused(written)


def test_a_damaged_array_is_refused(written):
    """Zeros over a quarter of the packed numbers: the checksum of zlib tells."""
    content = bytearray(written.read_bytes())
    n = len(content)
    content[n // 2 : 3 * n // 4] = bytes(3 * n // 4 - n // 2)
    written.write_bytes(content)
    assert "is damaged" in refused(written)


def altered(made, path, change):
    tree = made.data.copy(deep=True)
    change(tree)
    write_run(replace(made, data=tree), path)
    return path


def test_another_layout_is_refused_with_what_to_do(made, tmp_path):
    path = altered(made, tmp_path / "old.nc", lambda tree: tree.attrs.update(layout=99))
    assert refused(path).endswith("this one reads layout 1: trace the scene again")


def test_a_missing_variable_is_named(made, tmp_path):
    def drop(tree):
        tree["account"] = tree["account"].to_dataset().drop_vars(["emitted", "whole"])

    text = refused(altered(made, tmp_path / "bad.nc", drop))
    assert "is damaged (lacks account/emitted and 1 more)" in text


def test_a_missing_detector_is_named(made, tmp_path):
    def drop(tree):
        del tree["detectors"]["rx"]

    path = altered(made, tmp_path / "bad.nc", drop)
    assert "is damaged (lacks detectors/rx)" in refused(path)
