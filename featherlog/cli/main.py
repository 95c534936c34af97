"""The program's entry: every command in its place, every failure in one sentence."""

from __future__ import annotations

import gc
import os
import sys
from functools import cache
from importlib import import_module
from typing import Annotated

import typer

from featherlog import __version__
from featherlog.cli.output import remark, show, write_any_terminal
from featherlog.errors import FeatherlogError, InputError

# So much of a word is repeated in a message.
_SHOWN = 60
_GARBAGE = 100_000
_CONSOLE = ("console",)
_EVERYTHING = (
    *_CONSOLE,
    "life",
    "observe",
    "physicist",
    "chart_round",
    "record_keeping",
    "department",
    "setup",
)
CONSOLE_WORDS = ("today", "sheet", "confirm", "record", "departures", "explain")
"""The commands of the console, which wait for no other command to be built."""


@cache
def program(*modules: str) -> typer.Typer:
    """Return the program with the commands of these modules of this room."""
    built = typer.Typer(
        name="featherlog",
        help="Where the junction of matched fields is today, why, and what it has added up to.",
        # Rich mark-up in help texts costs a third of the start-up time.
        rich_markup_mode=None,
        pretty_exceptions_enable=False,
        context_settings={"help_option_names": ["-h", "--help"]},
        epilog="Example: featherlog demo",
    )
    built.callback(invoke_without_command=True)(main)
    for name in modules:
        import_module(f"featherlog.cli.{name}").register(built)
    return built


def __getattr__(name: str) -> typer.Typer:
    if name == "app":
        return program(*_EVERYTHING)
    raise AttributeError(name)


def _called() -> typer.Typer:
    """Return as much of the program as this call needs."""
    words = [word for word in sys.argv[1:] if not word.startswith("-")]
    at_the_console = words[:1] and words[0] in CONSOLE_WORDS
    return program(*(_CONSOLE if at_the_console else _EVERYTHING))


def main(
    context: typer.Context,
    version: Annotated[bool, typer.Option("--version", help="Print the version.")] = False,
    debug: Annotated[
        bool, typer.Option("--debug", help="On a failure of the program, print its traceback.")
    ] = False,
) -> None:
    """Where the junction of matched fields is today, why, and what it has added up to."""
    if debug:
        os.environ["FEATHERLOG_DEBUG"] = "1"
    if version:
        show(f"featherlog {__version__}")
        raise typer.Exit
    if context.invoked_subcommand is None:
        show(context.get_help())


def _check_words() -> None:
    # Bytes of the shell that are no text could be stored nowhere, and break whoever looks for them.
    for word in sys.argv[1:]:
        try:
            word.encode()
        except UnicodeEncodeError:
            shown = ascii(word[:_SHOWN])
            raise InputError(f"{shown} is not text in UTF-8; write it in UTF-8") from None


def run() -> None:
    """Run the command line; failures become one sentence and an exit code."""
    # Looking for garbage among what the imports keep costs a tenth of the start-up.
    gc.set_threshold(_GARBAGE)
    write_any_terminal()
    try:
        _check_words()
        _called()(prog_name="featherlog")
    except FeatherlogError as error:
        remark("\n".join(f"featherlog: {line}" for line in str(error).splitlines()))
        sys.exit(error.exit_code)
    except Exception as error:
        if os.environ.get("FEATHERLOG_DEBUG"):
            raise
        remark(f"featherlog: {_failure(error)}")
        sys.exit(FeatherlogError.exit_code)


def _failure(error: Exception) -> str:
    if isinstance(error, OSError) and error.filename is not None:
        return f"{str(error.filename)[:_SHOWN]!r} cannot be used: {error.strerror}"
    return (
        f"the program failed ({type(error).__name__}); `featherlog database status` shows whether "
        "anything was written, `featherlog --debug ...` the details."
    )
