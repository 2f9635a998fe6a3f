"""Certificates as hostile text: strict JSON, canonical form, digest."""

from __future__ import annotations

import hashlib
import json
import re
from itertools import chain
from typing import Any

FORMAT = "ultibound-certificate/1"
LARGEST = 64 * 2**20
DEEPEST = 64
SURROGATE = re.compile("[\ud800-\udfff]")
KEYS = {"format", "claim", "results", "proof", "assumptions", "made_with", "digest"}


class Unreadable(Exception):
    """Not a certificate of this format."""


def read(data: bytes) -> dict[str, Any]:
    """The entries of a certificate; raises Unreadable with the byte offset or place."""
    if not data.strip():
        raise Unreadable("the file is empty; a certificate is one JSON object")
    if len(data) > LARGEST:
        raise Unreadable(f"{len(data)} bytes; the limit is {LARGEST}")
    try:
        text = data.decode("utf-8")
    except UnicodeDecodeError as why:
        raise Unreadable(f"byte {why.start}: not UTF-8") from None
    if text.startswith("\ufeff"):
        raise Unreadable("byte 0: a byte order mark; save without one")
    if "\0" in text:
        raise Unreadable(f"byte {data.index(0)}: a NUL")
    try:
        found = json.loads(
            text, object_pairs_hook=unique, parse_float=no_float, parse_constant=no_float, parse_int=small
        )
    except RecursionError:
        raise Unreadable(f"nested more than {DEEPEST} deep") from None
    except json.JSONDecodeError as why:
        offset = len(text[: why.pos].encode("utf-8", "replace"))
        raise Unreadable(f"byte {offset}, line {why.lineno}: {why.msg}") from None
    except ValueError as why:
        raise Unreadable(str(why)) from None
    shallow(found)
    if not isinstance(found, dict):
        raise Unreadable("a certificate is one JSON object")
    if "format" in found and found["format"] != FORMAT:
        raise Unreadable(f"format {str(found['format'])[:40]!r}; this checker reads {FORMAT!r}")
    if set(found) != KEYS:
        odd = ", ".join(sorted(str(k)[:40] for k in set(found) ^ KEYS))
        raise Unreadable(f"entries missing or unknown: {odd}")
    return found


def unique(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    found = dict(pairs)
    if len(found) != len(pairs):
        twice = next(k for k, _ in pairs if sum(k == j for j, _ in pairs) > 1)
        raise ValueError(f"key {twice[:60]!r} stands twice")
    return found


def no_float(text: str) -> Any:
    raise ValueError(f"{text[:40]}: a number with a point or exponent, or not finite; proved numbers are texts")


def small(text: str) -> int:
    if len(text) > 12:
        raise ValueError(f"{text[:20]}…: a whole number that long; proved numbers are texts")
    return int(text)


def shallow(found: Any) -> None:
    """Bounds nesting, and refuses what UTF-8 cannot hold, without recursion."""
    level, depth = [found], 1
    while level:
        if depth > DEEPEST:
            raise Unreadable(f"nested more than {DEEPEST} deep")
        if any(SURROGATE.search(x) for x in level if isinstance(x, str)):
            raise Unreadable("a lone surrogate in a text")
        tables, lists = [x for x in level if isinstance(x, dict)], [x for x in level if isinstance(x, list)]
        level = [*chain.from_iterable(tables), *chain.from_iterable(x.values() for x in tables)]
        level += chain.from_iterable(lists)
        depth += 1


def canonical(entries: dict[str, Any]) -> bytes:
    """Sorted keys, no white space but a newline after each top-level entry and each line of the proof."""
    compact, parts = json.JSONEncoder(ensure_ascii=False, sort_keys=True, separators=(",", ":")).encode, []
    for key in sorted(entries):
        value = entries[key]
        if key == "proof" and isinstance(value, list):
            text = "[" + ",".join(compact(line) + "\n" for line in value) + "]"
        else:
            text = compact(value)
        parts.append(f"{compact(key)}:{text}\n")
    return ("{" + ",".join(parts) + "}").encode()


def digest(entries: dict[str, Any]) -> str:
    return hashlib.sha256(canonical({k: v for k, v in entries.items() if k != "digest"})).hexdigest()
