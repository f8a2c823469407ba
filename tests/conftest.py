"""Settings of property tests, and snapshots.

Property tests take the same examples on every run, with no clock and no database;
snapshots are texts kept beside the tests, changed only by `--update-snapshots`.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import HealthCheck, Phase, settings

settings.register_profile(
    "fixed",
    derandomize=True,
    deadline=None,
    database=None,
    phases=[Phase.explicit, Phase.generate, Phase.shrink],
    suppress_health_check=[HealthCheck.too_slow],
)
settings.load_profile("fixed")


def pytest_addoption(parser: pytest.Parser) -> None:
    """Add the flag that writes snapshots anew."""
    parser.addoption(
        "--update-snapshots",
        action="store_true",
        help="write snapshots anew; read every change before it is kept",
    )


@pytest.fixture
def snapshot(request: pytest.FixtureRequest) -> Callable[[str, Path], None]:
    """Compare a text with the snapshot in a file, or write it where the flag says so."""
    update = request.config.getoption("--update-snapshots")

    def compare(text: str, path: Path) -> None:
        if update:
            path.write_text(text, encoding="utf-8")
        assert path.exists(), f"no snapshot {path.name}; run with --update-snapshots"
        assert text == path.read_text(encoding="utf-8")

    return compare
