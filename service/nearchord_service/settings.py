"""Settings of one server: command line first, environment (`NEARCHORD_...`) second, defaults last.

Every option `--some-name` can also be given as the variable `NEARCHORD_SOME_NAME`. A wrong value ends the process with
exit code 2 and a message that names the option.
"""

from __future__ import annotations

import argparse
import ipaddress
import math
import os
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, fields
from pathlib import Path
from typing import Any, NoReturn

from nearchord_service.model.question import Budget
from nearchord_service.store.port import Limits, Retention

ENVIRONMENT_PREFIX = "NEARCHORD_"
_SIZES = {"": 1, "KiB": 2**10, "MiB": 2**20, "GiB": 2**30, "TiB": 2**40}
_SPANS = {"": 1, "s": 1, "m": 60, "h": 3_600, "d": 86_400}
_LEVELS = ("DEBUG", "INFO", "WARNING", "ERROR")


@dataclass(frozen=True)
class Address:
    """A TCP address to listen on; port 0 takes a free one."""

    host: str
    port: int

    @property
    def loopback(self) -> bool:
        """Only this machine can reach it."""
        if self.host == "localhost":
            return True
        try:
            return ipaddress.ip_address(self.host).is_loopback
        except ValueError:
            return False

    def __str__(self) -> str:
        return f"[{self.host}]:{self.port}" if ":" in self.host else f"{self.host}:{self.port}"


@dataclass(frozen=True)
class Settings:
    """What a server was told. Sizes in bytes, times in seconds; None in a `largest_...` or a retention is no limit."""

    data: Path
    listen: Address = Address("127.0.0.1", 7411)
    metrics: Address | None = Address("127.0.0.1", 7412)
    workers: int = 1
    allow_plaintext: bool = False
    exit_on_stdin_close: bool = False
    reflection: bool = True
    grace: float = 10.0
    log_level: str = "INFO"
    default_fill: int | None = None
    default_states: int = 10**7
    default_seconds: float = 60.0
    default_memory: int = 2**30
    largest_fill: int | None = None
    largest_states: int | None = 10**9
    largest_seconds: float | None = 3_600.0
    largest_memory: int | None = None
    inline_bytes: int = 2**20
    content_bytes: int = 2**31
    stored_bytes: int = 2**36
    batch_jobs: int = 100_000
    batch_bytes: int = 2**28
    unfinished_jobs: int = 200_000
    pins: int = 250_000
    answer_age: float | None = 30 * 86_400.0
    answer_bytes: int | None = 2**36
    event_age: float | None = 30 * 86_400.0
    content_age: float | None = 90 * 86_400.0
    retained_content_bytes: int | None = None
    upload_age: float = 86_400.0

    @property
    def default_budget(self) -> Budget:
        """The budget of a job that names none."""
        return Budget(self.default_fill, self.default_states, self.default_seconds, self.default_memory)

    @property
    def limits(self) -> Limits:
        """Quotas of one owner."""
        return Limits(self.unfinished_jobs, self.stored_bytes)

    @property
    def retention(self) -> Retention:
        """How long ended things are kept."""
        return Retention(
            answer_age=self.answer_age,
            answer_bytes=self.answer_bytes,
            event_age=self.event_age,
            content_age=self.content_age,
            content_bytes=self.retained_content_bytes,
            upload_age=self.upload_age,
        )


def address(text: str) -> Address:
    """Read HOST:PORT, with brackets around an IPv6 host."""
    host, colon, port = text.rpartition(":")
    host = host.removeprefix("[").removesuffix("]")
    if not colon or not host or not port.isascii() or not port.isdigit() or int(port) > 65_535:
        raise argparse.ArgumentTypeError(f"{text!r} is not HOST:PORT with a port from 0 to 65535")
    return Address(host, int(port))


def address_or_none(text: str) -> Address | None:
    """Read HOST:PORT, or `none`."""
    return None if text == "none" else address(text)


def _scaled(text: str, units: Mapping[str, int], what: str) -> float:
    number = text.rstrip("".join(units))
    try:
        value = float(number) * units[text[len(number) :]]
    except (ValueError, KeyError):
        raise argparse.ArgumentTypeError(f"{text!r} is not {what}") from None
    if not math.isfinite(value) or value < 0:
        raise argparse.ArgumentTypeError(f"{text!r} is not {what}")
    return value


def size(text: str) -> int:
    """Read bytes: 1048576 or 1MiB."""
    return int(_scaled(text, _SIZES, "a number of bytes such as 1048576, 64MiB or 2GiB"))


def span(text: str) -> float:
    """Read seconds: 90, 90s, 15m, 12h or 30d."""
    return _scaled(text, _SPANS, "a number of seconds such as 90, 15m, 12h or 30d")


def count(text: str) -> int:
    """Read a whole number that is at least 0."""
    if not text.isascii() or not text.isdigit():
        raise argparse.ArgumentTypeError(f"{text!r} is not a whole number that is at least 0")
    return int(text)


def positive(read: Callable[[str], Any]) -> Callable[[str], Any]:
    """Refuse 0."""

    def checked(text: str) -> Any:
        value = read(text)
        if value <= 0:
            raise argparse.ArgumentTypeError(f"{text!r} is not above 0")
        return value

    return checked


def optional(read: Callable[[str], Any]) -> Callable[[str], Any]:
    """Accept `none` too."""
    return lambda text: None if text == "none" else read(text)


def switch(text: str) -> bool:
    """Read yes or no."""
    if text not in ("yes", "no"):
        raise argparse.ArgumentTypeError(f"{text!r} is neither yes nor no")
    return text == "yes"


def level(text: str) -> str:
    """Read a log level."""
    if text.upper() not in _LEVELS:
        raise argparse.ArgumentTypeError(f"{text!r} is none of {', '.join(_LEVELS)}")
    return text.upper()


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
