"""The command line: one file per command, each thin.

This module is what starts, so it imports nothing but click; a command's module is imported when the command is used.
"""

from __future__ import annotations

import os
import sys
from importlib import import_module
from typing import Any, NoReturn

# One thread for the linear algebra of small arrays: faster, and the same last digits on every machine of a kind.
for _variable in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(_variable, "1")
# Charts are drawn into files; what the user shows figures with elsewhere does not matter here.
os.environ["MPLBACKEND"] = "agg"

import click  # noqa: E402 - the environment has to be set first

from mixind.errors import MixindError, NoAnswer  # noqa: E402
from mixind.version import VERSION  # noqa: E402

COMMANDS = {
    "formulate": ("formulate", "Find the blend that tells pH steps apart best."),
    "predict": ("predict", "Show the colours of a blend over pH."),
    "chart": ("chart", "Draw the chart of a blend to hang at the bench."),
    "dye": ("dye", "List, show and check dyes."),
}


class LazyGroup(click.Group):
    """A group whose commands are imported when they are used; faults of ours end as one line."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = import_module(f"mixind.cli.{COMMANDS[cmd_name][0]}").command
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        with formatter.section("Commands"):
            formatter.write_dl([(name, summary) for name, (_, summary) in COMMANDS.items()])

    def invoke(self, ctx: click.Context) -> Any:
        """Run a command; when nobody reads its output on, stop quietly."""
        try:
            result = super().invoke(ctx)
            if sys.stdout is not None:
                sys.stdout.flush()
            return result
        except BrokenPipeError:
            # keep the interpreter from flushing into the closed pipe once more
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
            return 0

    def main(self, *args: Any, **kwargs: Any) -> NoReturn:
        """Run and exit: 0 done, 1 no answer, 2 bad input or wrong use, 130 interrupted; a closed pipe ends quietly."""
        kwargs["standalone_mode"] = False
        try:
            result = super().main(*args, **kwargs)
            sys.exit(result if isinstance(result, int) else 0)
        except SystemExit as leaving:
            # click answers a closed pipe with 1, having wrapped stdout so that nothing more is flushed into it
            closed = type(sys.stdout).__name__.endswith("PacifyFlushWrapper")
            sys.exit(0 if closed else leaving.code)
        except OSError as error:
            where = error.filename or "the output cannot be written"
            _complain(f"{where}: {error.strerror}.", 2)
        except MixindError as error:
            _complain(str(error), 1 if isinstance(error, NoAnswer) else 2)
        except click.ClickException as error:
            if type(error).__name__ == "NoArgsIsHelpError":  # of newer versions of click; its message is the help
                click.echo(error.format_message(), err=True)
                sys.exit(2)
            path = error.ctx.command_path if isinstance(error, click.UsageError) and error.ctx else "mixind"
            _complain(f"{path}: {error.format_message()}", 2)
        except (click.Abort, KeyboardInterrupt):
            _complain("interrupted.", 130)


def _complain(message: str, status: int) -> NoReturn:
    click.echo(" ".join(message.split()), err=True)
    sys.exit(status)


@click.group(cls=LazyGroup, no_args_is_help=True, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(VERSION, message="mixind %(version)s")
def main() -> None:
    """Formulate pH indicators by computation: which dyes, how much, and what colour at each pH.

    Example: mixind formulate --from 4 --to 10 --save my.toml --chart my.pdf
    """
