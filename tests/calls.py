"""Calls of the program inside a test, and what they leave."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path


@dataclass(frozen=True)
class Answer:
    """What one call came to."""

    status: int
    out: str
    err: str


Call = Callable[..., Answer]


def contents(folder: Path) -> dict[str, bytes]:
    """Every file below a folder with its content, hidden ones too."""
    return {str(path.relative_to(folder)): path.read_bytes() for path in folder.rglob("*") if path.is_file()}
