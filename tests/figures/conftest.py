from __future__ import annotations

import pytest


@pytest.fixture(autouse=True)
def _gui(qapp: object) -> None:
    """Painting needs a Qt application; the one of pytest-qt serves."""
