"""Messages between the server, the nursery and the workers, over Unix packet sockets.

A message is one packet. What does not fit into a small packet travels as a memory file whose descriptor is
sent instead, so that neither side ever blocks halfway through a message: a worker that is stopped or dies in the middle
of a large one cannot hold up the server.
"""

from __future__ import annotations

import os
import pickle
import socket
from collections.abc import Sequence

PACKET_BYTES = 64 * 1024
_INLINE = b"i"
_FILE = b"f"


def pair() -> tuple[socket.socket, socket.socket]:
    """Return two connected ends; the first does not block (the server's), the second does."""
    ours, theirs = socket.socketpair(socket.AF_UNIX, socket.SOCK_SEQPACKET)
    ours.setblocking(False)
    return ours, theirs


def send(sock: socket.socket, message: object, fds: Sequence[int] = ()) -> None:
    """Send a message; `fds` travel only with small messages. Raises OSError when the other end is gone."""
    data = pickle.dumps(message, protocol=pickle.HIGHEST_PROTOCOL)
    if len(data) < PACKET_BYTES:
        _send_packet(sock, [_INLINE, data], fds)
        return
    file = os.memfd_create("nearchord-message")
    try:
        _write_all(file, data)
        _send_packet(sock, [_FILE], [file])
    finally:
        os.close(file)


def receive(sock: socket.socket) -> tuple[object, list[int]]:
    """Return the next message and the descriptors that came with it.

    Raises EOFError when the other end is gone and BlockingIOError when a socket that does not block has nothing.
    Messages come from processes of this server only, which is why unpickling them is safe.
    """
    data, fds, _, _ = socket.recv_fds(sock, PACKET_BYTES, 4)
    if not data:
        raise EOFError
    if data[:1] == _INLINE:
        return pickle.loads(memoryview(data)[1:]), fds
    (file,) = fds
    try:
        return pickle.loads(_read_all(file)), []
    finally:
        os.close(file)


def _send_packet(sock: socket.socket, parts: list[bytes], fds: Sequence[int]) -> None:
    if fds:
        socket.send_fds(sock, parts, list(fds))
    else:
        sock.sendmsg(parts)


def _write_all(file: int, data: bytes) -> None:
    left = memoryview(data)
    while left:
        left = left[os.write(file, left) :]


def _read_all(file: int) -> bytearray:
    data = bytearray(os.fstat(file).st_size)
    view, at = memoryview(data), 0
    while at < len(data):
        got = os.preadv(file, [view[at:]], at)
        if not got:
            raise EOFError
        at += got
    return data
