"""Starts a server: `python -m nearchord_service --data DIR`."""

import sys

from nearchord_service.main import main

if __name__ == "__main__":
    sys.exit(main())
