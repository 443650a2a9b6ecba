"""The command ``facetwright``: finds the command, runs it, turns errors into lines and exit statuses."""

from __future__ import annotations

import importlib
import sys

import click

from coatings import __version__
from coatings.errors import CoatingsError

MOST_LINES = 5
YES, NO, UNUSABLE = 0, 1, 2

# In the order of the work. Each module holds one command of its own name and imports nothing heavy.
COMMANDS = ("start", "plan", "curve", "materials")


class Commands(click.Group):
    """Loads a command's module only when it is needed."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Commands in the order of the work."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """The command of that name, or None."""
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = getattr(
            importlib.import_module(f"coatings.cli.{cmd_name}"), cmd_name
        )
        return command


@click.group(
    cls=Commands,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100},
    epilog="Example: facetwright plan recipes/pump-976.toml",
)
@click.version_option(__version__, prog_name="facetwright")
def program() -> None:
    """Facet coatings of semiconductor lasers: from windows to layers, orders and verdicts.

    Exit status: 0 done, the answer is yes; 1 done, the answer is no; 2 the input can't be used.
    """


def main() -> None:
    """Entry point of the command line."""
    sys.exit(run(sys.argv[1:]))


def run(arguments: list[str]) -> int:
    """Run one command line and return its exit status."""
    try:
        status = program.main(args=arguments, prog_name="facetwright", standalone_mode=False)
    except click.ClickException as error:
        return _refuse([_usage_line(error)])
    except CoatingsError as error:
        return _refuse([str(problem) for problem in error.problems])
    except (KeyboardInterrupt, click.Abort):
        print("facetwright: stopped; nothing was written", file=sys.stderr)
        return NO
    except BrokenPipeError:
        sys.stderr.close()  # the reader has left: nothing more can be said
        return NO
    return status if isinstance(status, int) else YES


def _usage_line(error: click.ClickException) -> str:
    context = getattr(error, "ctx", None)
    command = context.command_path if context is not None else "facetwright"
    return f"{error.format_message()} See: {command} --help"


def _refuse(lines: list[str]) -> int:
    for line in lines[:MOST_LINES]:
        print(f"facetwright: {' '.join(line.split())}", file=sys.stderr)
    if len(lines) > MOST_LINES:
        print(f"facetwright: and {len(lines) - MOST_LINES} more", file=sys.stderr)
    return UNUSABLE
