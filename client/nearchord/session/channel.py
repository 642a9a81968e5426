"""Channels: where to connect, under which options and credentials."""

from __future__ import annotations

from importlib.resources import files
from os import PathLike
from pathlib import Path
from urllib.parse import urlsplit

import grpc

from nearchord.errors import BadInput

TLS = bool | str | PathLike[str] | grpc.ChannelCredentials | None
MESSAGE_BYTES = 4 << 20
KEEPALIVE_MS = 60_000


def options() -> list[tuple[str, str | int]]:
    """Channel options: the retry policy of the contract, keepalive, message limit, quick reconnection."""
    return [
        ("grpc.service_config", files("nearchord.v1").joinpath("service_config.json").read_text(encoding="utf-8")),
        ("grpc.enable_retries", 1),
        ("grpc.keepalive_time_ms", KEEPALIVE_MS),
        ("grpc.keepalive_timeout_ms", 20_000),
        ("grpc.max_receive_message_length", MESSAGE_BYTES),
        ("grpc.max_send_message_length", MESSAGE_BYTES),
        ("grpc.initial_reconnect_backoff_ms", 100),
        ("grpc.min_reconnect_backoff_ms", 1_000),
        ("grpc.max_reconnect_backoff_ms", 2_000),
    ]


def checked_target(target: str) -> str:
    """`target`, when it can be one: host:port, or any gRPC target."""
    if not isinstance(target, str) or not target.strip() or ("://" in target and target.startswith("http")):
        raise BadInput(f"{target!r} is no address of a service", "give host:port, such as 127.0.0.1:7411")
    return target.strip()


def credentials(tls: TLS) -> grpc.ChannelCredentials | None:
    """Channel credentials; None for a channel in the clear. A path names a PEM file of root certificates."""
    if tls is None or tls is False:
        return None
    if tls is True:
        return grpc.ssl_channel_credentials()
    if isinstance(tls, grpc.ChannelCredentials):
        return tls
    try:
        return grpc.ssl_channel_credentials(Path(tls).read_bytes())
    except OSError as failed:
        raise BadInput(
            f"the root certificates in {tls} cannot be read ({failed.strerror})", "name a readable PEM file"
        ) from None


def call_metadata(target: str, token: str | None, tls: TLS) -> tuple[tuple[str, str], ...]:
    """Metadata of every call. A token travels only over TLS or loopback, where nobody can read it on the way."""
    if token is None:
        return ()
    if not token or not token.isascii() or not token.isprintable() or " " in token:
        raise BadInput("the token has blanks, control characters or nothing in it", "give the token as it was issued")
    if credentials(tls) is None and not is_loopback(target):
        raise BadInput(
            f"a token would travel to {target} in the clear", "connect with tls=True, or leave the token out"
        )
    return (("authorization", f"Bearer {token}"),)


def is_loopback(target: str) -> bool:
    """Whether a target never leaves this machine."""
    if target.startswith("unix"):
        return True
    address = target.rsplit("/", 1)[-1].removeprefix("ipv4:").removeprefix("ipv6:").removeprefix("dns:")
    try:
        host = urlsplit(f"//{address}").hostname or ""
    except ValueError:
        return False
    return host in ("localhost", "::1") or _is_ipv4_loopback(host)


def _is_ipv4_loopback(host: str) -> bool:
    octets = host.split(".")
    return len(octets) == 4 and octets[0] == "127" and all(octet.isdigit() for octet in octets)
