"""What solves leave for later ones on the same graph, as files in a folder.

The folder is a cache: bounded, safe to delete at any time, shared by workers without locks. A file is written beside
its place and moved there, and believed only if its name, its sizes and its digest are right; what is damaged, foreign
or of another solver is ignored, and replaced by the next solve. Files are named after the owner, the graph and the very
code of the solver, so nobody can learn from the time of an answer what others have stored.
"""

from __future__ import annotations

import contextlib
import hashlib
import json
import logging
import os
from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from nearchord_service.work.port import Task

Arrays = Mapping[str, "NDArray[Any]"]

_LOG = logging.getLogger(__name__)
_MAGIC = b"nearchord kept 1"
_DIGEST_BYTES = 32
_LENGTH_BYTES = 8
_ALIGN = 64
_TYPES = {"<i8": np.int64, "<i4": np.int32, "|u1": np.uint8}


class Shelf:
    """The folder, as one worker uses it. `offer` only notes what is to be kept; `store` writes it, after the answer."""

    def __init__(self, folder: Path, most_bytes: int, solver: str) -> None:
        """Keep at most `most_bytes` in `folder`, made when needed; `solver` identifies the solver's code.

        Whatever changes the structures that are built has to change `solver`.
        """
        self._folder = folder
        self._most_bytes = most_bytes
        self._solver = solver
        self._offered: tuple[str, Arrays] | None = None

    def find(self, task: Task) -> Arrays | None:
        """Return what was kept about the task's graph: writable flat arrays; None when there is nothing (sound)."""
        name = self._name(task)
        path = self._folder / name
        try:
            with path.open("rb") as file:
                content = np.empty(os.fstat(file.fileno()).st_size, np.uint8)
                if file.readinto(content.data) < content.size:
                    raise ValueError("shorter than its size")
            arrays = _unpacked(name, content)
            os.utime(path)
        except FileNotFoundError:
            return None
        except (OSError, ValueError, KeyError, TypeError) as error:
            _LOG.warning("ignoring the kept file %s: %s", path, error)
            return None
        return arrays

    def offer(self, task: Task, arrays: Arrays) -> None:
        """Note what a solve left about the task's graph."""
        self._offered = (self._name(task), arrays)

    def store(self) -> None:
        """Write what was offered, if it fits, and drop what was not used for longest. Failing is harmless."""
        offered, self._offered = self._offered, None
        if offered is None:
            return
        name, arrays = offered
        pieces = _packed(name, arrays)
        if sum(memoryview(piece).nbytes for piece in pieces) > self._most_bytes:
            return
        beside = self._folder / f"{name}.{os.getpid()}"
        try:
            self._folder.mkdir(mode=0o700, parents=True, exist_ok=True)
            with beside.open("wb") as file:
                for piece in pieces:
                    file.write(piece)
            beside.replace(self._folder / name)
            self._make_room()
        except OSError as error:
            _LOG.warning("cannot keep %s: %s", beside, error)
            with contextlib.suppress(OSError):
                beside.unlink()

    def _make_room(self) -> None:
        """Delete the files not used for longest until the rest fits. Another worker may do so at the same time."""
        files: list[tuple[int, str, int]] = []
        with os.scandir(self._folder) as entries:
            for entry in entries:
                with contextlib.suppress(FileNotFoundError):
                    status = entry.stat(follow_symlinks=False)
                    files.append((status.st_mtime_ns, entry.name, status.st_size))
        held = sum(size for _, _, size in files)
        for _, name, size in sorted(files):
            if held <= self._most_bytes:
                return
            with contextlib.suppress(FileNotFoundError):
                (self._folder / name).unlink()
            held -= size

    def _name(self, task: Task) -> str:
        words = json.dumps([self._solver, task.owner, task.graph_address])
        return hashlib.blake2b(words.encode(), digest_size=_DIGEST_BYTES).hexdigest()


def _packed(name: str, arrays: Arrays) -> list[bytes | memoryview]:
    """Write arrays as pieces of a file: magic, digest of the rest, length of the head, head, arrays."""
    listed: list[tuple[str, str, int]] = []
    body: list[bytes | memoryview] = []
    for key, array in arrays.items():
        plain = np.ascontiguousarray(array)
        if plain.dtype.str not in _TYPES:
            raise TypeError(f"array {key} of {plain.dtype} cannot be kept")
        listed.append((key, plain.dtype.str, plain.size))
        body += [plain.data.cast("B") if plain.size else b"", bytes(-plain.nbytes % _ALIGN)]
    head = json.dumps({"name": name, "arrays": listed}).encode()
    before = len(_MAGIC) + _DIGEST_BYTES + _LENGTH_BYTES
    head += b" " * (-(before + len(head)) % _ALIGN)
    rest = [len(head).to_bytes(_LENGTH_BYTES, "little"), head, *body]
    digest = hashlib.blake2b(digest_size=_DIGEST_BYTES)
    for piece in rest:
        digest.update(piece)
    return [_MAGIC, digest.digest(), *rest]


def _unpacked(name: str, content: NDArray[np.uint8]) -> Arrays:
    """Read such a file; ValueError, KeyError or TypeError when anything is wrong with it."""
    data = content.data
    signed = len(_MAGIC) + _DIGEST_BYTES
    at = signed + _LENGTH_BYTES
    if data[: len(_MAGIC)] != _MAGIC:
        raise ValueError("of another kind")
    if hashlib.blake2b(data[signed:], digest_size=_DIGEST_BYTES).digest() != data[len(_MAGIC) : signed]:
        raise ValueError("damaged")
    length = int.from_bytes(data[signed:at], "little")
    head = json.loads(bytes(data[at : at + length]))
    if head["name"] != name:
        raise ValueError("of another graph or solver")
    at += length
    arrays: dict[str, NDArray[Any]] = {}
    for key, code, size in head["arrays"]:
        dtype = np.dtype(_TYPES[code])
        end = at + size * dtype.itemsize
        if end > content.size:
            raise ValueError("shorter than it says")
        arrays[key] = content[at:end].view(dtype)
        at = end + -(end - at) % _ALIGN
    return arrays
