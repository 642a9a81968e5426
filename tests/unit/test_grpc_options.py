"""gRPC ignores options that it does not know; ours are known to it."""

from __future__ import annotations

from pathlib import Path

import pytest
from grpc._cython import cygrpc
from nearchord.session import channel
from nearchord_service.api import server

OPTIONS = {name for name, _ in (*server.OPTIONS, *channel.options())}


@pytest.fixture(scope="module")
def library() -> bytes:
    return Path(cygrpc.__file__).read_bytes()


@pytest.mark.parametrize("name", sorted(OPTIONS))
def test_option_stands_in_the_library(library: bytes, name: str) -> None:
    """Literally, as a string that ends there."""
    assert name.encode() + b"\0" in library
