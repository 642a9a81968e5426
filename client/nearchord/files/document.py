"""A file as checked bytes: found, unpacked, within the size cap, UTF-8."""

from __future__ import annotations

import gzip
import io
import os
import zlib
from dataclasses import dataclass
from os import PathLike
from typing import IO, Any

from nearchord.errors import BadInput, FileProblem

Source = str | PathLike[str] | IO[bytes]
LIMIT_BYTES = 2 << 30
CHUNK = 4 << 20
GZIP_MAGIC = b"\x1f\x8b"
UTF8_MARK = b"\xef\xbb\xbf"


@dataclass(frozen=True)
class Document:
    """The name of a file, for messages and for guessing its format, and its bytes: UTF-8 without a byte order mark."""

    name: str
    data: bytes

    def problem(self, line: int | None, problem: str, remedy: str) -> FileProblem:
        """What is wrong in this file."""
        return FileProblem(self.name, line, problem, remedy)


def load(source: Source, limit_bytes: int = LIMIT_BYTES) -> Document:
    """Reads a path or an open binary file, gzipped or not; FileProblem when that cannot be done.

    `limit_bytes` caps the unpacked bytes, so that a small gzip file cannot fill the memory.
    """
    if hasattr(source, "read"):
        name = str(getattr(source, "name", "<stream>"))
        return _checked(name, _read(name, source, limit_bytes))
    name = os.fspath(source)
    try:
        with open(name, "rb") as file:
            return _checked(name, _read(name, file, limit_bytes))
    except FileNotFoundError:
        raise FileProblem(name, None, "there is no such file", "check the path") from None
    except IsADirectoryError:
        raise FileProblem(name, None, "this is a folder", "name a file in it") from None
    except OSError as failed:
        raise FileProblem(
            name, None, f"it cannot be read ({failed.strerror})", "check the path and its rights"
        ) from None


def _read(name: str, file: Any, limit_bytes: int) -> bytes:
    start = file.read(len(GZIP_MAGIC))
    if isinstance(start, str):
        raise BadInput(f"{name} is open as text", 'open it in binary mode: open(path, "rb")')
    joined = _Joined(start, file)
    if start != GZIP_MAGIC:
        return _all(name, joined, limit_bytes)
    try:
        return _all(name, gzip.GzipFile(fileobj=io.BufferedReader(joined)), limit_bytes)
    except (EOFError, gzip.BadGzipFile, zlib.error) as broken:
        raise FileProblem(name, None, f"the gzip data is broken ({broken})", "copy or pack the file again") from None


def _all(name: str, file: Any, limit_bytes: int) -> bytes:
    """Everything in `file`, read in chunks so that the cap is noticed before memory is short."""
    chunks: list[bytes] = []
    size = 0
    while chunk := file.read(CHUNK):
        size += len(chunk)
        if size > limit_bytes:
            raise FileProblem(
                name,
                None,
                f"it has more than {limit_bytes} bytes unpacked",
                "raise limit_bytes if it is really that large, or build the graph with Graph.from_arrays",
            )
        chunks.append(chunk)
    return chunks[0] if len(chunks) == 1 else b"".join(chunks)


class _Joined(io.RawIOBase):
    """Bytes read already, then the rest of a file that need not be seekable."""

    def __init__(self, start: bytes, rest: Any) -> None:
        super().__init__()
        self._start, self._rest = start, rest

    def readable(self) -> bool:
        return True

    def read(self, size: int = -1) -> bytes:
        if self._start:
            start, self._start = self._start, b""
            return start
        data: bytes = self._rest.read(size)
        return data

    def readinto(self, buffer: Any) -> int:
        view = memoryview(buffer)
        if self._start:
            taken, self._start = self._start[: len(view)], self._start[len(view) :]
        else:
            taken = self._rest.read(len(view))
        view[: len(taken)] = taken
        return len(taken)


def _checked(name: str, data: bytes) -> Document:
    data = data.removeprefix(UTF8_MARK)
    if not data.isascii():
        try:
            data.decode()
        except UnicodeDecodeError as broken:
            line = data.count(b"\n", 0, broken.start) + 1
            raise FileProblem(
                name,
                line,
                f"byte 0x{data[broken.start]:02x} at position {broken.start} is not UTF-8",
                "save the file as UTF-8",
            ) from None
    return Document(name, data)
