"""What a user gets: the built wheel, in an environment of its own, away from the checkout."""

import json
import os
import subprocess
import sys
import sysconfig
import venv
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent.parent
SHEET = ROOT / "tests" / "sheets" / "pump_overload.yaml"
pytestmark = pytest.mark.system


def call(*command, cwd, **more):
    return subprocess.run(
        [str(part) for part in command],
        cwd=cwd,
        capture_output=True,
        text=True,
        check=True,
        timeout=300,
        **more,
    )


@pytest.fixture(scope="module")
def wheel(tmp_path_factory):
    folder = tmp_path_factory.mktemp("wheel")
    call(sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", folder, cwd=ROOT)
    (built,) = folder.glob("plateside-*.whl")
    return built


@pytest.fixture(scope="module")
def installed(wheel, tmp_path_factory):
    """An environment with the wheel; its dependencies are those of this one."""
    home = tmp_path_factory.mktemp("environment")
    venv.create(home, with_pip=False, symlinks=os.name != "nt")
    bin_folder = home / ("Scripts" if os.name == "nt" else "bin")
    install = ("--python", bin_folder / "python", "install", "-q", "--no-deps", "--no-index", wheel)
    call(sys.executable, "-m", "pip", *install, cwd=home)
    (site,) = home.glob("lib/python*/site-packages") if os.name != "nt" else [home / "Lib/site-packages"]
    (site / "dependencies.pth").write_text(sysconfig.get_path("purelib") + "\n")
    return bin_folder


@pytest.fixture
def run(installed, tmp_path):
    """Run the installed program in a folder that is not the checkout."""
    env = {"PATH": os.environ["PATH"], "HOME": str(tmp_path), "PLATESIDE_CASEBOOK": str(tmp_path / "book.db")}
    return lambda *argv: call(installed / "plateside", *argv, cwd=tmp_path, env=env).stdout


def test_the_wheel_brings_one_name_and_all_of_its_data(wheel):
    names = zipfile.ZipFile(wheel).namelist()
    assert {name.split("/")[0] for name in names if ".dist-info" not in name} == {"plateside"}
    inside = {name.removeprefix("plateside/layers/") for name in names}
    for folder in ("calc", "rules", "casebook", "tui"):
        shipped = [
            path for path in (ROOT / folder).rglob("*") if path.is_file() and "__pycache__" not in path.parts
        ]
        missing = {path.relative_to(ROOT).as_posix() for path in shipped} - inside
        assert not {name for name in missing if not name.endswith((".pyc", ".orig", ".rej"))}
    assert not [name for name in names if "tests/" in name]


def test_the_installed_program_is_not_the_checkout(installed, tmp_path):
    code = "import plateside, tui, rules; print(plateside.__path__[0], tui.__path__[0], rules.__path__[0])"
    for path in call(installed / "python", "-c", code, cwd=tmp_path).stdout.split():
        assert not Path(path).is_relative_to(ROOT)


def test_a_case_goes_through_the_installed_program(run):
    assert run("--version").startswith("plateside ")
    answer = json.loads(run("diagnose", "--json", str(SHEET)))
    assert answer["faults"][0]["id"] == "overload"
    number = run("log", str(SHEET)).split()[0]
    assert number in run("cases")
    assert "licensed practice" in run("report", number)


def test_the_example_plant_is_in_the_wheel(run, tmp_path):
    run("demo", "--build", str(tmp_path / "plant.db"))
    assert "fire pump" in run("cases", "--casebook", str(tmp_path / "plant.db"))


def test_the_module_runs_too(installed, tmp_path):
    assert call(installed / "python", "-m", "plateside", "--version", cwd=tmp_path).stdout.startswith(
        "plateside "
    )
