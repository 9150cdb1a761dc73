"""The `encoder-forge` command: finds the subcommand, turns errors into text and exit codes."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence
from importlib import import_module

import click

from encoder_forge import __version__
from encoder_forge.errors import EncoderForgeError

COMMANDS: dict[str, tuple[str, str]] = {
    "spectrum": ("encoder_forge.cli.spectrum", "Entropies, eigenvalues; is the source compressible, and why."),
    "budget": ("encoder_forge.cli.budget", "Block length x kept qubits: weight, fidelities, rate."),
    "build": ("encoder_forge.cli.build", "Make a checked encoder and write its bundle."),
    "verify": ("encoder_forge.cli.verify", "Measure a bundle, or any encoder, against the analytic figures."),
}
"""Command name to (module, one line of help). A module is imported only when its command runs."""


class LazyGroup(click.Group):
    """A group that knows its commands' names and one-line helps without importing them."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Return the command names in the order of the work."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Import and return one command."""
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = import_module(COMMANDS[cmd_name][0]).command
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write the list of commands from the table, importing none."""
        with formatter.section("Commands"):
            formatter.write_dl([(name, text) for name, (_, text) in COMMANDS.items()])


@click.group(cls=LazyGroup, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="encoder-forge")
@click.option("--debug", is_flag=True, help="Show the traceback of an error.")
def group(debug: bool) -> None:
    """Fit the blocks of a characterised quantum source into fewer qubits.

    Data goes to stdout, progress and notes to stderr. Exit codes: 0 done, 1 the check or the comparison
    failed, 2 bad usage or bad input, 3 the machine refused (a file that cannot be written, too little
    memory).
    """


def main(args: Sequence[str] | None = None) -> int:
    """Run one command line and return its exit code; never raises for a user's mistake.

    Parameters
    ----------
    args : sequence of str, optional
        The arguments after the program's name; those of the process by default.
    """
    arguments = list(sys.argv[1:] if args is None else args)
    debug = "--debug" in arguments
    # `--debug` is welcome anywhere on the line, as people add it at the end.
    arguments = [a for a in arguments if a != "--debug"]
    try:
        group.main(args=arguments, prog_name="encoder-forge", standalone_mode=False)
        sys.stdout.flush()
    except click.exceptions.NoArgsIsHelpError as error:
        click.echo(error.format_message(), err=True)
        return 2
    except click.ClickException as error:
        error.show()
        return 2
    except click.exceptions.Exit as error:
        return error.exit_code
    except (click.Abort, KeyboardInterrupt):
        click.echo("interrupted; nothing was written", err=True)
        return 3
    except EncoderForgeError as error:
        if debug:
            raise
        for line in str(error).splitlines():
            click.echo(f"encoder-forge: {line}", err=True)
        return error.exit_code
    except BrokenPipeError:
        # The reader (head, less) went away: not an error of ours; keep the interpreter's exit quiet.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except MemoryError:
        if debug:
            raise
        click.echo("encoder-forge: the machine ran out of memory; ask for a shorter block", err=True)
        return 3
    except OSError as error:
        if debug:
            raise
        click.echo(f"encoder-forge: the machine refused: {error}", err=True)
        return 3
    except Exception as error:
        if debug:
            raise
        click.echo(
            f"encoder-forge: internal error ({type(error).__name__}: {error}); "
            "run again with --debug for the traceback and report it",
            err=True,
        )
        return 3
    return 0


def run() -> None:
    """Console entry point."""
    sys.exit(main())
