"""Where blocking calls run: two pools of threads beside the event loop."""

from __future__ import annotations

import asyncio
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from typing import TypeVar

T = TypeVar("T")


class Calls:
    """Runs store calls off the loop. Long work on content has its own threads, so it never delays a short call."""

    def __init__(self, quick: int = 8, heavy: int = 2) -> None:
        self._quick = ThreadPoolExecutor(quick, thread_name_prefix="store-call")
        self._heavy = ThreadPoolExecutor(heavy, thread_name_prefix="content-call")

    async def quick(self, function: Callable[..., T], *arguments: object) -> T:
        """Run a call that takes milliseconds."""
        return await asyncio.get_running_loop().run_in_executor(self._quick, function, *arguments)

    async def heavy(self, function: Callable[..., T], *arguments: object) -> T:
        """Run a call that moves or checks content."""
        return await asyncio.get_running_loop().run_in_executor(self._heavy, function, *arguments)

    def close(self) -> None:
        """Wait for the calls under way and end the threads. Safe to repeat."""
        self._quick.shutdown(wait=True)
        self._heavy.shutdown(wait=True)
