"""`python -m magnav`: the command."""

import sys

from .command.main import main

if __name__ == "__main__":
    sys.exit(main())
