"""The options of a server: command line first, environment (`NEARCHORD_...`) second, defaults last.

Every option `--some-name` can also be given as the variable `NEARCHORD_SOME_NAME`. A wrong value ends the process with
exit code 2 and a message that names the option.
"""

from __future__ import annotations

import argparse
import os
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, fields
from pathlib import Path
from typing import Any, NoReturn

from nearchord_service.settings.reading import (
    address,
    address_or_none,
    count,
    level,
    optional,
    positive,
    size,
    span,
    switch,
)
from nearchord_service.settings.values import Settings

ENVIRONMENT_PREFIX = "NEARCHORD_"


@dataclass(frozen=True)
class _Option:
    """How one field of Settings is given."""

    read: Callable[[str], Any]
    shown: str
    help: str


_OPTIONS: dict[str, _Option] = {
    "data": _Option(Path, "DIR", "folder of the database and of stored content; belongs to one server"),
    "listen": _Option(address, "HOST:PORT", "where calls are accepted; port 0 takes a free one"),
    "metrics": _Option(address_or_none, "HOST:PORT|none", "where Prometheus may scrape /metrics"),
    "workers": _Option(positive(count), "N", "worker processes; default: processors this process may use"),
    "allow_plaintext": _Option(switch, "yes|no", "accept calls without encryption from other machines"),
    "exit_on_stdin_close": _Option(switch, "yes|no", "shut down when standard input closes"),
    "reflection": _Option(switch, "yes|no", "describe the services to clients that ask"),
    "grace": _Option(span, "TIME", "how long calls and workers may take to end at shutdown"),
    "log_level": _Option(level, "LEVEL", "DEBUG, INFO, WARNING or ERROR; logs go to standard error"),
    "default_fill": _Option(optional(count), "N|none", "fill edges of a job that names no budget"),
    "default_states": _Option(positive(count), "N", "states of a job that names no budget"),
    "default_seconds": _Option(positive(span), "TIME", "running time of a job that names no budget"),
    "default_memory": _Option(positive(size), "BYTES", "memory of a job that names no budget"),
    "largest_fill": _Option(optional(count), "N|none", "most fill edges a job may ask for"),
    "largest_states": _Option(optional(positive(count)), "N|none", "most states a job may ask for"),
    "largest_seconds": _Option(optional(positive(span)), "TIME|none", "most running time a job may ask for"),
    "largest_memory": _Option(
        optional(positive(size)), "BYTES|none", "most memory a job may ask for; default: that of the machine"
    ),
    "inline_bytes": _Option(size, "BYTES", "content that may travel inside a submit, at most 3 MiB"),
    "content_bytes": _Option(positive(size), "BYTES", "largest graph, weight vector or list of names"),
    "stored_bytes": _Option(positive(size), "BYTES", "content that one caller may have stored"),
    "batch_jobs": _Option(positive(count), "N", "jobs in a batch"),
    "batch_bytes": _Option(positive(size), "BYTES", "content that may travel inside one batch"),
    "unfinished_jobs": _Option(positive(count), "N", "unfinished jobs of one caller"),
    "pins": _Option(count, "N", "pinned vertices of one job"),
    "answer_age": _Option(optional(span), "TIME|none", "how long jobs that have ended are kept"),
    "answer_bytes": _Option(optional(size), "BYTES|none", "bytes of answers that are kept"),
    "event_age": _Option(optional(span), "TIME|none", "how long events of jobs that have ended are kept"),
    "content_age": _Option(optional(span), "TIME|none", "how long content that no job needs is kept"),
    "retained_content_bytes": _Option(optional(size), "BYTES|none", "bytes of content that are kept"),
    "upload_age": _Option(span, "TIME", "how long an upload may lie before it is continued"),
    "kept_bytes": _Option(size, "BYTES", "disk for triangulations kept to speed up later jobs on a graph; 0: none"),
}

_MOST_INLINE = 3 * 2**20
"""Inline content has to fit a message of 4 MiB together with its pins."""


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="python -m nearchord_service",
        description="Starts the nearchord service. Each option can also be given as a variable NEARCHORD_...",
        allow_abbrev=False,
    )
    defaults = {field.name: field.default for field in fields(Settings)}
    for name, option in _OPTIONS.items():
        flag = "--" + name.replace("_", "-")
        text = option.help.replace("%", "%%")
        if "default:" not in text and name != "data":
            text += f"; default: {_shown(defaults[name])}"
        if option.read is switch:
            parser.add_argument(
                flag, type=switch, nargs="?", const=True, default=argparse.SUPPRESS, metavar=option.shown, help=text
            )
        else:
            parser.add_argument(flag, type=option.read, default=argparse.SUPPRESS, metavar=option.shown, help=text)
    return parser


def _shown(value: object) -> str:
    if value is None:
        return "none"
    if isinstance(value, bool):
        return "yes" if value else "no"
    return str(value)


def _from_environment(environment: Mapping[str, str], parser: argparse.ArgumentParser) -> dict[str, Any]:
    values = {}
    for name, option in _OPTIONS.items():
        variable = ENVIRONMENT_PREFIX + name.upper()
        text = environment.get(variable)
        if text is None:
            continue
        try:
            values[name] = option.read(text)
        except argparse.ArgumentTypeError as error:
            parser.error(f"variable {variable} (option --{name.replace('_', '-')}): {error}")
    return values


def _machine_memory() -> int:
    return os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES")


def _processors() -> int:
    return len(os.sched_getaffinity(0))


def read_settings(arguments: Sequence[str], environment: Mapping[str, str]) -> Settings:
    """Return the settings; prints a message and raises SystemExit(2) when one is wrong."""
    parser = _parser()
    values: dict[str, Any] = {"workers": _processors(), "largest_memory": _machine_memory()}
    values |= _from_environment(environment, parser)
    values |= vars(parser.parse_args(arguments))
    if "data" not in values:
        parser.error("option --data is missing: name the folder of this server's data")
    settings = Settings(**values)
    _check(settings, parser.error)
    return settings


def _check(settings: Settings, error: Callable[[str], NoReturn]) -> None:
    if not settings.listen.loopback and not settings.allow_plaintext:
        error(
            f"option --listen: {settings.listen} can be reached from other machines and calls are not encrypted; "
            "listen on 127.0.0.1, or accept the risk with --allow-plaintext"
        )
    if settings.inline_bytes > _MOST_INLINE:
        error(f"option --inline-bytes: {settings.inline_bytes} is above {_MOST_INLINE}; larger content is uploaded")
    for name in ("fill", "states", "seconds", "memory"):
        default, largest = getattr(settings, f"default_{name}"), getattr(settings, f"largest_{name}")
        if largest is not None and (default is None or default > largest):
            error(
                f"option --default-{name}: {_shown(default)} is above --largest-{name} {largest}; lower it, "
                "or raise the largest"
            )
