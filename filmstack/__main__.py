"""`python -m filmstack`: the same as the command `filmstack`."""

from __future__ import annotations

import sys

from filmstack.cli.main import main

if __name__ == "__main__":
    sys.exit(main())
