"""Every way of installing: wheelhouse without network, sdist, editable, as a user without rights."""

import json
import os
import shutil
import subprocess
import sys
import sysconfig
import tarfile
import tempfile
import zipfile
from pathlib import Path

import pytest

from tests.tui.terminal import Terminal

ROOT = Path(__file__).resolve().parent.parent.parent
SHEET = ROOT / "tests" / "sheets" / "pump_overload.yaml"
NOBODY = 65534  # the user id that Linux keeps for nobody
pytestmark = [
    pytest.mark.system,
    pytest.mark.skipif(os.name == "nt", reason="users and ptys of POSIX"),
]


def call(*command, cwd, **more):
    """Run a command to its end; return what it printed."""
    done = subprocess.run(
        [str(part) for part in command],
        cwd=cwd, capture_output=True, text=True, check=False, timeout=600, **more,
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    return done.stdout


def as_nobody():
    """Return what makes a process one without rights; nothing where this one has none already."""
    return {"user": NOBODY, "group": NOBODY, "extra_groups": []} if os.geteuid() == 0 else {}


def clean(home):
    """Return an environment that knows nothing of this one's packages."""
    return {"PATH": "/usr/bin:/bin", "HOME": str(home), "LANG": "C.UTF-8"}


def is_for_everybody(python):
    """Whether a Python is new enough, can make environments, and may be run by any user."""
    code = "import sys, ensurepip, venv; sys.exit(sys.version_info < (3, 11))"
    try:
        done = subprocess.run([python, "-c", code], check=False, cwd="/", capture_output=True, **as_nobody())
    except OSError:
        return False
    return done.returncode == 0


@pytest.fixture(scope="module")
def everybodys():
    """A folder that every user may read, unlike those of pytest."""
    folder = Path(tempfile.mkdtemp(prefix="plateside-install-"))
    folder.chmod(0o755)
    yield folder
    shutil.rmtree(folder)


@pytest.fixture(scope="module")
def python():
    """A Python that any user may run."""
    own = Path(sys.base_prefix) / "bin" / f"python3.{sys.version_info.minor}"
    for candidate in (own, "/usr/local/bin/python3", "/usr/bin/python3"):
        if is_for_everybody(candidate):
            return candidate
    return own


@pytest.fixture(scope="module")
def wheelhouse(everybodys, python):
    """The folder that tools/wheelhouse fills; made with network, all that follows is without."""
    call(python, "-m", "venv", everybodys / "maker", cwd=everybodys)
    pip = [everybodys / "maker" / "bin" / "python", "-m", "pip"]
    reach = subprocess.run(
        [*pip, "download", "-q", "--no-deps", "-d", everybodys / "reach", "mdurl"],
        check=False, capture_output=True, timeout=120,
    )  # fmt: skip
    if reach.returncode:
        pytest.skip("no package index answers here")
    call(pip[0], ROOT / "tools" / "wheelhouse", everybodys / "wheels", cwd=everybodys)
    return everybodys / "wheels"


@pytest.fixture(scope="module")
def home(everybodys, python, wheelhouse):
    """The home of a user without rights, who has installed Plateside from the wheelhouse there."""
    if not is_for_everybody(python):
        pytest.skip("only its owner may run this Python")
    home = everybodys / "home"
    home.mkdir()
    who = as_nobody()
    if who:
        os.chown(home, NOBODY, NOBODY)
    call(python, "-m", "venv", home / "app", cwd=home, env=clean(home), **who)
    words = ("install", "-q", "--isolated", "--no-index", "--find-links", wheelhouse, "plateside")
    call(home / "app" / "bin" / "python", "-m", "pip", *words, cwd=home, env=clean(home), **who)
    return home


def test_the_wheelhouse_holds_wheels_only_and_the_pinned_versions(wheelhouse):
    pins = dict(
        line.lower().replace("-", "_").split("==")
        for line in (ROOT / "constraints.txt").read_text(encoding="utf-8").splitlines()
        if not line.startswith("#")
    )
    names = [path.name.lower() for path in wheelhouse.iterdir()]
    assert all(name.endswith(".whl") for name in names)
    assert {"plateside", "textual", "numpy", "pint"} <= {name.split("-")[0] for name in names}
    for name in names:
        project, version = name.split("-")[:2]
        assert project in {"plateside", "pip"} or pins[project] == version


def test_a_user_without_rights_and_network_installs_and_diagnoses(home):
    code = "import os, sys; print(os.getuid(), sys.prefix)"
    user, prefix = call(home / "app/bin/python", "-c", code, cwd=home, env=clean(home), **as_nobody()).split()
    assert user != "0"
    assert Path(prefix).samefile(home / "app")
    sheet = home.parent / SHEET.name
    shutil.copyfile(SHEET, sheet)
    words = (home / "app" / "bin" / "plateside", "diagnose", "--json", sheet)
    answer = json.loads(call(*words, cwd=home, env=clean(home), **as_nobody()))
    assert answer["faults"][0]["id"] == "overload"


def test_a_user_without_rights_sees_the_demo_and_nothing_of_it_stays(home):
    scratch = home / "scratch"
    scratch.mkdir()
    scratch.chmod(0o777)
    drop = f"os.setgroups([]); os.setgid({NOBODY}); os.setuid({NOBODY}); " if as_nobody() else ""
    program = str(home / "app" / "bin" / "plateside")
    start = f"import os; {drop}os.execv({program!r}, ['plateside', 'demo'])"
    env = {**clean(home), "PYTHONPATH": None, "TMPDIR": str(scratch)}
    terminal = Terminal(home / "unused.db", env=env, command=[str(home / "app/bin/python"), "-c", start])
    try:
        terminal.wait("FP-2 fire pump")
        (folder,) = scratch.iterdir()
        assert folder.stat().st_uid == (NOBODY if as_nobody() else os.geteuid())
        terminal.type("\x07")  # Ctrl+G
        assert terminal.end() == 0
    finally:
        terminal.kill()
    assert not list(scratch.iterdir())


def test_pipx_puts_the_command_on_the_path_from_the_wheelhouse_alone(everybodys, wheelhouse):
    maker = everybodys / "maker" / "bin"
    call(maker / "python", "-m", "pip", "install", "-q", "pipx", cwd=everybodys)
    places = {"PIPX_HOME": str(everybodys / "pipx"), "PIPX_BIN_DIR": str(everybodys / "bin")}
    env = {**clean(everybodys), **places}
    only = f"--isolated --no-index --find-links {wheelhouse}"
    call(maker / "pipx", "install", f"--pip-args={only}", "plateside", cwd=everybodys, env=env)
    program = everybodys / "bin" / "plateside"
    assert call(program, "--version", cwd=everybodys, env=env).startswith("plateside ")


def test_the_sdist_gives_the_same_wheel_as_the_checkout(tmp_path):
    build = (sys.executable, "-m", "hatchling", "build")
    call(*build, "-t", "wheel", "-d", tmp_path / "direct", cwd=ROOT)
    call(*build, "-t", "sdist", "-d", tmp_path, cwd=ROOT)
    (archive,) = tmp_path.glob("plateside-*.tar.gz")
    with tarfile.open(archive) as packed:
        packed.extractall(tmp_path, filter="data")
    unpacked = tmp_path / archive.name.removesuffix(".tar.gz")
    assert (unpacked / "tests" / "sheets" / SHEET.name).exists()
    assert (unpacked / "LICENSE").exists()
    call(*build, "-t", "wheel", "-d", tmp_path / "again", cwd=unpacked)
    (direct,), (again,) = (tmp_path / "direct").iterdir(), (tmp_path / "again").iterdir()
    assert zipfile.ZipFile(direct).namelist() == zipfile.ZipFile(again).namelist()


def test_an_editable_install_runs_the_checkout_from_any_folder(tmp_path):
    call(sys.executable, "-m", "venv", "--without-pip", tmp_path / "dev", cwd=tmp_path)
    (site,) = tmp_path.glob("dev/lib/python*/site-packages")
    (site / "dependencies.pth").write_text(sysconfig.get_path("purelib") + "\n", encoding="utf-8")
    own = tmp_path / "dev" / "bin" / "python"
    words = ("install", "-q", "--no-index", "--no-deps", "--no-build-isolation", "-e", ROOT)
    call(sys.executable, "-m", "pip", "--python", own, *words, cwd=tmp_path)
    code = "import plateside, tui; print(tui.__file__)"
    assert Path(call(own, "-c", code, cwd=tmp_path, env=clean(tmp_path)).strip()).is_relative_to(ROOT)
    program = tmp_path / "dev" / "bin" / "plateside"
    assert call(program, "--version", cwd=tmp_path, env=clean(tmp_path)).startswith("plateside ")
