"""A reference case: published or derived values, and where they come from."""

from dataclasses import dataclass, field

import pytest


@dataclass(frozen=True)
class Case:
    """Values by name; `case["Rs(15 deg)"]` is one of them.

    source_status says how far the citation was confirmed; the numbers themselves were computed in
    30-digit arithmetic and checked a second way.
    """

    title: str
    source: str
    source_status: str
    expected: dict[str, float]
    reject: dict[str, float] = field(default_factory=dict)  # what a wrong model would give

    def __getitem__(self, name: str) -> float:
        return self.expected[name]

    def agrees(self, name: str, computed: float) -> bool:
        """Deterministic evaluation: relative 1e-9, absolute 1e-12 where the value is 0."""
        return computed == pytest.approx(self.expected[name], rel=1e-9, abs=1e-12)
