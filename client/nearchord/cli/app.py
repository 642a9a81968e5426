"""The group of commands, and the one place where failures become messages and exit codes."""

from __future__ import annotations

import importlib.metadata
import io
import os
import sys
from collections.abc import Sequence

import click

import nearchord
from nearchord.cli.answer import answer
from nearchord.cli.batch import batch
from nearchord.cli.cancel import cancel
from nearchord.cli.check import check
from nearchord.cli.demo import demo
from nearchord.cli.exits import Exit, Interrupted, of_error
from nearchord.cli.jobs import jobs
from nearchord.cli.serve import serve
from nearchord.cli.solve import solve
from nearchord.cli.submit import submit
from nearchord.cli.watch import watch


def _version() -> str:
    try:
        return importlib.metadata.version("nearchord")
    except importlib.metadata.PackageNotFoundError:
        return "(not installed, run from its source)"


@click.group(context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(_version(), message="nearchord %(version)s")
def commands() -> None:
    """Exact answers about nearly chordal conflict graphs, from a service that works within budgets.

    Commands that need a service take it from --server or NEARCHORD_SERVER. Without one, `solve`, `batch` and `demo`
    start a private service for themselves; the others look for one at 127.0.0.1:7411. A service that asks for a token
    gets it from NEARCHORD_TOKEN, or from the file that NEARCHORD_TOKEN_FILE names; NEARCHORD_TLS encrypts the calls
    (`system`, or a PEM file of root certificates).

    Exit codes: 0 answered (PROVEN or BOUNDED), 1 another verdict or not confirmed, 2 usage or bad input, 3 cancelled,
    4 unreachable.
    """


for _command in (serve, demo, solve, submit, watch, answer, cancel, jobs, batch, check):
    commands.add_command(_command)


def run(arguments: Sequence[str]) -> int:
    """Run one command and return its exit code; every failure is one message on stderr."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")  # a terminal without a letter of some name is no failure
    try:
        code = commands.main(list(arguments), prog_name="nearchord", standalone_mode=False)
        sys.stdout.flush()
    except click.ClickException as error:
        return _usage_error(error)
    except nearchord.NearchordError as error:
        return _say(f"error: {error}", of_error(error))
    except Interrupted as interrupted:
        return _say(str(interrupted), Exit.CANCELLED)
    except (KeyboardInterrupt, click.Abort):
        return _say("interrupted; nothing was submitted", Exit.CANCELLED)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())  # the reader left: nothing more to say
        return Exit.OTHER
    except OSError as error:
        return _say(f"error: {error.filename or 'system'}: {error.strerror or error}", Exit.USAGE)
    except Exception as defect:
        if os.environ.get("NEARCHORD_TRACEBACK"):
            raise
        what = f"{type(defect).__name__}: {defect}".rstrip(": ")
        return _say(
            f"error: a defect in nearchord ({what}); NEARCHORD_TRACEBACK=1 shows where, to report it", Exit.OTHER
        )
    return int(code or 0)


def _usage_error(error: click.ClickException) -> int:
    context = error.ctx if isinstance(error, click.UsageError) else None
    if isinstance(error, click.exceptions.NoArgsIsHelpError):
        return _say(error.format_message(), Exit.USAGE)
    hint = f" (see {context.command_path} --help)" if context is not None else ""
    return _say(f"error: {error.format_message().rstrip('.')}{hint}", Exit.USAGE)


def _say(message: str, code: Exit) -> int:
    sys.stderr.write(message + "\n")
    return code
