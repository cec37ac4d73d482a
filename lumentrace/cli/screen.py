"""What reaches the terminal: results on standard output, all else on standard error."""

import sys
from contextlib import contextmanager


def show(text: str) -> None:
    """Print a result."""
    sys.stdout.write(text if text.endswith("\n") else text + "\n")


def show_json(answer: dict) -> None:
    """Print the one JSON object of `--json`."""
    import json

    show(json.dumps(answer, indent=2, ensure_ascii=False, allow_nan=False))


def remark(text: str) -> None:
    """Say something beside the results."""
    print(text, file=sys.stderr, flush=True)


class Silent:
    """The bar where standard error is no terminal: it shows nothing."""

    def stage(self, text: str) -> None:
        """Name what is being done."""

    def rays(self, done: int, planned: int) -> None:
        """Tell how far the trace is; what the engine calls."""


class Bar:
    """A progress bar on standard error."""

    def __init__(self, progress):
        self._progress = progress
        self._task = progress.add_task("", total=None, rays="")

    def stage(self, text: str) -> None:
        self._progress.update(self._task, description=text)

    def rays(self, done: int, planned: int) -> None:
        shown = f"{done / 1e6:.1f} of {planned / 1e6:.1f} M rays"
        self._progress.update(
            self._task, description="Tracing", completed=done, total=planned, rays=shown
        )


@contextmanager
def progress():
    """A bar on a terminal, shown at once and gone at the end; elsewhere nothing."""
    if not sys.stderr.isatty():
        yield Silent()
        return
    from rich.console import Console
    from rich.progress import BarColumn, Progress, TextColumn, TimeRemainingColumn

    columns = (
        TextColumn("{task.description}"),
        BarColumn(bar_width=30),
        TextColumn("{task.fields[rays]}"),
        TimeRemainingColumn(),
    )
    with Progress(*columns, console=Console(stderr=True), transient=True) as shown:
        yield Bar(shown)
