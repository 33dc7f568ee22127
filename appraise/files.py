"""Files are written whole or not at all."""

import os
import secrets
import shutil
from collections.abc import Mapping
from contextlib import suppress
from itertools import count
from pathlib import Path

from appraise.errors import FileProblem

_HELD = (5, 32, 33)  # of Windows: access denied, sharing violation, lock violation
_NAMED_BY = {".xlsx": "--out", ".json": "--json"}


def check_target(path: Path) -> None:
    """Refuse, before any work is done, a target that can never be written.

    Raises FileProblem for a folder, for a device or pipe (replacing one would destroy it), for a file that
    another program holds open and for a target below something that is not a folder. A missing folder is no
    fault: it is made when writing.
    """
    if path.is_dir():
        raise FileProblem(f"{path}: cannot be written, it is a folder")
    if path.exists() and not path.is_file():
        raise FileProblem(f"{path}: cannot be written, it is not a regular file")
    if path.exists() and not (path.stat().st_mode & 0o222 and os.access(path, os.W_OK)):
        raise FileProblem(f"{path}: cannot be written, it is read-only")
    _refuse_held(path)
    above = next(parent for parent in path.absolute().parents if parent.exists())
    if not above.is_dir():
        raise FileProblem(f"{path}: cannot be written, {above} is not a folder")
    if not os.access(above, os.W_OK | os.X_OK):
        raise FileProblem(f"{path}: cannot be written, folder {above} is read-only")


def write_whole(contents: Mapping[Path, bytes]) -> None:
    """Write several files, each complete, or none; what fails leaves no folder that it made.

    Every content goes to a temporary file beside its target first; only when all of them are on the disk do
    they take their names. Where that fails or is interrupted half-way, those that had taken theirs give them
    back to the files that were there. An existing target keeps its permissions, and a link stays a link.
    Raises FileProblem.
    """
    for path in contents:
        check_target(path)
    made: list[Path] = []
    try:
        _write_all(contents, made)
    except BaseException:
        for folder in reversed(made):
            with suppress(OSError):  # somebody else put something into it
                folder.rmdir()
        raise


def _write_all(contents: Mapping[Path, bytes], made: list[Path]) -> None:
    """Write the files; the folders made on the way go into `made`, the outer ones first."""
    waiting: dict[Path, Path] = {}
    kept: dict[Path, Path] = {}
    begun: list[Path] = []
    try:
        for path, data in contents.items():
            target = path.resolve()
            _make_folder(target.parent, made)
            waiting[path] = _beside(target, "tmp")
            _write_through(waiting[path], target, data)
        for path in contents:
            _keep(path.resolve(), kept)
        for path, temporary in waiting.items():
            _take_name(temporary, path, begun)
    except BaseException as error:
        _restore(begun, kept)
        if isinstance(error, OSError):
            raise FileProblem(f"{path}: cannot be written, {error.strerror or error}") from error
        raise
    finally:
        for temporary in (*waiting.values(), *kept.values()):
            with suppress(OSError):
                temporary.unlink(missing_ok=True)


def _make_folder(folder: Path, made: list[Path]) -> None:
    for one in reversed([one for one in (folder, *folder.parents) if not one.exists()]):
        with suppress(FileExistsError):
            one.mkdir()
            made.append(one)


def _take_name(temporary: Path, path: Path, begun: list[Path]) -> None:
    """Put the new file in the place of the target. A fault leaves the old one, an interruption either."""
    begun.append(path.resolve())
    try:
        os.replace(temporary, begun[-1])
    except OSError as error:
        begun.pop()
        if _is_held(error) and path.exists():
            raise _held(path) from error
        raise


def _refuse_held(path: Path) -> None:
    """On Windows a file that a program holds open cannot be renamed, not even to the name that it has."""
    if path.exists():
        target = path.resolve()
        try:
            os.rename(target, target)
        except OSError as error:
            if _is_held(error):
                raise _held(path) from error


def _is_held(error: OSError) -> bool:
    return isinstance(error, PermissionError) and getattr(error, "winerror", None) in _HELD


def _held(path: Path) -> FileProblem:
    """What to do about a file that cannot be replaced, with a name that is still free."""
    numbered = (path.with_stem(f"{path.stem}-{number}") for number in count(2))
    free = next(other for other in numbered if not os.path.lexists(other))
    option = _NAMED_BY.get(path.suffix.lower(), "another name:")
    told = "seems to be open in another program; the old file is unchanged"
    return FileProblem(f"{path}: cannot be written, it {told}. Close it, or write with {option} {free}")


def _beside(target: Path, ending: str) -> Path:
    """A name that no other file has, in the folder of the target."""
    return target.with_name(f".{target.name}.{secrets.token_hex(4)}.{ending}")


def _keep(target: Path, kept: dict[Path, Path]) -> None:
    """Give an existing target a second name; where the disk knows no such thing, a copy."""
    if not target.exists():
        return
    kept[target] = _beside(target, "old")
    try:
        os.link(target, kept[target])
    except OSError:
        shutil.copy2(target, kept[target])


def _restore(begun: list[Path], kept: dict[Path, Path]) -> None:
    """Give every target back what it was; a kept file that cannot go back stays where it is."""
    for target in begun:
        with suppress(OSError):
            old = kept.pop(target, None)
            if old is None:
                target.unlink(missing_ok=True)
            else:
                os.replace(old, target)
                old.unlink(missing_ok=True)  # two names of one file, where nothing had been replaced


def _write_through(temporary: Path, target: Path, data: bytes) -> None:
    with temporary.open("xb") as file:
        file.write(data)
        file.flush()
        os.fsync(file.fileno())
    if target.exists():
        shutil.copymode(target, temporary)
