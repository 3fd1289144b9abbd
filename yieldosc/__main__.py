"""`python -m yieldosc` is the command line."""

import sys

from yieldosc.cli import main

if __name__ == "__main__":
    sys.exit(main())
