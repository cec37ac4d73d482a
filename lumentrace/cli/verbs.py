"""The verbs: each reads its words, asks `lumentrace.study`, shows what `lumentrace.report` says.

Everything but click is imported inside the verbs, so that `--help` of any verb is quick.
"""

import click

import lumentrace as package
from lumentrace.cli.screen import progress, remark, show, show_json
from lumentrace.cli.words import (
    detector_option,
    json_option,
    subject_argument,
    top_option,
    tracing_options,
)
from lumentrace.errors import nearest


class Verb(click.Command):
    """A verb that can say in one line what is wrong with its words."""

    allow_extra_args = True  # click's own check stops at the first; ours follows

    def parse_args(self, ctx, args):
        try:
            super().parse_args(ctx, args)
        except click.BadOptionUsage as error:
            error.ctx = ctx  # which click leaves out, and with it whose option it is
            raise
        if ctx.args:
            arguments = [p.metavar for p in self.params if isinstance(p, click.Argument)]
            allowed = f"{' '.join(arguments)} and options" if arguments else "options only"
            raise click.UsageError(f"too many words: {' '.join(ctx.args)}; allowed: {allowed}", ctx)
        return ctx.args


class Verbs(click.Group):
    """A group that names the nearest verb where one is unknown."""

    command_class = Verb

    def resolve_command(self, ctx, args):
        if args and not args[0].startswith("-") and args[0] not in self.commands:
            known = nearest(args[0], self.commands)
            raise click.UsageError(f'"{args[0]}" is not a verb; {known}', ctx)
        return super().resolve_command(ctx, args)

    def list_commands(self, ctx) -> list[str]:
        return list(self.commands)  # in the order of work, not of the alphabet


@click.group(
    cls=Verbs,
    no_args_is_help=False,
    invoke_without_command=True,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 80},
    epilog="Example: lumentrace check scenes/bench_lamp/bench_lamp.toml",
)
@click.version_option(package.__version__, prog_name="lumentrace", message="%(prog)s %(version)s")
@click.pass_context
def lumentrace(context):
    """Trace light through parts given as meshes: how much lands where, by which
    paths, with a standard error on every number."""
    if context.invoked_subcommand is None:
        show(context.get_help())


@lumentrace.command(
    short_help="Say what a scene holds, and what is wrong or doubtful.",
    epilog="Example: lumentrace check scenes/bench_lamp/bench_lamp.toml",
)
@subject_argument()
@json_option()
def check(subject, as_json):
    """Say what a scene holds and what is wrong or doubtful in it; trace nothing."""
    with progress() as bar:
        bar.stage("Reading the scene and its meshes")
        from lumentrace import study
        from lumentrace.report.check import check_json, check_text

        world = study.build(study.load(subject))
    if as_json:
        show_json(check_json(world))
    else:
        show(check_text(world))


@lumentrace.command(
    short_help="Trace a scene, print measures and account, write the run.",
    epilog="Example: lumentrace trace scenes/bench_lamp/bench_lamp.toml --rays 2e6",
)
@subject_argument()
@tracing_options
@json_option()
def trace(subject, rays, seed, threads, out, as_json):
    """Trace a scene, print its measures and where the light went, write the run."""
    with progress() as bar:
        bar.stage("Reading the scene and its meshes")
        from time import perf_counter

        from lumentrace import runs, study
        from lumentrace.report.trace import trace_json, trace_text

        scene = study.load(subject, seed=seed)
        folder = runs.run_folder(scene, out)
        world = study.build(scene)
        compiling = _tell_compiling(bar)
        started = perf_counter()
        run = study.trace(world, rays=rays, threads=threads, progress=bar.rays)
        seconds = perf_counter() - started
        path = study.save(run, folder)
    if as_json:
        show_json(trace_json(run, path, world))
    else:
        show(trace_text(run, path, world, asked=rays, seconds=seconds, compiling=compiling))


def _tell_compiling(bar) -> bool:
    """Say why the first use takes a while; return whether it does."""
    from lumentrace import study

    if study.is_compiled():
        return False
    bar.stage("Compiling")  # until the first rays are done
    remark("Compiling the tracer for this machine, once: up to a minute.")
    return True


def _find(subject):
    """The run that SCENE|RUN means; says on standard error if its scene has changed since."""
    from lumentrace import runs

    found = runs.find_run(subject)
    changed = runs.changed_since(found.run, found.scene) if found.scene else []
    if changed:
        remark(
            f"{found.path}: {', '.join(changed)} changed since this run; trace again for today's"
        )
    return found


@lumentrace.command(
    short_help="Print the paths to each detector, strongest first.",
    epilog="Example: lumentrace ledger scenes/range_finder/range_finder.toml --top 5",
)
@subject_argument("SCENE|RUN")
@detector_option()
@top_option("Paths to print for each detector; 10 where left out, with --json all.")
@json_option()
def ledger(subject, detector, top, as_json):
    """Print the paths by which light reached each detector, strongest first.

    Takes the newest run of a scene, or a run's file."""
    from lumentrace.report.ledger import ledger_json, ledger_text

    found = _find(subject)
    if as_json:
        show_json(ledger_json(found.run, found.path, detector, top))
    else:
        show(ledger_text(found.run, found.path, detector, top))


@lumentrace.command(
    short_help="Draw a run: parts, strongest paths, detector maps.",
    epilog="Example: lumentrace draw scenes/range_finder/range_finder.toml --detector rx",
)
@subject_argument("SCENE|RUN")
@detector_option()
@top_option("Paths to draw, strongest first, 1 to 10; 6 where left out.", most=10)
@json_option()
def draw(subject, detector, top, as_json):
    """Draw pictures of a run beside it, as PNG files: the parts with the
    strongest paths to a detector, and the detector's map.

    Takes the newest run of a scene, or a run's file. Needs the extra
    `pictures`."""
    from lumentrace import runs, study
    from lumentrace.report.lines import run_line, shown_path

    with progress() as bar:
        bar.stage("Reading the run and its scene")
        found = runs.find_run(subject)
        world = study.world_of(found)
        _tell_compiling(bar)
        bar.stage("Drawing")
        from lumentrace_viz.draw import draw_run

        files = draw_run(found.run, world, found.path.parent, detector=detector, paths=top)
    if as_json:
        show_json({"file": str(found.path), "pictures": [str(file) for file in files]})
    else:
        written = (f"Written: {shown_path(file)}" for file in files)
        show("\n".join([run_line(found.run, found.path), *written]))


@lumentrace.command(
    short_help="Print the JSON Schema of scene files.",
    epilog="Example: lumentrace schema > scene.schema.json",
)
@json_option()
def schema(as_json):
    """Print the JSON Schema of scene files, for editors that check TOML.

    It is JSON with --json and without."""
    from lumentrace import study

    show_json(study.schema())
