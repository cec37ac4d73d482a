"""A run on disk: one netCDF-4 file, the same bytes for the same run, never half-written."""

import os
from pathlib import Path

import xarray

from lumentrace.errors import UserError
from lumentrace.run.run import Run
from lumentrace.run.variables import LAYOUT, faults

_SIGNATURE = b"\x89HDF\r\n\x1a\n"  # HDF5 file format specification, section II.A
_PACKED = {"zlib": True, "complevel": 4, "shuffle": True}
_WORTH_PACKING = 1024  # bytes; below, the chunk's index takes more than packing saves


def write_run(run: Run, path: str | os.PathLike) -> None:
    """Write to a temporary name in the same folder, flush to the disk, move into place.

    Whatever stops it, `path` is afterwards the whole new file or untouched. Raises UserError
    naming the file where the system does not let it be written.
    """
    path = Path(path)
    aside = path.with_name(f".{path.name}.{os.getpid()}.part")
    try:
        run.data.to_netcdf(aside, engine="h5netcdf", encoding=_encoding(run.data))
        _flush(aside)
        aside.replace(path)
        if os.name == "posix":  # elsewhere a folder cannot be opened
            _flush(path.parent)
    except OSError as error:
        raise UserError(f"{path}: cannot be written: {error.strerror or error}") from error
    finally:
        aside.unlink(missing_ok=True)


def _encoding(tree: xarray.DataTree) -> dict[str, dict[str, dict]]:
    """Arrays of numbers packed; short ones and names as they are."""
    return {
        node.path: {
            name: _PACKED
            for name, variable in node.to_dataset(inherit=False).variables.items()
            if variable.nbytes >= _WORTH_PACKING and variable.dtype.kind in "fiu"
        }
        for node in tree.subtree
    }


def _flush(path: Path) -> None:
    handle = os.open(path, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def open_run(path: str | os.PathLike) -> Run:
    """The run of a file, read whole; the file is closed again.

    Raises UserError naming the file where it is missing, damaged, of another layout or no run.
    """
    path = Path(path)
    try:
        with path.open("rb") as file:
            signature = file.read(len(_SIGNATURE))
    except OSError as error:
        raise UserError(f"{path}: cannot be read: {error.strerror}") from error
    if signature != _SIGNATURE:
        raise UserError(f"{path}: is not a run of lumentrace (no netCDF-4 file)")
    try:
        with xarray.open_datatree(path, engine="h5netcdf", decode_times=False) as tree:
            tree.load()
            nodes = {node.path: node.to_dataset(inherit=False) for node in tree.subtree}
    except MemoryError:
        raise
    except Exception as error:  # the libraries raise nearly anything on a damaged file
        raise UserError(f"{path}: is damaged ({_first_line(error)})") from error
    _check(path, nodes)
    return Run(xarray.DataTree.from_dict({k: v.drop_encoding() for k, v in nodes.items()}))


def _first_line(error: Exception) -> str:
    return f"{type(error).__name__}: {error}".splitlines()[0]


def _check(path: Path, nodes: dict[str, xarray.Dataset]) -> None:
    """UserError unless the file holds what is declared, in this layout."""
    root = nodes["/"].attrs
    if "lumentrace" not in root:
        raise UserError(f"{path}: is not a run of lumentrace")
    if root.get("layout") != LAYOUT:
        raise UserError(
            f"{path}: is of lumentrace {root['lumentrace']} with file layout "
            f"{root.get('layout')}, this one reads layout {LAYOUT}: trace the scene again"
        )
    found = faults({k.strip("/"): (v.attrs, v.variables) for k, v in nodes.items()})
    if not found:
        named = nodes["/ledger"]["detector"].values
        found = [f"lacks detectors/{n}" for n in named if f"/detectors/{n}" not in nodes]
    if found:
        more = f" and {len(found) - 1} more" if len(found) > 1 else ""
        raise UserError(f"{path}: is damaged ({found[0]}{more})")
