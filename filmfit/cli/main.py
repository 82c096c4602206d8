"""The command line: the group, what all commands share, and how a fault is told.

Knows words and exit status; every command's work is imported inside its body, so that --help is instant.
"""

import sys
from collections.abc import Sequence

import click

from filmfit import __version__
from filmfit.cli.fit import fit
from filmfit.cli.materials import materials
from filmfit.cli.new import new
from filmfit.cli.runs import runs

WRONG_USE = 2
INTERRUPTED = 130


@click.group(
    context_settings={"help_option_names": ["-h", "--help"]},
    epilog="Example: filmfit fit examples/first-run/run.toml",
)
@click.version_option(__version__, "--version", prog_name="filmfit")
def cli() -> None:
    """Thickness, gap, carriers and sheet resistance of a deposited film from its measured R and T, filed in the
    deposition records.
    """


for command in (new, fit, runs, materials):
    cli.add_command(command)


def main(arguments: Sequence[str] | None = None) -> None:
    """Run the command line and leave with its exit status; every fault is a line on standard error."""
    from filmfit.errors import Faults, FilmfitError

    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")
    try:
        status = cli.main(args=arguments, prog_name="filmfit", standalone_mode=False)
    except (Faults, FilmfitError) as error:
        click.echo(str(error), err=True)
        status = WRONG_USE
    except click.ClickException as error:
        where = error.ctx.command_path if isinstance(error, click.UsageError) and error.ctx else "filmfit"
        click.echo(f"{where}: {' '.join(error.format_message().split())}; see '{where} --help'", err=True)
        status = WRONG_USE
    except (KeyboardInterrupt, click.Abort):
        click.echo("filmfit: stopped by the keyboard; what was filed before is kept", err=True)
        status = INTERRUPTED
    except BrokenPipeError:
        sys.stderr.close()
        status = 0
    sys.exit(status if isinstance(status, int) else 0)


if __name__ == "__main__":
    main()
