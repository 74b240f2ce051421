from __future__ import annotations

from pathlib import Path

import pytest

from tests.batch.command_line import Command


@pytest.fixture
def command(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> Command:
    """The command, ready to run."""
    return Command(tmp_path, capsys)
