"""`python -m patlint`."""

from __future__ import annotations

import sys

from patlint.cli.main import main

if __name__ == "__main__":
    sys.exit(main())
