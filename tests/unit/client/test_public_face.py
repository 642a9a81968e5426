"""What `import nearchord` shows, and what it must not drag in."""

from __future__ import annotations

import inspect
import subprocess
import sys

import nearchord
from nearchord import errors

HEAVY = ("numba", "networkx", "rich", "click", "scipy", "sqlalchemy", "pandas")


def test_the_export_list_is_sorted_and_complete():
    """Every public class and function imported at the top is listed, in ruff's order, and nothing else."""
    imported = {
        name for name, value in vars(nearchord).items() if not name.startswith("_") and not inspect.ismodule(value)
    }
    assert set(nearchord.__all__) == imported | {"check"}
    groups = [sorted(n for n in nearchord.__all__ if kind(n)) for kind in (str.isupper, is_class, str.islower)]
    assert nearchord.__all__ == [name for group in groups for name in group]


def is_class(name):
    return not name.isupper() and not name.islower()


def test_the_checker_wins_over_its_module():
    """`nearchord.check` is the function."""
    assert inspect.isfunction(nearchord.check)


def test_importing_is_light():
    """No compiler, no graph library, no terminal library comes with the client."""
    code = f"import sys, nearchord; print([name for name in {HEAVY!r} if name in sys.modules])"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.strip() == "[]"


def test_the_error_tree_is_drawn_at_its_top():
    """Every error stands in the drawing, under its parent, and can be imported from the package."""
    classes = [c for c in vars(errors).values() if inspect.isclass(c) and issubclass(c, errors.NearchordError)]
    drawn = {}
    stack = []
    for line in errors.__doc__.splitlines()[2:]:
        depth = (len(line) - len(line.lstrip(" |`-"))) // 4 if line.strip() else 0
        word = line.lstrip(" |`-").split(" ")[0]
        if hasattr(errors, word):
            stack[depth:] = [word]
            drawn[word] = stack[-2] if len(stack) > 1 else None
    assert set(drawn) == {c.__name__ for c in classes}
    for c in classes:
        assert drawn[c.__name__] in (None, *(base.__name__ for base in c.__bases__)), c
        assert c.__name__ in nearchord.__all__


def test_every_error_can_be_caught_as_one():
    """One except clause is enough, and the standard bases hold."""
    assert issubclass(nearchord.BadInput, ValueError)
    assert issubclass(nearchord.Unreachable, ConnectionError)
    assert issubclass(nearchord.TimeoutExceeded, TimeoutError)
    error = nearchord.FileProblem("f", 3, "what", "remedy")
    assert (error.file, error.line, error.problem, error.remedy) == ("f", 3, "what", "remedy")
    assert str(error) == "f, line 3: what; remedy"
    assert (error.reason, error.violations, error.retry_after) == ("BAD_INPUT", (), None)
