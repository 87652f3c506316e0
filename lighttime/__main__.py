"""``python -m lighttime`` is the command line."""

import sys

from lighttime.cli import main

if __name__ == "__main__":
    sys.exit(main())
