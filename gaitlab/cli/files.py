"""Files that commands write: in one step, and never over an existing one unasked."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from gaitlab.errors import RunFolderError, must


def write_new(path: Path, content: str | bytes, *, force: bool) -> None:
    """Writes a file in one step (all of it or nothing); an existing one only with `force`.

    Raises RunFolderError when the file exists or cannot be written; nothing is left half-written.
    """
    if not force and os.path.lexists(path):
        raise RunFolderError(must("output file", "one that does not exist yet", str(path), "add --force to replace it"))
    data = content.encode("utf-8") if isinstance(content, str) else content
    temporary = ""
    try:
        handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name[:50]}.")
        with os.fdopen(handle, "wb") as file:
            file.write(data)
        os.chmod(temporary, 0o666 & ~_umask())
        os.replace(temporary, path)
    except (OSError, ValueError) as fault:
        if temporary and os.path.exists(temporary):
            os.unlink(temporary)
        reason = (getattr(fault, "strerror", None) or str(fault)).lower()
        raise RunFolderError(must("output file", "writable", str(path), f"{reason}; choose another place")) from None


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask
