"""Facts about the machine and the packages that a measurement depends on."""

import os
import platform
from datetime import UTC, datetime
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from typing import Any

PACKAGES = ("nearchord", "numpy", "numba", "highspy", "ortools", "grpcio", "protobuf", "SQLAlchemy")


def cores() -> int:
    """Cores that this process may use."""
    return len(os.sched_getaffinity(0))


def facts() -> dict[str, Any]:
    """What to write beside every measurement; ``load`` is the load average of the last minute before it."""
    return {
        "time": datetime.now(UTC).isoformat(timespec="seconds"),
        "cores": cores(),
        "cpu": _first("/proc/cpuinfo", "model name"),
        "memory_bytes": os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES"),
        "load": round(os.getloadavg()[0], 2),
        "system": platform.platform(),
        "python": platform.python_version(),
        "packages": {name: _version(name) for name in PACKAGES},
    }


def _first(file: str, key: str) -> str:
    for line in Path(file).read_text(encoding="utf-8").splitlines():
        name, _, value = line.partition(":")
        if name.strip() == key:
            return value.strip()
    return platform.processor()


def _version(package: str) -> str | None:
    try:
        return version(package)
    except PackageNotFoundError:
        return None
