"""`python -m balance` does what the command `balance` does."""

import sys

from balance.cli.main import main

if __name__ == "__main__":
    sys.exit(main())
