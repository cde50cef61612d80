"""The built wheel carries everything the app needs outside a checkout."""

from __future__ import annotations

import importlib.util
import re
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
UNREACHABLE = (
    r"Temporary failure|No matching distribution|Could not find a version|NewConnectionError|No module named pip"
)


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> zipfile.ZipFile:
    """The wheel, built from this checkout; with the back end at hand nothing is fetched for it."""
    target = tmp_path_factory.mktemp("wheel")
    alone = ["--no-build-isolation"] if importlib.util.find_spec("hatchling") else []
    command = [sys.executable, "-m", "pip", "wheel", "-q", "--no-deps", *alone, "-w", str(target), str(ROOT)]
    done = subprocess.run(command, capture_output=True, text=True, timeout=300, check=False)
    if done.returncode and re.search(UNREACHABLE, done.stderr):
        pytest.skip("the wheel's build back end is neither installed nor to be had from an index here")
    assert done.returncode == 0, done.stderr
    (built,) = target.glob("bondwright-*.whl")
    return zipfile.ZipFile(built)


def within(folder: Path) -> set[str]:
    """Files of a folder of the checkout, by their path in it."""
    return {
        str(path.relative_to(folder))
        for path in folder.rglob("*")
        if path.is_file() and "__pycache__" not in path.parts
    }


@pytest.mark.parametrize("folder", ["templates", "static", "seed_data"])
def test_what_is_not_code_is_in_it_whole(wheel: zipfile.ZipFile, folder: str) -> None:
    inside = {name.removeprefix(f"server/_data/{folder}/") for name in wheel.namelist() if f"_data/{folder}/" in name}
    assert inside == within(ROOT / folder)


def test_all_code_is_in_it_migrations_too(wheel: zipfile.ZipFile) -> None:
    inside = {name.removeprefix("server/") for name in wheel.namelist() if name.endswith(".py")}
    assert inside == {name for name in within(ROOT / "server") if name.endswith(".py")}
    assert any(re.fullmatch(r"storage/migrations/versions/m0001_\w+\.py", name) for name in inside)


def test_tests_and_scratch_are_not(wheel: zipfile.ZipFile) -> None:
    tops = {name.split("/")[0] for name in wheel.namelist()}
    assert {top for top in tops if not top.endswith(".dist-info")} == {"server"}
    assert not [name for name in wheel.namelist() if name.endswith((".db", ".pyc"))]


def test_the_command_and_the_licences_come_with_it(wheel: zipfile.ZipFile) -> None:
    (info,) = {name.split("/")[0] for name in wheel.namelist() if ".dist-info" in name}
    assert "bondwright = server.__main__:main" in wheel.read(f"{info}/entry_points.txt").decode()
    metadata = wheel.read(f"{info}/METADATA").decode()
    assert "License-Expression: MIT" in metadata
    assert any("licences/bondwright.txt" in name for name in wheel.namelist() if info in name)
