"""File names made from ids: safe on every system, readable, no two alike."""

import hashlib
import re
import unicodedata
from collections import Counter
from collections.abc import Iterable

__all__ = ["file_stems"]

_LONGEST = 80
_RESERVED = re.compile(r"(con|prn|aux|nul|com\d|lpt\d)(\..*)?$", re.IGNORECASE)


def file_stems(ids: Iterable[str]) -> dict[str, str]:
    """Return a file stem for every id.

    Parameters
    ----------
    ids : iterable of str
        Frame or region ids; any text.

    Returns
    -------
    dict of str to str
        The id itself where it is a safe file name everywhere, otherwise its safe part with eight
        digits of its SHA-256. Ids that differ only in upper and lower case or in how accents are
        composed get the digits too, since some file systems hold them for one.
    """
    unique = list(dict.fromkeys(ids))
    alike = Counter(_folded(name) for name in unique)
    return {name: _stem(name, alone=alike[_folded(name)] == 1) for name in unique}


def _folded(name: str) -> str:
    return unicodedata.normalize("NFC", name).casefold()


def _stem(name: str, *, alone: bool) -> str:
    safe = re.sub(r"[^\w.-]+", "_", name).strip("._ ")
    safe = safe.encode("utf-8", "ignore")[:_LONGEST].decode("utf-8", "ignore")
    if name and safe == name and alone and not _RESERVED.match(name):
        return name
    digits = hashlib.sha256(name.encode("utf-8", "surrogatepass")).hexdigest()[:8]
    return f"{safe or 'id'}-{digits}" if not _RESERVED.match(safe) else f"id-{digits}"
