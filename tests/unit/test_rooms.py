"""The import rules of the design, read from the code."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
SERVICE = "nearchord_service"

# room -> rooms and packages of ours that it may import (its own room always)
MAY = {
    "nearchord_solve": set(),
    "nearchord": set(),
    "nearchord.v1": set(),
    f"{SERVICE}.model": set(),
    f"{SERVICE}.store": {f"{SERVICE}.model"},
    f"{SERVICE}.work": {f"{SERVICE}.model", f"{SERVICE}.store", "nearchord_solve"},
    f"{SERVICE}.dispatch": {f"{SERVICE}.model", f"{SERVICE}.store", f"{SERVICE}.work", f"{SERVICE}.metrics"},
    f"{SERVICE}.api": {
        f"{SERVICE}.model",
        f"{SERVICE}.store",
        f"{SERVICE}.metrics",
        f"{SERVICE}.settings",
        "nearchord.v1",
    },
    f"{SERVICE}.metrics": {f"{SERVICE}.model", f"{SERVICE}.store", f"{SERVICE}.work"},
    f"{SERVICE}.settings": {f"{SERVICE}.model", f"{SERVICE}.store"},
    f"{SERVICE}.main": {f"{SERVICE}.{r}" for r in ("model", "store", "work", "dispatch", "api", "metrics", "settings")},
    f"{SERVICE}.__main__": {f"{SERVICE}.main"},
    SERVICE: set(),
}
PORT_ONLY = {
    f"{SERVICE}.work",
    f"{SERVICE}.dispatch",
    f"{SERVICE}.api",
    f"{SERVICE}.metrics",
    f"{SERVICE}.settings",
}
PURE_MAY = {"numpy", "numba", "highspy"}
GRPC_ROOMS = (f"{SERVICE}.api", f"{SERVICE}.main", "nearchord.")


def modules() -> list[tuple[str, Path]]:
    found = []
    for base, package in (("client", "nearchord"), ("service", "nearchord_solve"), ("service", SERVICE)):
        for path in sorted((ROOT / base / package).rglob("*.py")):
            parts = path.relative_to(ROOT / base).with_suffix("").parts
            name = ".".join(parts[:-1] if parts[-1] == "__init__" else parts)
            found.append((name, path))
    return found


def imports(path: Path) -> set[str]:
    names: set[str] = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names.update(alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import"
            assert node.module is not None
            names.add(node.module)
            names.update(f"{node.module}.{alias.name}" for alias in node.names)
    return names


def within(name: str, room: str) -> bool:
    return name == room or name.startswith(room + ".")


def room_of(name: str) -> str:
    return max((room for room in MAY if within(name, room)), key=len)


@pytest.mark.parametrize(("name", "path"), modules(), ids=lambda v: v if isinstance(v, str) else "")
def test_imports_point_one_way(name: str, path: Path) -> None:
    """A module imports only the rooms that the design lets its room see."""
    room = room_of(name)
    ours = [i for i in imports(path) if i.split(".")[0] in {"nearchord", "nearchord_solve", SERVICE}]
    for target in ours:
        seen = room_of(target)
        if seen in (SERVICE, room) or (room == "nearchord" and seen == "nearchord.v1"):
            continue
        assert any(within(seen, allowed) for allowed in MAY[room]), f"{name} imports {target}"
        if room in PORT_ONLY and seen == f"{SERVICE}.store":
            assert within(target, f"{SERVICE}.store.port") or target == f"{SERVICE}.store", f"{name} imports {target}"


@pytest.mark.parametrize(("name", "path"), modules(), ids=lambda v: v if isinstance(v, str) else "")
def test_grpc_and_solver_stay_in_their_rooms(name: str, path: Path) -> None:
    """Only api (and main's wiring) sees gRPC and protobuf; the solver is pure; the model is standard library only."""
    found = {i.split(".")[0] for i in imports(path)}
    if {"grpc", "grpc_status", "grpc_health", "grpc_reflection", "google"} & found:
        assert name.startswith(GRPC_ROOMS), f"{name} imports gRPC or protobuf"
    if within(name, "nearchord_solve"):
        impure = {
            "time",
            "datetime",
            "os",
            "io",
            "logging",
            "pathlib",
            "socket",
            "threading",
            "subprocess",
            "random",
        }
        assert not impure & found, f"{name} imports {impure & found}"
        import sys

        outside = {i for i in found if i not in sys.stdlib_module_names} - PURE_MAY - {"nearchord_solve"}
        assert not outside, f"{name} imports {outside}"
    if within(name, f"{SERVICE}.model"):
        import sys

        assert all(i in sys.stdlib_module_names or i == SERVICE for i in found), f"{name} imports {found}"
