"""Studies traced down to the plain sums, for tests of the engine."""

from dataclasses import fields, is_dataclass

import numpy as np

from lumentrace import study as api
from lumentrace.engine.runner import trace_world
from lumentrace.engine.sums import step_parts
from lumentrace.models.events import EVENTS
from tests.worlds import ROUND, Estimate, Study, box, of_batches

UP, DOWN = (0.0, 0.0, 1.0), (0.0, 0.0, -1.0)
SIDES = ("side", "side", "side", "side", "bottom", "top")


def slab(low: float, high: float, half: float = 10.0):
    """A square plate between two heights, tags "bottom", "top", "side"."""
    return box((-half, -half, low), (half, half, high), SIDES)


def world_of(study: Study, seed: int = 1, surroundings="air", touch=None, **settings):
    """The world of a study; settings: keys of its table [trace]."""
    if settings:
        study.tables["trace"] = settings
    head = f'[study]\nsurroundings = "{surroundings}"'
    if touch is not None:
        head += f"\ntouch = {touch!r}"
    path = study.folder / "study.toml"
    path.write_text(study.text().replace("[study]", head, 1), encoding="utf-8")
    return api.build(api.load(path, seed))


def sums_of(world, rounds: int = 1, threads: int = 2, **callbacks):
    """Sums of a trace that closes: what was emitted is found again to 1e-12."""
    sums = trace_world(world, rounds * ROUND, threads, **callbacks)
    assert closes(world, sums), "the account does not close"
    return sums


def account_of(world, sums, row: int) -> Estimate:
    """W in a row of the account, all groups together."""
    return of_batches(sums.account[:, row].sum(axis=0) / sums.rounds)


def closes(world, sums) -> bool:
    """Whether every batch's account sums up to what was emitted, to 1e-12."""
    from lumentrace.engine.sums import account_rows

    rows = account_rows(len(world.tag_names), len(world.part_names))
    once = np.r_[0 : rows.part, rows.detected : rows.count]  # parts repeat their tags and bulk
    spent = sums.account[:, once].sum(axis=1) / sums.rounds
    return bool(np.abs(spent - sums.emitted[:, None]).max() <= 1e-12 * sums.emitted.max())


def different(one, other, name: str = "sums") -> list[str]:
    """Names of what differs in any bit between two results."""
    if is_dataclass(one):
        found = [
            different(getattr(one, f.name), getattr(other, f.name), f.name) for f in fields(one)
        ]
        return sum(found, [])
    if isinstance(one, np.ndarray) and isinstance(other, np.ndarray):
        same = one.shape == other.shape and one.tobytes() == other.tobytes()
    else:
        same = one is other or (np.isscalar(one) and one == other)
    return [] if same else [name]


def path_texts(world, sums) -> list[str]:
    """Each path as "detector: tag event, tag event x2, ..."."""
    paths, texts = sums.paths, []
    for row in range(len(paths.hash)):
        steps = []
        for code in paths.step[row, : paths.n_steps[row]].tolist():
            tag, event, run = step_parts(code)
            times = f" x{run}" if run > 1 else ""
            steps.append(f"{world.tag_names[tag]} {EVENTS[event]}{times}")
        texts.append(f"{world.detector_names[paths.detector[row]]}: {', '.join(steps)}")
    return texts


def path_flux(world, sums, text: str) -> Estimate:
    """Flux by one path."""
    row = path_texts(world, sums).index(text)
    return of_batches(sums.paths.batch[row] / sums.rounds)


def beam(study: Study, height: float, direction=DOWN, **keys) -> None:
    """A thin parallel beam down (or up) the axis from that height."""
    disc = {"center": (0.1, 0.03, height), "normal": direction, "radius": 0.01}
    study.source("beam", disc=disc, pattern={"collimated": 0}, **keys)
