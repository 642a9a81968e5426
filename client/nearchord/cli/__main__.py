"""`python -m nearchord.cli` is the command `nearchord`."""

from nearchord.cli import main

main()
