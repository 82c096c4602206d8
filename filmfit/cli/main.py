"""The command line: the group, what all commands share, and how a fault is told.

Knows words and exit status; every command's work is imported inside its body, so that --help is instant.
"""

import os
import sys
from collections.abc import Sequence

import click

from filmfit import __version__
from filmfit.cli.fit import fit
from filmfit.cli.materials import materials
from filmfit.cli.new import new
from filmfit.cli.next import next_
from filmfit.cli.options import tell
from filmfit.cli.rate import rate
from filmfit.cli.runs import runs
from filmfit.cli.trend import trend

WRONG_USE = 2
INTERRUPTED = 130  # 128 + SIGINT, as shells have it
READER_GONE = 141  # 128 + SIGPIPE
LATER = ("read", "thickness", "substrate", "tradeoff")


class _Commands(click.Group):
    """The group, which tells a command that is not built yet from a mistyped one."""

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """Find the command that the first word names."""
        if args and args[0] in LATER:
            raise click.UsageError(f"'{args[0]}' is not supported yet", ctx)
        return super().resolve_command(ctx, args)


@click.group(
    cls=_Commands,
    context_settings={"help_option_names": ["-h", "--help"]},
    epilog="Example: filmfit fit examples/first-run/run.toml",
)
@click.version_option(__version__, "--version", prog_name="filmfit")
def cli() -> None:
    """Thickness, gap, carriers and sheet resistance of a deposited film from its measured R and T, filed in the
    deposition records.
    """


for command in (new, fit, runs, rate, next_, trend, materials):
    cli.add_command(command)


def main(arguments: Sequence[str] | None = None) -> None:
    """Run the command line and leave with its exit status; every fault is a line on standard error."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")
    try:
        status = _run(arguments)
        sys.stdout.flush()
    except BrokenPipeError:
        _let_go_of_output()
        status = READER_GONE
    except OSError as error:
        status = WRONG_USE
        if error.filename is None:
            _let_go_of_output()
            tell(click.ClickException(f"standard output: cannot be written: {error.strerror}"))
        else:
            tell(click.ClickException(f"{error.filename}: cannot be used: {error.strerror}"))
    sys.exit(status)


def _run(arguments: Sequence[str] | None) -> int:
    """Run the command line and return its exit status.

    Raises:
        OSError: standard output cannot be written, or a file failed where nobody foresaw it.
    """
    from filmfit.errors import Faults, FilmfitError

    try:
        status = cli.main(args=arguments, prog_name="filmfit", standalone_mode=False)
    except (Faults, FilmfitError) as error:
        tell(error)
        return WRONG_USE
    except click.ClickException as error:
        tell(_one_line(error))
        return WRONG_USE
    except (KeyboardInterrupt, click.Abort):
        click.echo("filmfit: stopped by the keyboard; what was filed before is kept", err=True)
        return INTERRUPTED
    except SystemExit as error:  # so click ends when the reader of standard output has gone
        raise BrokenPipeError from error
    return status if isinstance(status, int) else 0


def _one_line(error: click.ClickException) -> click.ClickException:
    """Return a wrong use of the command line as one line that names the help to read."""
    context = error.ctx if isinstance(error, click.UsageError) else None
    where = context.command_path if context else "filmfit"
    said = " ".join(error.format_message().split()).rstrip(".")
    if isinstance(error, click.exceptions.NoArgsIsHelpError) and context and isinstance(context.command, click.Group):
        said = f"no command given; allowed: {', '.join(context.command.list_commands(context))}"
    return click.ClickException(f"{where}: {said}; see '{where} --help'")


def _let_go_of_output() -> None:
    """Point standard output at nothing, so that the interpreter's last flush does not fail again."""
    nothing = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nothing, sys.stdout.fileno())
    os.close(nothing)


if __name__ == "__main__":
    main()
