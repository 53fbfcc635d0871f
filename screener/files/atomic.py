"""Files that are written whole or not at all."""

from __future__ import annotations

import os
import tempfile
from collections.abc import Iterable, Mapping
from contextlib import suppress
from pathlib import Path

from screener.errors import OutputError, Problem


def write(path: str | Path, content: bytes | str, *, force: bool) -> None:
    """Write one file; as `write_all`."""
    write_all({path: content}, force=force)


def write_all(items: Mapping[str | Path, bytes | str], *, force: bool) -> None:
    """Write every file beside its place, and only then move them all into place.

    items : content for each path; text becomes UTF-8
    force : replace a file that exists
    Raises OutputError, with every target that cannot be written, before anything is written: it exists and
    `force` is off, it is not a file, its folder does not exist; or when the system refuses to write.
    """
    check(items, force=force)
    ready: list[tuple[str, str | Path]] = []
    path: str | Path = ""
    try:
        for path, content in items.items():
            handle, temporary = tempfile.mkstemp(prefix=".", suffix=".tmp", dir=Path(path).parent)
            ready.append((temporary, path))
            with os.fdopen(handle, "wb") as file:
                file.write(content.encode() if isinstance(content, str) else content)
                file.flush()
                os.fsync(handle)
            os.chmod(temporary, 0o666 & ~_umask())
        for temporary, path in ready:
            os.replace(temporary, path)
    except OSError as error:
        raise OutputError([Problem(str(path), 0, 0, f"could not be written: {error.strerror}")]) from error
    finally:
        for temporary, _ in ready:
            with suppress(FileNotFoundError):
                os.unlink(temporary)


def check(paths: Iterable[str | Path], *, force: bool) -> None:
    """Raise OutputError with every target that `write_all` would refuse."""
    problems = [problem for path in paths for problem in _refusals(Path(path), force)]
    if problems:
        raise OutputError(problems)


def _refusals(path: Path, force: bool) -> list[Problem]:
    if path.is_file() and not force:
        return [Problem(str(path), 0, 0, "exists already", "--force replaces it")]
    if path.exists() and not path.is_file():
        return [Problem(str(path), 0, 0, "is not a file", "name a file")]
    if not path.parent.is_dir():
        return [Problem(str(path), 0, 0, f"there is no folder {path.parent}", "make it first")]
    return []


def _umask() -> int:
    """Mask that an ordinary open() would apply, which mkstemp does not."""
    mask = os.umask(0o077)
    os.umask(mask)
    return mask
