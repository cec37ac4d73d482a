"""Which measures a scene has: the names that limits and `until` may use."""

import re
from collections.abc import Sequence

from lumentrace.errors import nearest
from lumentrace.scene.model import BULK, OPAQUE, SHEET, Detector, Part
from lumentrace.scene.place import Place

OF_DETECTOR = (
    "flux", "mean", "min", "max", "uniformity", "min_split", "max_split", "uniformity_split",
)  # fmt: skip
ABSORBED = "absorbed"
ESCAPED = "study.escaped"

_ABSORBED_AT = re.compile(r"([^:.]+):([^:.]+)\.absorbed")


def part_and_tag(measure: str) -> tuple[str, str] | None:
    """PART and TAG of "PART:TAG.absorbed", `bulk` too; None for all other measures."""
    match = _ABSORBED_AT.fullmatch(measure)
    return (match[1], match[2]) if match else None


def check_measure(
    measure: str, key: str, place: Place, parts: Sequence[Part], detectors: Sequence[Detector]
) -> None:
    """Raises UserError for a measure that the scene cannot have.

    Tags may come from mesh files: of a measure of a tag only the part is checked here.
    """
    owner = re.split("[:.]", measure)[0]
    for kind, things in (("part", parts), ("detector", detectors)):
        if any(thing.name == owner and not thing.use for thing in things):
            raise place.error(key, f'"{measure}": the {kind} "{owner}" is left out (use = false)')
    used = [part for part in parts if part.use]
    filled = [part.name for part in used if part.medium not in (OPAQUE, SHEET)]
    at = part_and_tag(measure)
    if at and at[1] != BULK and at[0] in {part.name for part in used}:
        return
    if at and at[1] == BULK and at[0] in {part.name for part in used} - set(filled):
        raise place.error(key, f'"{measure}": there is no light inside the part "{at[0]}"')
    known = [
        *(f"{detector.name}.{of}" for detector in detectors if detector.use for of in OF_DETECTOR),
        *(f"{part.name}.{ABSORBED}" for part in used),
        *(f"{name}:{BULK}.{ABSORBED}" for name in filled),
        ESCAPED,
    ]
    if measure not in known:
        known = [name for name in known if re.split("[:.]", name)[0] == owner] or known
        raise place.error(key, f'no measure is named "{measure}"; {nearest(measure, known)}')
