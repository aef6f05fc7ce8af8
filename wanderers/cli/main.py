"""The program: finds the command, turns the program's errors into one line each."""

from __future__ import annotations

import importlib
import os
import sys
import traceback
from typing import Any, Final

import click

from wanderers import __version__
from wanderers.errors import UsageProblem, WanderersError

COMMANDS: Final = {
    "report": "Write the report folder of a span: page, tables, pictures, calendar.",
    "almanac": "Print the event table of a span.",
    "seasons": "Print the retrograde seasons of a span, one row each.",
    "track": "Print a body's positions at regular steps.",
    "calendar": "Write events as an iCalendar file.",
    "gatherings": "Find several bodies within a small circle, over centuries.",
    "nights": "Print what can be seen from a site, evening by evening, or at an instant.",
    "lineups": "Find runs of evenings on which several bodies stand up at once.",
    "apparitions": "Print when each planet comes out and is lost again, and when it stands best.",
    "campaign": "Plan a retrograde season night by night, from a site.",
    "sites": "List, add and check sites; find a city.",
    "kernels": "Say which kernel is used; check one, add one.",
}
"""Commands and their one-line help, so that the list prints without loading any of them."""

TRACEBACK_VARIABLE: Final = "WANDERERS_TRACEBACK"

LIBRARY_THREADS: Final = "OPENBLAS_NUM_THREADS"
"""Read by numpy's linear algebra when it is loaded. Work is shared out to all cores by the stretch of time;
threads of the library's own would only get in each other's way."""


class Interrupted(Exception):
    """The user pressed Ctrl-C."""


class LazyCommands(click.Group):
    """A group whose commands live in modules that are imported only when called."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Return the commands in the order in which they are documented."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Import the module of a command."""
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = importlib.import_module(f"wanderers.cli.{cmd_name}").command
        # Docstrings are raw: click's mark for lines to be kept, a backspace, stands in them as it is written.
        command.help = (command.help or "").replace(r"\b", "\b")
        return command

    def invoke(self, ctx: click.Context) -> Any:
        """Run the command; an interruption passes click's own handling, which would print an empty line."""
        try:
            return super().invoke(ctx)
        except KeyboardInterrupt:
            raise Interrupted from None

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """List the commands without importing them."""
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.group(
    cls=LazyCommands, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100}
)
@click.version_option(__version__, prog_name="wanderers")
def program() -> None:
    """Stations, retrograde seasons and meetings of the planets, from a JPL kernel, offline.

    \b
    Example: everything that happens in the next two years, as a folder to open in a browser
        wanderers report
    """  # noqa: D301  (click takes the backspace itself as a mark)


def main() -> None:
    """Run the program and leave with its exit status: 0 done, 1 failed, 2 the request was wrong."""
    os.environ.setdefault(LIBRARY_THREADS, "1")
    try:
        program.main(standalone_mode=False)
    except click.ClickException as error:
        _leave(_one_line(error), error.exit_code)
    except (click.Abort, KeyboardInterrupt, Interrupted):
        _leave("interrupted: nothing half-written was kept", 130)
    except click.exceptions.Exit as request:
        sys.exit(request.exit_code)
    except UsageProblem as error:
        _leave(str(error), 2)
    except WanderersError as error:
        _leave(str(error), 1)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        sys.exit(1)
    except Exception as error:  # the one place: the contract allows no traceback
        if os.environ.get(TRACEBACK_VARIABLE):
            traceback.print_exc()
        fault = f"{type(error).__name__}: {error}".splitlines()[0]
        _leave(f"unexpected failure ({fault}); set {TRACEBACK_VARIABLE}=1 to see where", 1)


def _one_line(error: click.ClickException) -> str:
    """Return a usage error as one line that names the command's help."""
    line = " ".join(error.format_message().split())
    context = getattr(error, "ctx", None)
    return f"{line.rstrip('.')}; see {context.command_path} --help" if context is not None else line


def _leave(line: str, status: int) -> None:
    click.echo(f"wanderers: {' '.join(line.split())}", err=True)
    sys.exit(status)
