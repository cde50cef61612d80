"""What the README tells a newcomer to type works: the commands, the files they name, and the start of the demo shop."""

from __future__ import annotations

import os
import re
import shlex
import subprocess
import sys
import tomllib
import urllib.request
from pathlib import Path

import pytest

from server.__main__ import _parser

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text("utf-8")
PROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))["project"]
BLOCKS = [block.strip() for block in re.findall(r"```\n(.*?)```", README, re.DOTALL)]
START, TEST = BLOCKS[0], BLOCKS[1]


def parts(line: str) -> list[list[str]]:
    """The commands of one line, each as its words."""
    return [shlex.split(command) for command in line.split("&&")]


def test_the_first_two_blocks_are_one_line_each() -> None:
    assert "\n" not in START + TEST
    assert START.endswith("bondwright demo")
    assert TEST.endswith("pytest")


@pytest.mark.parametrize(("line", "extra"), [(START, ""), (TEST, "dev")])
def test_a_command_makes_its_own_surroundings_installs_with_the_pins_and_runs(line: str, extra: str) -> None:
    make, install, run = parts(line)
    assert make == ["python3", "-m", "venv", ".venv"]
    assert install[:2] == [".venv/bin/pip", "install"]
    pins = install[install.index("-c") + 1]
    assert (ROOT / pins).is_file()
    target = install[install.index("-e") + 1]
    assert target == (f".[{extra}]" if extra else ".")
    assert not extra or extra in PROJECT["optional-dependencies"]
    assert run[0].startswith(".venv/bin/")


def test_the_command_it_starts_is_the_one_that_is_installed() -> None:
    name = Path(parts(START)[2][0]).name
    assert PROJECT["name"] == name
    assert PROJECT["scripts"][name] == "server.__main__:main"


def test_every_dependency_has_its_pin() -> None:
    pinned = {line.split("==")[0].lower() for line in (ROOT / ".ci/constraints.txt").read_text("utf-8").splitlines()}
    for needed in [*PROJECT["dependencies"], *PROJECT["optional-dependencies"]["dev"]]:
        assert re.split(r"[><=;\[ ]", needed)[0].lower() in pinned, needed


def test_the_windows_form_stands_beside_them_marked_as_untested() -> None:
    windows = next(block for block in BLOCKS if ".venv\\Scripts" in block)
    before = README[: README.index(windows)]
    assert "untested" in before[-80:]
    assert len(windows.splitlines()) == 2


def test_every_command_it_shows_is_known() -> None:
    shown = [line.split("#")[0].strip() for block in BLOCKS for line in block.splitlines()]
    commands = [shlex.split(line)[1:] for line in shown if line.startswith("bondwright ")]
    assert len(commands) >= 6
    for command in commands:
        assert _parser().parse_args(command).run


def test_every_file_and_folder_it_names_is_there() -> None:
    for name in re.findall(r"`((?:seed_data|static|tests|\.ci)/[^`]+)`", README):
        assert (ROOT / name).exists(), name


def test_it_begins_with_the_job_the_cautions_and_the_licence_follow() -> None:
    assert README.startswith("# Bondwright\n\nBondwright is ")
    for words in ("licensed engineer", "local code", "proof testing", "MIT"):
        assert words in README


def test_the_demo_shop_answers_at_the_printed_address(tmp_path: Path) -> None:
    """As the first command starts it, with an empty home folder, on a port that is free."""
    home, folder = tmp_path / "home", tmp_path / "somewhere"
    home.mkdir()
    folder.mkdir()
    surroundings = {"PATH": os.environ["PATH"], "HOME": str(home), "PYTHONPATH": str(ROOT)}
    command = [sys.executable, "-m", "server", *parts(START)[2][1:], "--port", "0"]
    running = subprocess.Popen(command, cwd=folder, env=surroundings, stdout=subprocess.PIPE, text=True)
    try:
        assert running.stdout is not None
        line = running.stdout.readline()
        found = re.search(r"http://127\.0\.0\.1:\d+/", line)
        assert found is not None, line
        with urllib.request.urlopen(found[0], timeout=30) as answer:
            page = answer.read().decode()
        assert answer.status == 200
        for job in ("2601", "2602", "2603", "2604"):
            assert job in page
        with urllib.request.urlopen(found[0] + "checks/1/revisions/1", timeout=30) as answer:
            assert answer.status == 200
    finally:
        running.terminate()
        running.wait(timeout=30)
    assert list(home.iterdir()) == []
    assert [path.name for path in folder.iterdir()] == ["shop"]
