"""`python -m appraise` does what `appraise` does."""

import sys

from appraise.cli import main

if __name__ == "__main__":
    sys.exit(main())
