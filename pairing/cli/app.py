"""The program `pairing`: its commands, and the one place that turns errors into messages."""

from __future__ import annotations

import errno
import functools
import io
import os
import shlex
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Annotated

import typer

from pairing import __version__
from pairing.cli.animals import animals
from pairing.cli.audit import audit
from pairing.cli.check import check
from pairing.cli.describe import describe
from pairing.cli.kinship import kinship
from pairing.cli.options import with_shared_options
from pairing.cli.propose import propose
from pairing.cli.start import start
from pairing.errors import OptionError, PairingError, RecordsError
from pairing.spelling import did_you_mean, nearest_names, visible

INTERRUPTED = 130
"""Exit status after Ctrl-C, as shells have it."""

COMMANDS: dict[str, Callable[..., None]] = {
    "propose": propose,
    "check": check,
    "audit": audit,
    "describe": describe,
    "animals": animals,
    "kinship": kinship,
    "start": start,
}
"""Every command by name, in the order of the help page."""


def _stoppable(command: Callable[..., None]) -> Callable[..., None]:
    """The command, ending with one sentence and its own exit status on Ctrl-C."""

    @functools.wraps(command)
    def stoppable(*words: object, **options: object) -> None:
        try:
            command(*words, **options)
        except KeyboardInterrupt:
            typer.echo("Stopped before the end; nothing was written.", err=True)
            raise typer.Exit(INTERRUPTED) from None
        except OSError as error:
            if error.errno == errno.EPIPE:
                raise
            sys.stdout = open(os.devnull, "w")  # noqa: SIM115 - what is left cannot be written
            raise OptionError(
                f"The answer could not be written ({error.strerror or error}).",
                remedy="Make room, or write it elsewhere with --out.",
            ) from None

    return stoppable


LATER_COMMANDS = ("mates", "carriers", "depression", "forecast", "draw", "report")
"""Commands that are planned and not there yet."""

app = typer.Typer(
    name="pairing",
    help="Who should breed with whom next season in a managed population, and why.",
    epilog="Every command explains itself: pairing propose --help",
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
    add_completion=False,
    no_args_is_help=False,
    context_settings={"help_option_names": ["--help", "-h"]},
)
for _name, _command in COMMANDS.items():
    app.command(_name)(_stoppable(with_shared_options(_command)))


def _print_version(wanted: bool) -> None:
    if wanted:
        typer.echo(f"pairing {__version__}")
        raise typer.Exit


@app.callback()
def _pairing(
    version: Annotated[
        bool,
        typer.Option(
            "--version", callback=_print_version, is_eager=True, help="Print the version and stop."
        ),
    ] = False,
) -> None:
    """Who should breed with whom next season in a managed population, and why."""


def main() -> None:
    """Run the program on the words of the command line, and exit with its status."""
    _speak_utf8()
    arguments = sys.argv[1:]
    if not arguments or _only_a_file(arguments):
        typer.echo(_three_lines(arguments[0] if arguments else "RECORDS.csv"))
        return
    status = 0
    try:
        _check_command(arguments)
        app()
    except PairingError as error:
        _explain(error)
        status = error.exit_status
    sys.exit(status)


def _speak_utf8() -> None:
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(encoding="utf-8", errors="replace")


def _only_a_file(arguments: list[str]) -> bool:
    return (
        len(arguments) == 1
        and arguments[0] not in COMMANDS
        and not arguments[0].startswith("-")
        and Path(arguments[0]).is_file()
    )


def _three_lines(records: str) -> str:
    shown = f'"{records}"' if os.name == "nt" and " " in records else records
    if os.name != "nt":
        shown = shlex.quote(records)
    return "\n".join(
        (
            f"pairing audit {shown}",
            f"pairing start {shown} --out rules.toml",
            f"pairing propose {shown} --policy rules.toml",
        )
    )


def _check_command(arguments: list[str]) -> None:
    """Name the nearest command when the first word is none."""
    first = arguments[0]
    if first.startswith("-") or first in COMMANDS:
        return
    if len(arguments) == 1 and ("." in first or "/" in first or os.sep in first):
        near = nearest_names(first, os.listdir()) if "/" not in first else []
        raise RecordsError(
            f"{first}: there is no such file.",
            remedy=f"Did you mean {near[0]}?" if near else "Check the path and the spelling.",
        )
    if first in LATER_COMMANDS:
        raise PairingError(
            f"`pairing {first}` is not in this version.", remedy=f"Known: {', '.join(COMMANDS)}."
        )
    hint = did_you_mean(first, COMMANDS) or f"Known: {', '.join(COMMANDS)}."
    raise PairingError(f'There is no command "{first}".', remedy=hint)


def _explain(error: PairingError) -> None:
    """An error in plain lines on standard error: what, where, what to do."""
    for line in (error.headline, *error.details, error.remedy):
        if line:
            typer.echo(visible(line), err=True)
