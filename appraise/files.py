"""Files are written whole or not at all."""

import os
import secrets
import shutil
from collections.abc import Mapping
from contextlib import suppress
from pathlib import Path

from appraise.errors import FileProblem


def check_target(path: Path) -> None:
    """Refuse, before any work is done, a target that can never be written.

    Raises FileProblem for a folder, for a device or pipe (replacing one would destroy it) and for a target
    below something that is not a folder. A missing folder is no fault: it is made when writing.
    """
    if path.is_dir():
        raise FileProblem(f"{path}: cannot be written, it is a folder")
    if path.exists() and not path.is_file():
        raise FileProblem(f"{path}: cannot be written, it is not a regular file")
    above = next(parent for parent in path.absolute().parents if parent.exists())
    if not above.is_dir():
        raise FileProblem(f"{path}: cannot be written, {above} is not a folder")
    if not os.access(above, os.W_OK | os.X_OK):
        raise FileProblem(f"{path}: cannot be written, folder {above} is read-only")


def write_whole(contents: Mapping[Path, bytes]) -> None:
    """Write several files, each complete, or none.

    Every content goes to a temporary file beside its target first; only when all of them are on the disk do
    they take their names. An existing target keeps its permissions, and a link stays a link.
    Raises FileProblem.
    """
    for path in contents:
        check_target(path)
    waiting: dict[Path, Path] = {}
    try:
        for path, data in contents.items():
            target = path.resolve()
            waiting[path] = target.with_name(f".{target.name}.{secrets.token_hex(4)}.tmp")
            _write_through(waiting[path], target, data)
        for path, temporary in waiting.items():
            os.replace(temporary, path.resolve())
    except OSError as error:
        raise FileProblem(f"{path}: cannot be written, {error.strerror or error}") from error
    finally:
        for temporary in waiting.values():
            with suppress(OSError):
                temporary.unlink(missing_ok=True)


def _write_through(temporary: Path, target: Path, data: bytes) -> None:
    temporary.parent.mkdir(parents=True, exist_ok=True)
    with temporary.open("xb") as file:
        file.write(data)
        file.flush()
        os.fsync(file.fileno())
    if target.exists():
        shutil.copymode(target, temporary)
