"""Lets `python -m stripcheck` do what the command `stripcheck` does."""

import sys

from stripcheck.cli import main

if __name__ == "__main__":
    sys.exit(main())
