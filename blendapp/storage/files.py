"""What can be known of a mill file, its folder and its disk before the database opens it."""

from __future__ import annotations

import contextlib
import os
import secrets
import stat
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from blendapp.domain.wording import _
from blendapp.storage.faults import Cause, MillFileError, fault, from_system
from blendapp.storage.schema import APPLICATION_ID

# SQLite's file format, https://www.sqlite.org/fileformat.html#the_database_header
_MAGIC = b"SQLite format 3\0"
_HEADER_BYTES = 100

# File systems of one computer's own disks. Any other (a network folder, a folder of a virtual machine's host) may not
# share memory between processes, which a write-ahead log needs.
_LOCAL_SYSTEMS = frozenset({
    "ext2", "ext3", "ext4", "xfs", "btrfs", "zfs", "f2fs", "jfs", "reiserfs", "bcachefs", "tmpfs", "ramfs", "overlay",
    "vfat", "exfat", "ntfs", "ntfs3", "fuseblk", "hfsplus", "apfs", "iso9660", "udf", "squashfs",
})


def require_mill_file(path: Path) -> None:
    """Raises MillFileError for anything that is not a mill file by its first bytes."""
    try:
        kind = path.stat().st_mode
        if stat.S_ISDIR(kind):
            raise fault(Cause.FOLDER, path)
        if not stat.S_ISREG(kind):  # a pipe would never answer
            raise fault(Cause.NOT_A_MILL_FILE, path)
        with path.open("rb") as file:
            header = file.read(_HEADER_BYTES)
    except OSError as error:
        raise from_system(error, path) from error
    if len(header) < _HEADER_BYTES or not header.startswith(_MAGIC):
        raise fault(Cause.NOT_A_MILL_FILE, path)
    if int.from_bytes(header[68:72], "big") != APPLICATION_ID:
        raise fault(Cause.NOT_A_MILL_FILE, path)


def must_be_read_alone(path: Path) -> bool:
    """Whether SQLite must be told to make no file beside: the file asks for a log, and the folder cannot take one.

    Not where a log is there already: then another process has the file open, or was killed.
    """
    if _is_writable(path.parent) or any(os.path.exists(f"{path}{ending}") for ending in ("-wal", "-shm")):
        return False
    with path.open("rb") as file:
        return file.read(20)[18:20] == b"\x02\x02"


def may_write(path: Path) -> bool:
    """Whether the file and its folder may be written; a file marked read-only is kept so even for an administrator."""
    try:
        return _is_writable(path) and _is_writable(path.parent)
    except OSError as error:
        raise from_system(error, path) from error


def _is_writable(path: Path) -> bool:
    marks = stat.S_IWUSR | stat.S_IWGRP | stat.S_IWOTH
    return bool(path.stat().st_mode & marks) and os.access(path, os.W_OK)


def on_local_disk(path: Path, mounts: Path = Path("/proc/mounts")) -> bool:
    """Whether a file lies on a disk of this computer; where that cannot be known the answer is no."""
    if sys.platform == "win32":
        import ctypes

        drive = path.absolute().drive
        fixed, memory = 3, 6  # DRIVE_FIXED, DRIVE_RAMDISK
        return not drive.startswith("\\\\") and ctypes.windll.kernel32.GetDriveTypeW(drive + "\\") in (fixed, memory)
    return system_of(path, mounts) in _LOCAL_SYSTEMS


def system_of(path: Path, mounts: Path = Path("/proc/mounts")) -> str:
    """The type of the file system that holds a file, as the list of mounts names it; "" where there is no list."""
    target = str(path.absolute())
    found, longest = "", -1
    try:
        lines = mounts.read_text(encoding="utf-8", errors="surrogateescape").splitlines()
    except OSError:
        return ""
    for line in lines:
        words = line.split(" ")
        if len(words) < 3:
            continue
        point = words[1].replace("\\040", " ").replace("\\011", "\t").replace("\\134", "\\")
        inside = target == point or target.startswith(point.rstrip("/") + "/")
        if inside and len(point) >= longest:  # of two mounts at one point the later one counts
            found, longest = words[2], len(point)
    return found


@dataclass(frozen=True)
class Identity:
    """Which file a path leads to, so that a file put in its place is noticed."""

    device: int
    number: int


def identity(path: Path) -> Identity | None:
    """The file at a path; None where there is none."""
    try:
        found = path.stat()
    except OSError:
        return None
    return Identity(found.st_dev, found.st_ino)


@contextlib.contextmanager
def made_whole(path: Path) -> Iterator[Path]:
    """An empty file beside `path`, to be filled; at the end it takes that name at once, or nothing is left of it.

    Never overwrites: raises MillFileError where `path` exists, before and after.
    """
    if os.path.lexists(path):
        raise fault(Cause.EXISTS, path)
    if not path.parent.is_dir():
        text = _("There is no folder “{folder}”; make it first, or choose another.")
        raise MillFileError(text.format(folder=path.parent), Cause.MISSING, path)
    unfinished = path.with_name(f".{path.name}.{secrets.token_hex(4)}.unfinished")
    try:
        os.close(os.open(unfinished, os.O_CREAT | os.O_EXCL | os.O_RDWR, 0o666))
    except OSError as error:
        told = fault(Cause.READ_ONLY, path) if isinstance(error, PermissionError) else from_system(error, path)
        raise told from error
    try:
        yield unfinished
        _name_it(unfinished, path)
        _settle_folder(path.parent)
    except OSError as error:
        raise from_system(error, path) from error
    finally:
        for ending in ("", "-journal", "-wal", "-shm"):
            with contextlib.suppress(OSError):
                os.unlink(f"{unfinished}{ending}")


def _name_it(unfinished: Path, path: Path) -> None:
    """Give the file its name without overwriting; raises FileExistsError where the name was taken meanwhile."""
    if os.name == "nt":
        os.rename(unfinished, path)
        return
    try:
        os.link(unfinished, path)
    except FileExistsError:
        raise
    except OSError:  # a file system without links: reserve the name, then take it
        os.close(os.open(path, os.O_CREAT | os.O_EXCL | os.O_RDWR, 0o666))
        os.replace(unfinished, path)


def _settle_folder(folder: Path) -> None:
    """Have the disk keep a new name; not every system can be told so."""
    with contextlib.suppress(OSError):
        descriptor = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(descriptor)
        finally:
            os.close(descriptor)
