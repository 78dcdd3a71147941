"""Write a file so that a reader finds the old one or the new one, never half of either."""

import os
import tempfile
from pathlib import Path

__all__ = ["write_atomically"]


def write_atomically(path: Path, data: bytes) -> None:
    """Write `data` beside `path`, then put it in its place in one step.

    Raises
    ------
    OSError
        If it cannot be written; what stood at `path` is untouched then.
    """
    handle, name = tempfile.mkstemp(prefix=f".{path.name[:40]}.", dir=path.parent)
    temporary = Path(name)
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        if path.exists():
            temporary.chmod(path.stat().st_mode & 0o777)
        else:
            temporary.chmod(0o644)
        temporary.replace(path)
    except BaseException:
        temporary.unlink(missing_ok=True)
        raise
