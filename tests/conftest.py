"""What every test folder shares: slow tests wait for their word."""

import os

import pytest


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    """Leave calibration to `sh tests/run.sh thorough`, and speed to `sh tests/run.sh benchmark`."""
    if os.environ.get("BEFOREHAND_THOROUGH"):
        return
    slow = [item for item in items if item.get_closest_marker("thorough")]
    config.hook.pytest_deselected(items=slow)
    items[:] = [item for item in items if item not in slow]
