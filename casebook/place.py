"""Where a casebook lies: finding it, making it private, and what its file system can do."""

from __future__ import annotations

import os
import stat
from pathlib import Path
from typing import Final
from urllib.parse import quote

import platformdirs

from casebook.errors import CasebookError, NoPermission, NotACasebook

ENVIRONMENT: Final = "PLATESIDE_CASEBOOK"
FILE_NAME: Final = "casebook.db"
MAGIC: Final = b"SQLite format 3\0"
"""What every database of SQLite begins with."""

# File systems on which two hosts do not share memory; names as the kernel lists them.
# From memory, with the SQLite documentation ("WAL does not work over a network filesystem").
_SHARED: Final = frozenset(
    {
        "nfs",
        "nfs4",
        "cifs",
        "smb2",
        "smb3",
        "smbfs",
        "9p",
        "afs",
        "ceph",
        "glusterfs",
        "lustre",
        "gpfs",
        "ocfs2",
        "gfs2",
        "beegfs",
        "vboxsf",
        "prl_fs",
        "fuse.sshfs",
        "fuse.glusterfs",
        "fuse.ceph",
        "fuse.vmhgfs-fuse",
        "fuse.rclone",
        "fuse.davfs",
        "davfs",
        "virtiofs",
        "drvfs",
    }
)


def default_path() -> Path:
    """Return where this person's casebook lies: $PLATESIDE_CASEBOOK, else the user's data folder."""
    named = os.environ.get(ENVIRONMENT)
    if named:
        return Path(named).expanduser()
    return Path(platformdirs.user_data_dir("plateside", appauthor=False)) / FILE_NAME


def prepare(path: Path, *, group: bool) -> None:
    """Make sure that a file is there, readable by its owner (and its group, on request) only."""
    refuse_other_files(path)
    if path.exists():
        return
    try:
        make_folder(path.parent, group=group)
        with_mode = 0o660 if group else 0o600
        descriptor = os.open(path, os.O_CREAT | os.O_EXCL | os.O_RDWR, with_mode)
        try:
            if hasattr(os, "fchmod"):  # whatever the umask says; -wal and -shm take the same
                os.fchmod(descriptor, with_mode)
        finally:
            os.close(descriptor)
        _sync_folder(path.parent)
    except FileExistsError:
        return  # another process was faster
    except PermissionError as error:
        raise NoPermission(f"{path} cannot be made: {error.strerror}") from error
    except OSError as error:
        raise CasebookError(f"{path} cannot be made: {error.strerror}") from error


def _sync_folder(folder: Path) -> None:
    """Have the new file's name on the disk too, where the system can do that."""
    if not hasattr(os, "O_DIRECTORY"):
        return
    descriptor = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
    try:
        os.fsync(descriptor)
    except OSError:
        pass  # some network file systems sync names by themselves and refuse to be asked
    finally:
        os.close(descriptor)


def make_folder(folder: Path, *, group: bool) -> None:
    """Make a folder for its owner only, or one whose files belong to its group (setgid)."""
    if folder.is_dir():
        return
    if folder.exists():
        raise NotACasebook(f"{folder} is a file; a casebook in it cannot be")
    folder.mkdir(parents=True, exist_ok=True)
    folder.chmod(0o2770 if group else 0o700)


def refuse_other_files(path: Path) -> None:
    """Raise unless there is no such file, an empty one, or one in the format of a database."""
    if path.is_dir():
        raise NotACasebook(f"{path} is a folder")
    if not path.exists():
        return
    if not path.is_file():
        raise NotACasebook(f"{path} is no ordinary file")
    try:
        with path.open("rb") as file:
            head = file.read(len(MAGIC))
    except PermissionError as error:
        raise NoPermission(f"{path} may not be read") from error
    if head and head != MAGIC:
        raise NotACasebook(f"{path} is no casebook")


def is_writable(path: Path) -> bool:
    """Whether this process may write the file and, for the journal beside it, its folder."""
    return os.access(path, os.W_OK) and os.access(path.parent, os.W_OK)


def uri(path: Path, options: str) -> str:
    """Return the name of a file as SQLite takes it with options, drive letters included."""
    text = path.resolve().as_posix()
    return f"file://{'' if text.startswith('/') else '/'}{quote(text, safe='/:')}?{options}"


def shared_file_system(path: Path) -> str:
    """Return the kind of a network or shared file system that a path lies on, or nothing."""
    kind = _file_system(path)
    return kind if kind in _SHARED else ""


def _file_system(path: Path) -> str:
    try:
        lines = Path("/proc/self/mountinfo").read_text(encoding="utf-8", errors="replace").splitlines()
    except OSError:
        return ""  # no such list on this system; the journal pragma's own answer decides
    best, kind = -1, ""
    target = path.resolve()
    for line in lines:
        left, _, right = line.partition(" - ")
        point = left.split()[4].replace("\\040", " ")
        if target.is_relative_to(point) and len(point) >= best:
            best, kind = len(point), right.split()[0]
    return kind


def privacy_note(path: Path) -> str:
    """Return a sentence if people outside owner and group can read the file, else nothing.

    Where files have no such mode the rights of the folder decide, and nothing is said.
    """
    if os.name != "posix":
        return ""
    mode = stat.S_IMODE(path.stat().st_mode)
    if mode & 0o007:
        return f"{path.name} can be read by everybody on this machine (mode {mode:o})"
    return ""
