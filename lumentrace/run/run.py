"""The result of a trace: labelled arrays, and friendly ways to them."""

import json
from dataclasses import dataclass
from typing import TYPE_CHECKING

from lumentrace.errors import UserError, nearest
from lumentrace.world.arrays import BATCHES

if TYPE_CHECKING:
    import xarray


@dataclass(frozen=True)
class Run:
    """What `lumentrace.run.variables` declares, in an xarray DataTree.

    Every Dataset that is handed out is a view: change a copy.
    """

    data: "xarray.DataTree"

    def node(self, name: str) -> "xarray.Dataset":
        """The variables of one node: "sources", "account", "ledger", "what_if", "lost"."""
        return self.data.children[name].to_dataset(inherit=False)

    @property
    def account(self) -> "xarray.Dataset":
        return self.node("account")

    @property
    def ledger(self) -> "xarray.Dataset":
        return self.node("ledger")

    @property
    def detectors(self) -> tuple[str, ...]:
        """Names, in the order of the file."""
        return tuple(self.ledger["detector"].values.tolist())

    def detector(self, name: str) -> "xarray.Dataset":
        """All that is known of a detector; UserError where none has this name."""
        if name not in self.detectors:
            raise UserError(f'no detector is named "{name}"; {nearest(name, self.detectors)}')
        return self.data.children["detectors"].children[name].to_dataset(inherit=False)

    def map(self, name: str) -> "xarray.Dataset":
        """`value`, `error` and `effective` over (up, across), units in the attributes.

        UserError where no detector has this name.
        """
        node = self.detector(name)
        return node[["value", "error", "effective"]]

    @property
    def title(self) -> str:
        return str(self.data.attrs["title"])

    @property
    def length(self) -> str:
        """Unit of every length."""
        return str(self.data.attrs["length"])

    @property
    def metre(self) -> float:
        """Metres in one unit of length."""
        return float(self.data.attrs["metre"])

    @property
    def seed(self) -> int:
        return int(self.data.attrs["seed"])

    @property
    def rays(self) -> int:
        return int(self.data.attrs["rays"])

    @property
    def rounds(self) -> int:
        return int(self.data.attrs["rounds"])

    @property
    def blocks(self) -> int:
        """Blocks of 1024 rays, 64 a round."""
        return BATCHES * self.rounds

    @property
    def limits(self) -> list[dict]:
        """measure, at_least, at_most (in the measure's unit, or None) and note of each limit."""
        return json.loads(self.data.attrs["limits"])

    @property
    def mesh_digests(self) -> dict[str, str]:
        """sha256 of the mesh file by part."""
        return json.loads(self.data.attrs["mesh_digests"])
