"""All pictures of a run."""

from pathlib import Path

from lumentrace.errors import UserError
from lumentrace.run.run import Run
from lumentrace.runs import run_name
from lumentrace.world.world import World
from lumentrace_viz.probe import make_ready

PATHS, MOST = 6, 10  # paths in a picture: unless asked otherwise, and that can be told apart


def draw_run(
    run: Run,
    world: World,
    folder: Path,
    detector: str | None = None,
    paths: int | None = None,
) -> list[Path]:
    """Draw a run into a folder; return the files, all written whole.

    STEM-scene.png shows everything, STEM-paths-DETECTOR.png a cut with the strongest paths where
    light arrived, STEM-map-DETECTOR.png the map; STEM is the run's. detector: the last two of this
    one only. paths: how many of the strongest. Raises UserError: an unknown detector, too many
    paths, what pictures need is not installed, the folder cannot be written.
    """
    number = PATHS if paths is None else paths
    if not 1 <= number <= MOST:
        raise UserError(f"{number} paths cannot be told apart in a picture; allowed: 1 to {MOST}")
    names = run.detectors if detector is None else (detector,)
    for name in names:
        run.detector(name)  # refuses an unknown one
    make_ready()
    from lumentrace_viz.map_picture import map_picture
    from lumentrace_viz.scene_picture import scene_picture, section_picture, stage_of
    from lumentrace_viz.ways import strongest

    stem = Path(run_name(run)).stem
    drawn = {name: strongest(run, world, name, number) for name in names}
    stage, pages = stage_of(run, world), {}
    if detector is None:
        each = max(1, number // max(1, len(names)))
        shown = [path for found in drawn.values() for path in found[:each]][:MOST]
        pages[f"{stem}-scene"] = scene_picture(stage, shown)
    for name in names:
        if any(path.ways for path in drawn[name]):
            pages[f"{stem}-paths-{name}"] = section_picture(stage, name, drawn[name])
        pages[f"{stem}-map-{name}"] = map_picture(run, name)
    return [page.save(folder / f"{file}.png") for file, page in pages.items()]
