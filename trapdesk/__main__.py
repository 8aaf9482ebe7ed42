"""Run trapdesk as ``python -m trapdesk``."""

import sys

from trapdesk.faces.cli import main

if __name__ == "__main__":
    sys.exit(main())
