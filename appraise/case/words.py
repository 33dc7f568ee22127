"""How faults speak: what was given, what is allowed, which known word is nearest; text or none."""

from collections.abc import Iterable, Mapping
from difflib import get_close_matches

from appraise.errors import CaseError, Problem

_LONGEST = 60  # characters of a given text that a fault repeats


def shown(value: object) -> str:
    """A value as a user would recognise it from the file, kept short."""
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, list | tuple):
        return "a list"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        clean = " ".join(value.split()) if len(value) < 10 * _LONGEST else value[:_LONGEST]
        return f'"{clean if len(clean) <= _LONGEST else clean[: _LONGEST - 3] + "..."}"'
    if isinstance(value, int) and value.bit_length() > 200:
        return "a whole number of very many digits"
    return value.isoformat() if hasattr(value, "isoformat") else f"{value}"


def said(given: object, allowed: str) -> str:
    """The one form of a fault: what was given, what is allowed."""
    return f"{shown(given)} given; allowed: {allowed}"


def listed(names: Iterable[str]) -> str:
    """Names in a row."""
    return ", ".join(names) or "none"


def nearest(name: str, known: Iterable[str], word: str = "key") -> str:
    """Name the known word next to a wrong one, or all of them when none is near."""
    by_lower = {known_name.lower(): known_name for known_name in known}
    near = get_close_matches(name.lower(), by_lower, n=1, cutoff=0.6)
    if near:
        return f"nearest known {word}: {by_lower[near[0]]}"
    return f"known {word}s: {listed(by_lower.values())}"


def utf8_text(content: bytes, name: str, line: str) -> str:
    """A file's text. Raises CaseError naming the first `line` (what the file calls one) that is not UTF-8."""
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        number = content[: error.start].count(b"\n") + 1
        raise CaseError([Problem(f"{name} {line} {number}", "not UTF-8; allowed: text in UTF-8")]) from None
