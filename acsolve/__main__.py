"""The program `acsolve`, also as `python -m acsolve`."""

from __future__ import annotations

import sys
from typing import NoReturn


def main() -> NoReturn:
    """Run the command line and leave with its exit status."""
    try:
        from acsolve.cli.run import run
    except KeyboardInterrupt:
        sys.exit(130)
    sys.exit(run(sys.argv[1:]))


if __name__ == "__main__":
    main()
