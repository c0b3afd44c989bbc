"""The JSON in a file of ours: whatever is wrong with the text itself gives one sentence."""

import json
import math
import re
from collections.abc import Mapping
from typing import Any

from app.model.checks import shown
from app.model.errors import FileError
from app.model.versions import migrate

LARGEST = 200 * 1024 * 1024


def raw_object(data: bytes, key: str, what: str) -> dict[str, Any]:
    """The JSON object in a file of ours, brought up to the current version; `key` marks what it is."""
    if len(data) > LARGEST:
        raise FileError(f"has {len(data) >> 20} MiB, allowed are at most {LARGEST >> 20} MiB.")
    text = _text(data)
    try:
        raw = json.loads(text, object_pairs_hook=_once, parse_float=_finite, parse_constant=_no_constant)
    except json.JSONDecodeError as error:
        raise FileError(_where(text, error)) from None
    except RecursionError:
        raise FileError("is nested too deeply to be a file of ours.") from None
    except FileError:
        raise
    except ValueError:
        raise FileError("holds a number with too many digits.") from None
    if not isinstance(raw, dict) or key not in raw:
        raise FileError(f'is JSON, but no {what}: it has no key "{key}".')
    return migrate(raw, key)


def _text(data: bytes) -> str:
    if not data.strip():
        raise FileError("is empty.")
    if b"\x00" in data[:4096]:
        raise FileError("is not text in UTF-8, so it is no file of ours.")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise FileError(f"is not text in UTF-8: byte {error.start + 1} is foreign to it.") from None


_HALF = re.compile(r"(-|t|tr|tru|f|fa|fal|fals|n|nu|nul|\.|[eE][+-]?|\\u.{0,3}|u.{0,3})?\s*")


def _where(text: str, error: json.JSONDecodeError) -> str:
    place = f"line {error.lineno}, column {error.colno}"
    half = error.msg.startswith("Unterminated string") or _HALF.fullmatch(text, error.pos)
    if half and error.msg != "Extra data" and text.lstrip().startswith("{"):
        return f"is cut off: it ends in the middle, after {place}."
    return f"is not JSON: it stops making sense at {place}."


def _once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    made = dict(pairs)
    if len(made) != len(pairs):
        seen: set[str] = set()
        twice = next(k for k, _ in pairs if k in seen or seen.add(k))  # type: ignore[func-returns-value]
        raise FileError(f"says {shown(twice)} twice in one place{_beside(made)}, allowed is once.")
    return made


def _beside(made: Mapping[str, Any]) -> str:
    return f" ({shown(made['id'])})" if isinstance(made.get("id"), str) else ""


def _finite(written: str) -> float:
    value = float(written)
    if not math.isfinite(value):
        raise FileError(f"holds the number {shown(written)}, allowed are finite numbers.")
    return value


def _no_constant(written: str) -> float:
    raise FileError(f"holds {written}, allowed are finite numbers.")
