"""The words that verbs share: what they take and how a number is read."""

from decimal import Decimal, InvalidOperation
from pathlib import Path

import click

from lumentrace.study import RAYS, SEED, THREADS


class WholeNumber(click.ParamType):
    """A whole number from `least` to `most`, written 2000000, 2_000_000 or 2e6."""

    def __init__(self, least: int, most: int, metavar: str = "N"):
        self.least = least
        self.most = most
        self.name = metavar

    @property
    def allowed(self) -> str:
        return f"{self.least} to {self.most}"

    def convert(self, value, param, ctx) -> int:
        if isinstance(value, int):
            return value
        try:
            number = Decimal(value)
            whole = int(number) if number.adjusted() < 30 and number == int(number) else None
        except (InvalidOperation, ValueError, OverflowError):
            whole = None
        if whole is None:
            self.fail(f'"{value}" is not a whole number; write 2000000, 2_000_000 or 2e6', param)
        if not self.least <= whole <= self.most:
            self.fail(f"{value} is out of range; allowed: {self.allowed}", param)
        return whole


def subject_argument(help_name: str = "SCENE"):
    """The one argument of most verbs: a scene file, or also a run's file where the name says so."""
    return click.argument(
        "subject", metavar=help_name, type=click.Path(path_type=Path), required=True
    )


def json_option():
    return click.option(
        "--json", "as_json", is_flag=True, help="One JSON object on standard output."
    )


def detector_option():
    return click.option("--detector", metavar="NAME", help="Only this detector.")


def top_option(meaning: str, most: int = 10**6):
    return click.option("--top", type=WholeNumber(1, most), help=meaning)


def tracing_options(verb):
    """--rays --seed --threads --out, for verbs that trace."""
    options = (
        click.option(
            "--rays",
            type=WholeNumber(*RAYS),
            help="Rays to trace; the most of them where the scene has `until`. "
            "Rounded up to whole rounds of 65,536.",
        ),
        click.option("--seed", type=WholeNumber(*SEED), help="In place of the scene's seed."),
        click.option(
            "--threads",
            type=WholeNumber(*THREADS),
            help="Threads to use; all processors where left out. Results do not depend on it.",
        ),
        click.option(
            "--out",
            metavar="FOLDER",
            type=click.Path(path_type=Path),
            help="Folder to write the run to; runs/ beside the scene file where left out.",
        ),
    )
    for option in reversed(options):
        verb = option(verb)
    return verb
