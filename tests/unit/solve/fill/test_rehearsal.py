"""Everything is compiled after the rehearsal."""

import importlib
import pkgutil

import nearchord_solve.fill.exact as exact
import nearchord_solve.recognise as recognition
from nearchord_solve.fill.exact.rehearse import rehearse
from numba.core.dispatcher import Dispatcher


def entries() -> dict[str, Dispatcher]:
    """Kernels that modules of the exact search and of recognition call."""
    found = {}
    for package in (exact, recognition):
        for info in pkgutil.iter_modules(package.__path__, package.__name__ + "."):
            for name, value in vars(importlib.import_module(info.name)).items():
                if isinstance(value, Dispatcher):
                    found[f"{info.name}.{name}"] = value
    return found


def test_every_kernel_has_been_called_with_one_set_of_types() -> None:
    """More than one would be compiled again in production."""
    assert len(list(rehearse())) == 6
    assert len(entries()) > 15
    for name, kernel in entries().items():
        assert len(kernel.signatures) == 1, f"{name}: {kernel.signatures}"
