"""What is shipped works where no checkout is: the wheel brings its schemas and its limit tables."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import sysconfig
import tarfile
import venv
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
DATA_FILES = sorted(
    [f"checker/_schemas/{path.name}" for path in (ROOT / "schemas").glob("*.json")]
    + [path.relative_to(ROOT).as_posix() for path in (ROOT / "checker").rglob("*.yaml")]
)


def built(kind: str, source: Path, folder: Path) -> Path:
    """Build a wheel or sdist of a source tree with the tools at hand, without a network."""
    folder.mkdir()
    command = [sys.executable, "-m", "hatchling", "build", "--target", kind, "--directory", str(folder)]
    subprocess.run(command, cwd=source, check=True, capture_output=True)
    (file,) = folder.iterdir()
    return file


def unpack(archive: Path, folder: Path) -> None:
    """Write an sdist's files out; how `extractall` is to be called depends on the version of Python."""
    with tarfile.open(archive) as opened:
        for member in opened.getmembers():
            content = opened.extractfile(member)
            if content is not None:
                target = folder / member.name
                target.parent.mkdir(parents=True, exist_ok=True)
                target.write_bytes(content.read())


@pytest.fixture(scope="module", autouse=True)
def _tools() -> None:
    pytest.importorskip("hatchling", reason="hatchling builds the wheel; pip install -e '.[test]' brings it")
    pytest.importorskip("pip", reason="pip installs the wheel")


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the wheel of this checkout."""
    return built("wheel", ROOT, tmp_path_factory.mktemp("wheel") / "dist")


@pytest.fixture(scope="module")
def sdist(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the sdist of this checkout."""
    return built("sdist", ROOT, tmp_path_factory.mktemp("sdist") / "dist")


@pytest.fixture(scope="module")
def installed(wheel: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the folder of commands of an environment that holds the wheel and no checkout.

    What the wheel depends on is lent by the environment of the tests, through a path file, so
    that nothing is fetched. A path file of the lender is not read there: an editable install of
    this checkout stays invisible.
    """
    home = tmp_path_factory.mktemp("installed") / "venv"
    venv.create(home, with_pip=False, symlinks=True)
    paths = {"base": str(home), "platbase": str(home)}
    commands = Path(sysconfig.get_path("scripts", "venv", paths))
    python = commands / Path(sys.executable).name
    subprocess.run(
        [sys.executable, "-m", "pip", f"--python={python}", "install", "--quiet", "--no-index", "--no-deps",
         "--disable-pip-version-check", str(wheel)],
        check=True,
    )  # fmt: skip
    lender = Path(sysconfig.get_path("purelib", "venv", paths)) / "lender.pth"
    lender.write_text(sysconfig.get_path("purelib") + "\n", encoding="utf-8")
    return commands


def said(command: list[str | Path], folder: Path) -> tuple[int, str, str]:
    """Run a command outside the checkout; return its exit status and both its outputs."""
    run = subprocess.run(
        command, cwd=folder, capture_output=True, text=True, encoding="utf-8", check=False,
        env={name: value for name, value in os.environ.items() if not name.startswith("PYTHON")},
    )  # fmt: skip
    return run.returncode, run.stdout, run.stderr


def test_the_wheel_holds_every_schema_and_every_limit_table(wheel: Path) -> None:
    names = zipfile.ZipFile(wheel).namelist()
    assert [name for name in DATA_FILES if name not in names] == []
    assert {name.split("/")[0].split("-")[0] for name in names} == {"checker", "fairloom"}


def test_the_installed_code_is_the_wheels_and_not_the_checkouts(installed: Path, tmp_path: Path) -> None:
    code = "import checker.reading.schema as s; print(s.__file__); print(s.schema_folder())"
    status, printed, _ = said([installed / Path(sys.executable).name, "-c", code], tmp_path)
    module, schemas = printed.splitlines()
    assert status == 0
    assert Path(module).is_relative_to(installed.parent)
    assert Path(schemas) == Path(module).parents[1] / "_schemas"


def test_the_installed_command_checks_the_example_fleet_as_the_checkout_does(installed: Path, tmp_path: Path) -> None:
    shutil.copytree(ROOT / "fleet_example", tmp_path / "yard", ignore=shutil.ignore_patterns("reports"))
    words = ["check", "yard", "--today", "2026-12-01"]
    here = "import sys; sys.path.insert(0, sys.argv.pop(1)); from checker.cli import main; sys.exit(main())"
    from_checkout = said([sys.executable, "-c", here, str(ROOT), *words], tmp_path)
    from_wheel = said([installed / "fairloom", *words], tmp_path)
    assert from_wheel == from_checkout
    status, printed, complaints = from_wheel
    assert (status, complaints) == (1, "")
    assert "3 hulls of 8 have open errors (TND-035, TND-037, TND-038)" in printed


def test_the_installed_command_finds_its_schemas(installed: Path, tmp_path: Path) -> None:
    shutil.copytree(ROOT / "fleet_example", tmp_path / "yard")
    hull = tmp_path / "yard/hulls/tnd-031.yaml"
    hull.write_text(hull.read_text(encoding="utf-8").replace("status:", "stattus:"), encoding="utf-8")
    status, printed, _ = said([installed / "fairloom", "check", "yard"], tmp_path)
    assert status == 1
    assert "did you mean “status”?" in printed


def test_two_builds_are_equal_byte_for_byte(wheel: Path, tmp_path: Path) -> None:
    assert built("wheel", ROOT, tmp_path / "again").read_bytes() == wheel.read_bytes()


def test_the_sdist_holds_schemas_tests_and_the_example_and_builds_the_same_package(
    sdist: Path, wheel: Path, tmp_path: Path
) -> None:
    unpack(sdist, tmp_path)
    (source,) = tmp_path.iterdir()
    for name in (
        "schemas/hull.json",
        "tests/test_packaging.py",
        "fleet_example/yard.yaml",
        "LICENSE",
        ".ci/run",
    ):
        assert (source / name).read_bytes() == (ROOT / name).read_bytes()
    again = zipfile.ZipFile(built("wheel", source, tmp_path / "dist"))
    first = zipfile.ZipFile(wheel)
    assert {name: again.read(name) for name in again.namelist()} == {
        name: first.read(name) for name in first.namelist()
    }
