"""Files of a run folder, each replaced in one step so that a reader sees the old one or the new one."""

from __future__ import annotations

import os
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TextIO

from gaitlab.errors import RunFolderError


@contextmanager
def replaced_file(path: Path) -> Iterator[TextIO]:
    """A text file that takes the place of `path` when all of it is written. Raises RunFolderError when it cannot be."""
    temporary = ""
    try:
        handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.")
        with os.fdopen(handle, "w", encoding="utf-8", newline="") as file:
            yield file
        os.chmod(temporary, 0o644)
        os.replace(temporary, path)
    except OSError as error:
        raise RunFolderError(
            f"{path} cannot be written ({error.strerror or error}); usual fix: make room or use --out"
        ) from error
    finally:
        if temporary and os.path.exists(temporary):
            os.unlink(temporary)
