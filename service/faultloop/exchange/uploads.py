"""An upload, as its bytes and parameters came -> a batch judged; the same path for a new one and for a stored one."""

import json
from dataclasses import dataclass
from typing import Any, Literal

import orjson

from faultloop.digests import digest, sha256
from faultloop.exchange.batches import BatchQuery
from faultloop.exchange.columns import FileRefused
from faultloop.exchange.patterns import Rows, body_rows, file_rows, refuse_defaults
from faultloop.exchange.rows import NamedTwice, Stored, named_twice
from faultloop.exchange.tables import MOST_ROWS, decoded, read_table

Body = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Upload:
    """What a caller sent, unchanged: enough to read and judge it again, with the stored rule sets that it may name."""

    format: Literal["csv", "json"]
    content: bytes
    query: BatchQuery
    stored: Stored = None

    @property
    def input_digest(self) -> str:
        """SHA-256 over the bytes as they came and the parameters by which they are to be read."""
        return digest({"format": self.format, "content": sha256(self.content), **self.parameters})

    @property
    def parameters(self) -> Body:
        """The parameters that were set."""
        return self.query.model_dump(mode="json", exclude_unset=True)


@dataclass(frozen=True, slots=True)
class Read:
    """The rows of an upload, and how they were read."""

    rows: Rows
    reading: Body


def read_upload(upload: Upload) -> Read:
    """Read an upload; nothing is judged yet."""
    return _read_file(upload) if upload.format == "csv" else _read_body(upload)


def defaults_of(told: list[str]) -> dict[str, str]:
    """Defaults written column=value."""
    pairs = [text.partition("=") for text in told]
    for name, equals, _ in pairs:
        if not equals or not name:
            raise FileRefused("write a default as column=value, for instance earthing=TN-S")
    return {name.strip(): value for name, _, value in pairs}


def _read_file(upload: Upload) -> Read:
    query, defaults = upload.query, defaults_of(upload.query.default)
    refuse_defaults(defaults)
    table = read_table(decoded(upload.content), query.decimal, query.ignore)
    reading: Body = {
        "format": "csv",
        "separator": table.separator,
        "decimal": table.decimal,
        "blank_lines": table.blank_lines,
        "ignored_columns": table.ignored,
        "defaults": defaults,
    }
    return Read(file_rows(table, defaults, upload.stored), reading)


def _read_body(upload: Upload) -> Read:
    body, marked = parsed(upload.content)
    if not isinstance(body, dict) or set(body) - {"defaults", "rows"} or not isinstance(body.get("rows"), list):
        raise FileRefused("a batch is an object with rows (a list of assessment requests) and perhaps defaults")
    defaults, rows = body.get("defaults", {}), body["rows"]
    if named_twice(defaults) or isinstance(body, NamedTwice):
        raise FileRefused("a field stands twice in one object: which of the two is meant?")
    if not isinstance(defaults, dict):
        raise FileRefused("defaults are an object: parts of an assessment request")
    if len(rows) > MOST_ROWS:
        raise FileRefused(f"the batch has more than {MOST_ROWS} rows: send it in parts")
    reading: Body = {"format": "json", "blank_lines": 0, "ignored_columns": [], "defaults": defaults}
    return Read(body_rows(rows, defaults, marked=marked, stored=upload.stored), reading)


class NotJson(ValueError):
    """The body is not JSON."""


def parsed(content: bytes) -> tuple[Any, bool]:
    """The JSON value of a body; whether objects in which a name stands twice had to be looked for and are marked.

    Both texts hold the same strings, so they hold as many colons unless a name was dropped (or a colon was
    escaped); only then the body is walked.
    """
    try:
        value = orjson.loads(content)
        known = orjson.dumps(value)
    except (orjson.JSONDecodeError, orjson.JSONEncodeError, RecursionError):
        raise NotJson from None
    if content.count(b":") == known.count(b":"):
        return value, False
    return json.loads(content, object_pairs_hook=_marked), True


def _marked(pairs: list[tuple[str, Any]]) -> Body:
    found = dict(pairs)
    return found if len(found) == len(pairs) else NamedTwice(found)
