"""One undisturbed search as the measure of all that are hurt."""

from __future__ import annotations

import pytest

from tests.faults.harness import Search, undisturbed


@pytest.fixture(scope="session")
def measure(tmp_path_factory: pytest.TempPathFactory) -> Search:
    """A search that nothing happened to."""
    return undisturbed(tmp_path_factory.mktemp("undisturbed"))
