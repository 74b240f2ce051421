"""The one way a file gets onto the disk: whole and checked, or not at all.

The bytes go to a new file beside the target, are forced to the disk and read back, and only then take the
target's name in one step. Until that step the earlier file is untouched; a failure removes the new file and
is told.
"""

import contextlib
import errno
import hashlib
import os
import secrets
import stat
from collections.abc import Iterable, Iterator
from pathlib import Path

from app.files.windows_names import windows_trouble
from app.files.write_error import WriteError, not_written, refused_by_system

__all__ = ["WriteError", "write_blocks", "write_file", "write_text"]

_BLOCK = 1 << 20
_BINARY = getattr(os, "O_BINARY", 0)
_CREATE = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_NOFOLLOW", 0) | _BINARY
_READ = os.O_RDONLY | _BINARY
# Folders that cannot be opened or forced to the disk: the file system sees to it, or nothing can.
_FOLDER_CANNOT_SYNC = {errno.EINVAL, errno.ENOTSUP, errno.EACCES, errno.EPERM, errno.EBADF}
_OTHER_NAME = "choose another name"


def write_file(path: Path, data: bytes) -> None:
    """Save bytes as a file, replacing one of that name only once the new one is known to be whole.

    A symbolic link is followed and the file behind it replaced. Permission bits of an earlier file are
    kept, and its owner and group where the system allows; a new file gets what the user's mask leaves.
    Other hard links to the earlier file keep the earlier contents.

    Parameters
    ----------
    path : Path
        The file. Its folder must exist; the target must be a regular file or not exist.
    data : bytes
        The contents.

    Raises
    ------
    WriteError
        Where it could not be saved.
    """
    write_blocks(path, (data,))


def write_text(path: Path, text: str) -> None:
    """Save a text as UTF-8 without byte order mark, its line ends as they are; otherwise as `write_file`.

    Raises
    ------
    WriteError
        Where it could not be saved, also where the text holds half a surrogate pair.
    """
    write_file(path, encode(path, text))


def encode(path: Path, text: str) -> bytes:
    """Encode a text for a file, or say that it cannot be.

    Raises
    ------
    WriteError
        Where the text holds half a surrogate pair, which UTF-8 cannot carry.
    """
    try:
        return text.encode("utf-8")
    except UnicodeEncodeError as fault:
        letter = ascii(fault.object[fault.start])[1:-1]
        raise not_written(
            path, f"it holds the broken character {letter}", "take that character out of the texts"
        ) from fault


def write_blocks(path: Path, blocks: Iterable[bytes]) -> int:
    """Save a file from blocks of bytes, one in memory at a time; otherwise as `write_file`.

    An error raised while the blocks are being made passes through unchanged, with nothing left behind.

    Returns
    -------
    int
        The number of bytes saved.

    Raises
    ------
    WriteError
        Where it could not be saved.
    """
    with _telling(path):
        target, earlier = _target(path)
        new = target.parent / f".{secrets.token_hex(12)}.part"
        handle = os.open(new, _CREATE, 0o666 if earlier is None else stat.S_IMODE(earlier.st_mode) & 0o777)
    try:
        count, checksum = _fill(path, handle, blocks, earlier)
        with _telling(path):
            if _contents(new) != (count, checksum):
                raise _differs(path)
            identity = _identity(new)
            new.replace(target)
    except BaseException:
        # The first failure is the one to tell; a second one while tidying up would only hide it.
        with contextlib.suppress(OSError):
            new.unlink()
        raise
    with _telling(path, replaced=True):
        _sync_folder(target.parent)
        # Some network drives number a file anew when it is renamed: then its contents decide.
        if _identity(target) != identity and _contents(target) != (count, checksum):
            raise _differs(path, replaced=True)
    return count


