"""Records to store."""

import uuid
from typing import Any

from faultloop.records.tables import Record


def record(id: str | None = None, **over: Any) -> Record:  # noqa: A002
    """One record; whatever is named is put in place of the usual value."""
    usual: dict[str, Any] = {
        "id": id or str(uuid.uuid4()),
        "input_digest": "a" * 64,
        "verdict": "pass",
        "urgency": "none",
        "rules": "bs-7671:2018",
        "label": "Bench 3",
        "engine": "0.1.0",
        "rules_digest": "b" * 64,
        "devices_digest": "c" * 64,
        "request": b'{"x":1}',
        "answer": b'{"y":2}',
    }
    return Record(**{**usual, **over})
