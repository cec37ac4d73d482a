"""lumentrace: where the light of a scene goes, with an error bar on every number.

From Python::

    import lumentrace

    run = lumentrace.trace("scenes/bench_lamp/bench_lamp.toml", rays=1_000_000)
    run.data                          # an xarray DataTree: maps, account, ledger, with units
    lumentrace.measures(run)["desk.mean"]

Everything heavy is imported on first use, so that `import lumentrace` costs next to nothing.
"""

from importlib import import_module

__version__ = "0.1.0"

_STUDY = ("load", "build", "trace", "open_run", "save", "measures", "account", "paths")
__all__ = ["UserError", "__version__", *_STUDY]


def __getattr__(name: str):
    """Import what the package offers when it is first asked for (PEP 562)."""
    if name in _STUDY:
        return getattr(import_module("lumentrace.study"), name)
    if name == "UserError":
        return import_module("lumentrace.errors").UserError
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted(__all__)
