"""The one place that owns numba's options and its cache on disk.

The stamp of numba's own cache covers only a function's own file, so that a cached caller would go
on answering with the old code of a callee that was edited in another file. The cache therefore
lies in a folder named by the digest of all sources that compiled code comes from and of the
versions of numba and numpy (the processor stands in numba's own stamp), and is set before any
kernel is compiled.
"""

import hashlib
import os
import tempfile
from functools import cache
from pathlib import Path

import numba
import numpy

# Files and folders that compiled code, or what it depends on, stands in.
COMPILED = ("jit.py", "kernels", "models", "engine", "world/arrays.py")


def _digest() -> str:
    """Digest of every source file that compiled code comes from, and of what else shapes it."""
    root = Path(__file__).parent
    digest = hashlib.sha256(f"{numba.__version__} {numpy.__version__}".encode())
    for place in COMPILED:
        path = root / place
        for file in sorted(path.rglob("*.py")) if path.is_dir() else [path]:
            digest.update(file.relative_to(root).as_posix().encode())
            digest.update(file.read_bytes())
    return digest.hexdigest()[:16]


def _writable(folder: Path) -> bool:
    try:
        folder.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryFile(dir=folder):
            return True
    except OSError:
        return False


@cache
def cache_folder() -> Path | None:
    """Where compiled kernels are kept, or None where nothing can be written.

    ``LUMENTRACE_CACHE`` names another parent folder.
    """
    own = os.environ.get("LUMENTRACE_CACHE")
    shared = Path(os.environ.get("XDG_CACHE_HOME") or "~/.cache").expanduser()
    folder = (Path(own) if own else shared / "lumentrace") / f"kernels-{_digest()}"
    return folder if _writable(folder) else None


def is_warm() -> bool:
    """Whether the tracer of exactly these sources is on disk, compiled."""
    folder = cache_folder()
    return folder is not None and any(folder.rglob("block.trace_rays-*.nbi"))


if cache_folder() is not None:
    numba.config.CACHE_DIR = str(cache_folder())

_OPTIONS = {
    "nogil": True,  # blocks run on plain threads
    "cache": cache_folder() is not None,
    "error_model": "numpy",  # division by zero gives inf, as the slab test needs
    "fastmath": False,  # contraction would break the watertight edge test
}


def kernel(function):
    """Compile on first call, cached on disk, free of the interpreter's lock.

    Without numba's reference counts: they took three quarters of a ray's time, since every look at
    a row of an array is counted. In return such a function can make no array, nor return one.
    """
    return numba.njit(**_OPTIONS, _nrt=False)(function)


def uncached_kernel(function):
    """As `kernel`, for a function that stands in no file; its callers are cached with it inside."""
    return numba.njit(**{**_OPTIONS, "cache": False}, _nrt=False)(function)


def allocating_kernel(function):
    """As `kernel`, for the few functions outside the hot loop that make arrays."""
    return numba.njit(**_OPTIONS)(function)


def inlined_kernel(function):
    """As `kernel`, for the innermost steps of the traversal: always put into the caller.

    Left to itself the compiler calls them with all arrays passed on the stack, at four times the
    time of a ray.
    """
    return numba.njit(**_OPTIONS, _nrt=False, forceinline=True)(function)
