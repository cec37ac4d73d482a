"""The entry point, and the one place where an exit status is decided.

0: done. 2: something to put right, said in one line; also a fault of the program itself, whose
details go to a log file. 130: stopped with Ctrl-C.
"""

import os
import sys

import click

from lumentrace.errors import UserError

DONE, UNUSABLE, STOPPED = 0, 2, 130


def main() -> None:
    """Run the command line of this process and exit."""
    sys.exit(run(sys.argv[1:]))


def run(arguments: list[str]) -> int:
    """Carry out one command and return its exit status; no exception leaves this function."""
    from lumentrace.cli.verbs import lumentrace

    try:
        with lumentrace.make_context("lumentrace", arguments) as context:
            lumentrace.invoke(context)
        sys.stdout.flush()
    except click.exceptions.Exit as end:  # --help and --version
        return _close_output(end.exit_code)
    except click.UsageError as error:
        return _refuse(f"{_command(error)}: {_usage(error)}")
    except UserError as error:
        return _refuse(str(error))
    except BrokenPipeError:  # the reader, such as `head`, has all that it wanted
        return _close_output(DONE)
    except (KeyboardInterrupt, click.Abort):
        print("Stopped. Nothing was written.", file=sys.stderr)
        return STOPPED
    except Exception as error:
        from lumentrace.cli.faults import keep_report

        return _refuse(keep_report(error))
    return DONE


def _refuse(line: str) -> int:
    print(line, file=sys.stderr)
    return UNUSABLE


def _close_output(status: int) -> int:
    """Flush; if nobody reads any more, keep the interpreter from saying so at its end."""
    try:
        sys.stdout.flush()
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    return status


def _command(error: click.UsageError) -> str:
    return error.ctx.command_path if error.ctx else "lumentrace"


def _usage(error: click.UsageError) -> str:
    """One line in our own words for what click found in the command."""
    from lumentrace.errors import nearest

    command = error.ctx.command if error.ctx else None
    params = command.get_params(error.ctx) if command else []
    options = [p for p in params if isinstance(p, click.Option)]
    if isinstance(error, click.NoSuchOption):
        known = [name for option in options for name in option.opts]
        return f"{error.option_name}: no such option; {nearest(error.option_name, known)}"
    if isinstance(error, click.MissingParameter) and error.param is not None:
        return f"{error.param.human_readable_name} is missing; see {_command(error)} --help"
    if isinstance(error, click.BadParameter) and error.param is not None:
        return f"{error.param.opts[0]}: {error.message}"
    if isinstance(error, click.BadOptionUsage) and options:
        return _misused(error.option_name, options)
    return " ".join(error.format_message().split())


def _misused(name: str, options: list[click.Option]) -> str:
    """For a flag with a value, and for an option without one."""
    option = next(option for option in options if name in option.opts)
    if option.is_flag:
        return f"{name}: takes no value"
    allowed = getattr(option.type, "allowed", option.metavar)
    return f"{name}: its value is missing; allowed: {allowed}"
