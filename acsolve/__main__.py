"""The program `acsolve`, also as `python -m acsolve`."""

from __future__ import annotations

import sys
from typing import NoReturn


def main() -> NoReturn:
    """Run the command line and leave with its exit status."""
    from acsolve.cli.run import run

    sys.exit(run(sys.argv[1:]))


if __name__ == "__main__":
    main()
