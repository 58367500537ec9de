"""Faults of a body in a field engineer's words, each with the place of its field."""

from collections.abc import Iterable, Mapping
from difflib import get_close_matches
from functools import lru_cache
from typing import Any

from faultloop.exchange import fields, requests
from faultloop.rules import sheets, strict

_WORDS = {
    "missing": "this field is required",
    "float_type": "a plain number is expected: decimal point, no unit, no quotes; "
    "for an over-range display send an object with value and bound",
    "finite_number": "a finite number is expected; for an over-range display send an object with value and bound",
    "bool_type": "true or false is expected",
    "string_type": "text in quotes is expected",
    "model_type": "an object is expected",
    "model_attributes_type": "an object is expected",
    "dict_type": "an object is expected",
    "list_type": "a list is expected",
    "union_tag_not_found": "state which kind it is",
    "string_pattern_mismatch": "this text is not of the expected form",
}


@lru_cache(maxsize=1)
def _known_fields() -> list[str]:
    models = [m for module in (requests, fields, sheets) for m in vars(module).values()]
    closed = [m for m in models if isinstance(m, type) and issubclass(m, fields.Closed | strict.Sheet)]
    return sorted({name for model in closed for name in model.model_fields})


@lru_cache(maxsize=1024)
def _nearest(name: str) -> str:
    if name in _known_fields():
        return "a field of this name belongs to another part of a request"
    near = get_close_matches(name, _known_fields(), n=1, cutoff=0.75)
    return f"did you mean {near[0]}?" if near else "check the spelling and the unit in its name"


def told(error: Mapping[str, Any]) -> str:
    """What is wrong with a field, and what is expected there."""
    kind, context = error["type"], error.get("ctx", {})
    if kind == "extra_forbidden":
        if error["loc"][:1] == ("query",):
            return "no such parameter here; the document at /openapi.json names those that there are"
        return f"no such field here; {_nearest(str(error['loc'][-1]))}"
    if kind == "union_tag_invalid":
        return f"expected one of {context.get('expected_tags', '')}"
    if kind == "value_error":
        return str(context.get("error", "this value cannot be used"))
    if kind in _WORDS:
        return _WORDS[kind]
    usual: str = error["msg"]
    return usual.removeprefix("Input ").replace("should", "must", 1)


def pointer(location: Iterable[Any], body: Any, *, absent: bool) -> str:
    """JSON Pointer of a fault; names that only tell which kind of a union was tried are left out.

    The last name may be one that the body lacks only where the fault is that it is `absent`.
    """
    parts, here = list(location), body
    kept: list[str] = []
    for at, part in enumerate(parts):
        if (isinstance(here, dict) and part in here) or (
            isinstance(here, list) and isinstance(part, int) and part < len(here)
        ):
            here = here[part]
        elif not absent or at < len(parts) - 1 or not isinstance(here, dict):
            continue
        kept.append(str(part).replace("~", "~0").replace("/", "~1"))
    return "".join(f"/{part}" for part in kept)
