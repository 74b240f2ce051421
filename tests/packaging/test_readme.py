"""What the README promises is what continuous integration runs, and what the package holds."""

import re
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")


def _commands() -> list[str]:
    blocks = re.findall(r"```(?:sh|bat)\n(.*?)```", README, re.S)
    return [line for block in blocks for line in block.splitlines() if line]


def test_continuous_integration_runs_the_readmes_test_command() -> None:
    command = next(c for c in _commands() if c.endswith("-m pytest") and c.startswith("python3"))
    assert (ROOT / ".ci" / "run").read_text(encoding="utf-8").rstrip().splitlines()[-1] == command


def test_readme_opens_with_the_job_and_two_commands() -> None:
    first = README.split("\n\n")[1]
    assert "detailed-balance limit" in first
    posix = [c for c in _commands() if c.startswith("python3 -m venv")]
    windows = [c for c in _commands() if c.startswith("py -m venv")]
    assert len(posix) == 2
    assert len(windows) == 2
    assert posix[0].endswith("gapledger demo")


def test_pictures_of_the_readme_exist() -> None:
    pictures = re.findall(r"!\[[^\]]*\]\(([^)]+)\)", README)
    assert pictures
    assert all((ROOT / picture).is_file() for picture in pictures)


@pytest.mark.parametrize("folder", ["app", "physics", "resources", "tests"])
def test_developers_guide_speaks_of_every_folder(folder: str) -> None:
    guide = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    assert f"`{folder}/" in guide
    if folder in ("app", "physics"):
        for inner in sorted(p.name for p in (ROOT / folder).iterdir() if p.is_dir() and not p.name.startswith("__")):
            assert f"`{folder}/{inner}/" in guide


def test_top_level_is_the_one_agreed_on() -> None:
    known = {"README.md", "DEVELOPERS.md", "pyproject.toml", "app", "physics", "tests", "resources", "out"}
    extra = {p.name for p in ROOT.iterdir() if not p.name.startswith(".")} - known
    assert not extra - {"dist", "build"}
