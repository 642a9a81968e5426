"""`nearchord serve`: the service itself, in place of this command."""

from __future__ import annotations

import importlib.util
import os
import sys

import click

from nearchord.cli.exits import usage


@click.command(short_help="Run the service.", context_settings={"ignore_unknown_options": True})
@click.option(
    "--data",
    required=True,
    envvar="NEARCHORD_DATA",
    metavar="DIR",
    help="Folder that holds everything the service keeps.",
)
@click.option("--listen", metavar="HOST:PORT", help="Where to take calls.  [default: 127.0.0.1:7411]")
@click.option("--metrics", metavar="HOST:PORT", help="Where /metrics is, or none.  [default: 127.0.0.1:7412]")
@click.option("--workers", metavar="N", help="Jobs solved at the same time.  [default: one a core]")
@click.argument("more", nargs=-1, type=click.UNPROCESSED, metavar="[MORE OPTIONS]")
def serve(data: str, listen: str | None, metrics: str | None, workers: str | None, more: tuple[str, ...]) -> int:
    """Run the service until it is told to stop (SIGTERM or Ctrl-C; it drains first).

    Prints one line when it accepts calls; its log goes to stderr. One service at a time owns a data folder. MORE
    OPTIONS are handed on: `python -m nearchord_service --help` lists them all.
    """
    if importlib.util.find_spec("nearchord_service") is None or importlib.util.find_spec("numba") is None:
        raise usage("the service is not installed here", "install it: pip install 'nearchord[service]'")
    command = [sys.executable, "-m", "nearchord_service", "--data", data]
    for option, value in (("--listen", listen), ("--metrics", metrics), ("--workers", workers)):
        command += [] if value is None else [option, value]
    sys.stdout.flush()
    os.execv(command[0], [*command, *more])
