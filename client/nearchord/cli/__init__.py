"""The command `nearchord`: one module a command, data on stdout, progress on stderr and only on a terminal."""

from __future__ import annotations

import sys


def main() -> None:
    """Run the command line and exit with its code; the entry point of the distribution."""
    try:
        from nearchord.cli.app import run
    except ModuleNotFoundError as missing:
        if missing.name not in {"click", "rich"}:
            raise
        sys.stderr.write("error: the command line needs its extra: pip install 'nearchord[cli]'\n")
        sys.exit(2)
    sys.exit(run(sys.argv[1:]))
