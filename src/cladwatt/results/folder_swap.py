"""Replacing a folder whole: written beside it, forced to disk, then swapped in by renaming.

For a folder ``results`` three names beside it belong to this module: ``.results.cladwatt-xxxx.new``
while a new one is being written, ``.old`` for the moment of the swap, ``.lock`` while a run
writes (xxxx are digits of the name's SHA-256). On Linux the new and the old folder change places
in one step, so a whole one stands under the name at every moment. Elsewhere, Windows and macOS
among them, and on file systems without that call, it takes two renamings. A run killed just
between them leaves the old folder whole under ``.old``, and :func:`settle` puts it back. Windows
does not rename a folder while a program holds a file in it open: after a few tries the swap gives
up and the old results stay.
"""

import errno
import hashlib
import os
import shutil
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path

from cladwatt.errors import ResultsError

__all__ = [
    "exclusive",
    "make_new",
    "plain_reason",
    "remove",
    "restore_if_missing",
    "settle",
    "swap",
    "sync_tree",
]

_PLAIN = {
    errno.ENOSPC: "the disk is full",
    errno.EDQUOT: "the disk quota is used up",
    errno.EROFS: "the file system is read-only",
    errno.EACCES: "no permission to write there",
    errno.EPERM: "no permission to write there",
    errno.EBUSY: "the folder is in use",
    errno.ENAMETOOLONG: "a file name is too long for this file system",
    errno.ENOTDIR: "a part of the path is a file, not a folder",
    errno.EIO: "the disk reports an error",
}


def plain_reason(error: OSError) -> str:
    """Return in plain words why the system refused."""
    return _PLAIN.get(error.errno or 0) or str(error.strerror or error)


def _beside(folder: Path, kind: str) -> Path:
    digits = hashlib.sha256(os.fsencode(folder.name)).hexdigest()[:8]
    return folder.with_name(f".{folder.name[:40]}.cladwatt-{digits}.{kind}")


def _lock(descriptor: int) -> bool:
    """Take the lock on an open file; False where another process holds it."""
    try:
        if sys.platform == "win32":
            import msvcrt

            msvcrt.locking(descriptor, msvcrt.LK_NBLCK, 1)
        else:
            import fcntl

            fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError as error:
        if error.errno in (errno.ENOLCK, errno.ENOSYS, errno.EOPNOTSUPP):
            return True  # a file system that knows no locks: go on without
        if error.errno in (errno.EAGAIN, errno.EACCES, errno.EDEADLK):
            return False
        raise
    return True


def _same_file(descriptor: int, path: Path) -> bool:
    try:
        return os.path.samestat(os.fstat(descriptor), path.stat())
    except FileNotFoundError:
        return False


@contextmanager
def exclusive(folder: Path) -> Iterator[None]:
    """Hold `folder` for one writer; the system lets go of it even when the process is killed.

    Raises
    ------
    ResultsError
        If another run is writing there.
    """
    path = _beside(folder, "lock")
    while True:
        descriptor = os.open(path, os.O_RDWR | os.O_CREAT, 0o666)
        if not _lock(descriptor):
            os.close(descriptor)
            raise ResultsError(
                f"{folder}: another run is writing there; wait for it or choose another folder"
            )
        # the last holder may have removed the file between our opening and locking it
        if _same_file(descriptor, path):
            break
        os.close(descriptor)
    try:
        yield
    finally:
        if sys.platform == "win32":  # an open file cannot be removed there
            os.close(descriptor)
            _unlink(path)
        else:
            _unlink(path)
            os.close(descriptor)


def _unlink(path: Path) -> None:
    # an empty lock file left behind locks nothing
    with suppress(OSError):
        path.unlink()


def settle(folder: Path) -> None:
    """Undo what a killed run left: put the old folder back, remove half-written ones.

    Notes
    -----
    Call it inside :func:`exclusive`, so that what is found belongs to no living run.
    """
    old = _beside(folder, "old")
    if old.exists() and not folder.exists():
        _rename(old, folder)
    remove(old)
    remove(_beside(folder, "new"))


def restore_if_missing(folder: Path) -> None:
    """Put the old folder back if a killed run left none under the name."""
    if not folder.exists() and _beside(folder, "old").exists():
        with exclusive(folder):
            settle(folder)


def make_new(folder: Path) -> Path:
    """Make and return the empty folder beside `folder` to be written into."""
    new = _beside(folder, "new")
    new.mkdir()
    return new


def remove(folder: Path) -> None:
    """Remove one of our own folders as far as the system lets us; the next run tries again."""
    if folder.exists():
        shutil.rmtree(folder, ignore_errors=True)


def sync_tree(folder: Path) -> None:
    """Force every file and folder of a tree to disk."""
    for root, _, names in os.walk(folder):
        for name in names:
            with (Path(root) / name).open("r+b") as file:
                os.fsync(file.fileno())
        _sync_folder(Path(root))


def _sync_folder(folder: Path) -> None:
    if sys.platform == "win32":
        return  # folders cannot be opened there; the system journals renamings itself
    descriptor = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(descriptor)
    except OSError as error:
        if error.errno not in (errno.EINVAL, errno.ENOTSUP):  # network shares may not know it
            raise
    finally:
        os.close(descriptor)


def swap(new: Path, folder: Path) -> None:
    """Put `new` in the place of `folder`, which may be missing, and remove the old one.

    Raises
    ------
    OSError
        If the system refuses; `folder` is then as it was.
    """
    if not folder.exists():
        _rename(new, folder)
    elif _exchange(new, folder):
        remove(new)
    else:
        old = _beside(folder, "old")
        _rename(folder, old)
        try:
            _rename(new, folder)
        except BaseException:
            if not folder.exists():
                _rename(old, folder)
            raise
        remove(old)
    _sync_folder(folder.parent)


def _rename(source: Path, target: Path) -> None:
    """Rename a folder; on Windows a virus scanner may hold it for a moment, so try again."""
    for attempt in range(6):
        try:
            source.rename(target)
            return
        except PermissionError:
            if sys.platform != "win32" or attempt == 5:
                raise
            time.sleep(0.2)


def _exchange(first: Path, second: Path) -> bool:
    """Let two folders change places in one step (Linux); False where that cannot be done."""
    if not sys.platform.startswith("linux"):
        return False
    import ctypes

    current_folder, exchange = -100, 2  # AT_FDCWD and RENAME_EXCHANGE of renameat2(2)
    call = getattr(ctypes.CDLL(None), "renameat2", None)
    if call is None:
        return False
    call.argtypes = (ctypes.c_int, ctypes.c_char_p, ctypes.c_int, ctypes.c_char_p, ctypes.c_uint)
    return bool(
        call(current_folder, os.fsencode(first), current_folder, os.fsencode(second), exchange) == 0
    )