def _target(path: Path) -> tuple[Path, os.stat_result | None]:
    """Find the file behind any links, refusing what is not a plain file before anything is opened."""
    if os.name == "nt" and (trouble := windows_trouble(path.name)):
        raise not_written(path, trouble, _OTHER_NAME)
    try:
        earlier = path.stat()
    except FileNotFoundError:
        earlier = None
    except ValueError as fault:
        raise not_written(path, "its name holds a character no file can have", _OTHER_NAME) from fault
    if earlier is not None:
        if stat.S_ISDIR(earlier.st_mode):
            raise IsADirectoryError(errno.EISDIR, os.strerror(errno.EISDIR))
        if not stat.S_ISREG(earlier.st_mode):
            raise not_written(path, "that is a device or pipe, not a file", _OTHER_NAME)
        if not os.access(path, os.W_OK):
            raise not_written(path, "the file there is write-protected", f"{_OTHER_NAME} or unlock it")
    target = path.resolve()
    if not target.parent.is_dir():
        if target.parent == path.parent.resolve():
            raise FileNotFoundError(errno.ENOENT, os.strerror(errno.ENOENT))
        raise not_written(path, "it is a link into a folder that does not exist", _OTHER_NAME)
    return target, earlier


def _fill(path: Path, handle: int, blocks: Iterable[bytes], earlier: os.stat_result | None) -> tuple[int, bytes]:
    """Write all blocks, force them to the disk, and give their byte count and checksum."""
    checksum = hashlib.sha256()
    count = 0
    with _closing(path, handle):
        for block in blocks:
            checksum.update(block)
            count += len(block)
            with _telling(path):
                _write_all(handle, block)
        with _telling(path):
            if earlier is not None:
                _adopt(handle, earlier)
            os.fsync(handle)
            if os.fstat(handle).st_size != count:
                raise _differs(path)
    return count, checksum.digest()


def _write_all(handle: int, block: bytes) -> None:
    rest = memoryview(block)
    while rest:
        written = os.write(handle, rest[:_BLOCK])
        if written <= 0:
            raise OSError(errno.EIO, os.strerror(errno.EIO))
        rest = rest[written:]


def _adopt(handle: int, earlier: os.stat_result) -> None:
    """Give the new file the owner, group and permission bits of the earlier one."""
    if not hasattr(os, "fchmod") or not hasattr(os, "fchown"):
        return
    mine = os.fstat(handle)
    if (mine.st_uid, mine.st_gid) != (earlier.st_uid, earlier.st_gid):
        # Only an administrator may give a file away: whoever saves then owns it, as with a new file.
        with contextlib.suppress(PermissionError):
            os.fchown(handle, earlier.st_uid, earlier.st_gid)
    os.fchmod(handle, stat.S_IMODE(earlier.st_mode) & 0o777)


def _contents(path: Path) -> tuple[int, bytes]:
    """Read a file in blocks and give its byte count and checksum."""
    checksum = hashlib.sha256()
    count = 0
    handle = os.open(path, _READ)
    try:
        while block := os.read(handle, _BLOCK):
            checksum.update(block)
            count += len(block)
    finally:
        os.close(handle)
    return count, checksum.digest()


def _identity(path: Path) -> tuple[int, int, int]:
    status = path.stat()
    return status.st_dev, status.st_ino, status.st_size


def _sync_folder(folder: Path) -> None:
    """Force the new name to the disk, where the platform knows how."""
    if os.name == "nt":
        return
    try:
        handle = os.open(folder, os.O_RDONLY | os.O_DIRECTORY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
    except OSError as fault:
        if fault.errno not in _FOLDER_CANNOT_SYNC:
            raise


def _differs(path: Path, replaced: bool = False) -> WriteError:
    error = not_written(
        path, "what was read back differs from what was written", "choose another folder on another disk"
    )
    error.replaced = replaced
    return error


@contextlib.contextmanager
def _telling(path: Path, replaced: bool = False) -> Iterator[None]:
    """Turn a fault of the system into a `WriteError` with its sentence."""
    try:
        yield
    except WriteError:
        raise
    except OSError as fault:
        raise refused_by_system(path, fault, replaced) from fault


@contextlib.contextmanager
def _closing(path: Path, handle: int) -> Iterator[None]:
    """Close the file whatever happens; on the way out of a success, a failed close counts."""
    try:
        yield
    except BaseException:
        with contextlib.suppress(OSError):
            os.close(handle)
        raise
    with _telling(path):
        os.close(handle)
