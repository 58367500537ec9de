"""A judged batch -> its answer in compact rows, as a JSON body or as CSV beside the rows as they came."""

import csv
import io
from collections import Counter
from collections.abc import Mapping, Sequence
from typing import Any

from faultloop import __version__
from faultloop.exchange.compact import CHECK_IDS, Compact, Finding
from faultloop.exchange.judging import Judged
from faultloop.exchange.patterns import Rows
from faultloop.exchange.rows import Told
from faultloop.protection.catalogue import catalogue
from faultloop.rules.loader import LoadedRules

Body = dict[str, Any]
_NOTHING = ("", "", "", "")


def answer(judged: Judged, id: str, reading: Body, input_digest: str) -> Body:  # noqa: A002
    """The answer of a batch; no sentence is made beyond what held and refused rows must be told."""
    places = range(len(judged.found))
    status = [judged.rows.of(at).status for at in places]
    return {
        "id": id,
        "counts": judged.counts,
        "verdicts": dict(Counter(judged.verdict(at) for at in places)),
        "urgencies": dict(Counter(judged.urgency(at) for at in places)),
        "reading": reading,
        "repeated_points": [_repeated(judged, places) for places in judged.repeated()],
        "checks": CHECK_IDS,
        "results": [result_row(judged, at) for at in places if judged.found[at] is not None],
        "held": [held_row(judged, at) for at in places if status[at] == "held"],
        "refused": [refused_row(judged, at) for at in places if status[at] == "refused"],
        "provenance": provenance(judged, input_digest),
    }


def provenance(judged: Judged, input_digest: str, editions: Mapping[str, LoadedRules] | None = None) -> Body:
    """By what a batch was decided."""
    return {
        "engine": __version__,
        "rules": [
            {"asked": asked, "rules": rules.rules.key, "rules_digest": rules.digest}
            for asked, rules in judged.rules_asked(editions or {}).items()
        ],
        "devices_digest": catalogue().digest,
        "input_digest": input_digest,
    }


def restored(rows: Rows, stored: Mapping[str, Any]) -> Judged:
    """A batch as its stored answer has it, without judging again."""
    by_number = {row["row"]: row for row in stored["results"]}
    places = [stored["checks"].index(check) if check in stored["checks"] else None for check in CHECK_IDS]
    found: list[Compact | None] = []
    for number in rows.numbers:
        row = by_number.get(number)
        if row is None:
            found.append(None)
            continue
        findings = tuple(None if place is None else _finding(row["findings"][place]) for place in places)
        found.append(Compact(row["verdict"], row["urgency"], row.get("decided_by"), findings))
    return Judged(rows, found)


def _finding(told: list[Any] | None) -> Finding | None:
    return None if told is None else (told[0], told[1], told[2], told[3])


def _repeated(judged: Judged, places: Sequence[int]) -> Body:
    numbers = [judged.rows.numbers[at] for at in places]
    return {"point_id": judged.rows.names[places[0]].id, "rows": sorted(numbers), "governing_row": numbers[0]}


def stored_row(judged: Judged, at: int) -> Body:
    """A row as the batch's answer has it."""
    status = judged.rows.of(at).status
    return {"judged": result_row, "held": held_row, "refused": refused_row}[status](judged, at)


def _head(judged: Judged, at: int) -> Body:
    point = judged.rows.names[at].id
    return {"row": judged.rows.numbers[at], "point_id": point} if point else {"row": judged.rows.numbers[at]}


def result_row(judged: Judged, at: int) -> Body:
    """A judged row."""
    found, head = judged.found[at], _head(judged, at)
    assert found is not None
    head["verdict"], head["urgency"] = found.verdict, found.urgency
    if found.decided_by is not None:
        head["decided_by"] = found.decided_by
    head["findings"] = found.findings
    return head


def held_row(judged: Judged, at: int) -> Body:
    """A row that waits for an answer."""
    told, prefix = judged.rows.of(at), judged.rows.prefix(at)
    questions = [{**_where(q.where, prefix), "raw": q.raw, "question": q.question} for q in told.questions]
    return {**_head(judged, at), "verdict": "undetermined", "urgency": told.urgency, "questions": questions}


def refused_row(judged: Judged, at: int) -> Body:
    """A row that cannot be read as a point."""
    told, prefix = judged.rows.of(at), judged.rows.prefix(at)
    errors = [{**_where(f.where, prefix), "code": f.code, "detail": f.detail} for f in told.faults]
    return {**_head(judged, at), "verdict": "undetermined", "urgency": told.urgency, "errors": errors}


def _where(where: str, prefix: str) -> Body:
    """A column's name, or a JSON Pointer into the body."""
    if prefix:
        return {"pointer": prefix + where}
    return {"pointer": where} if where.startswith("/") else {"column": where} if where else {}


def answer_header() -> list[str]:
    """Columns of the answers."""
    parts = ("verdict", "value", "limit", "reason")
    told = [f"{check.replace('-', '_')}_{part}" for check in CHECK_IDS for part in parts]
    return ["row", "status", "verdict", "urgency", "decided_by", "questions", *told]


def answer_csv(judged: Judged) -> str:
    """The rows as they came with their answers beside them (RFC 4180); no cell can act as a formula."""
    rows, own = judged.rows, answer_header()
    # A heading of the caller's that is also one of the answer's keeps its text and is told apart.
    shown = [_guarded(f"given_{name}" if name in own else name) for name in rows.header]
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\r\n")
    writer.writerow([*shown, *own])
    writer.writerows([*map(_guarded, rows.cells(at)), *_answer_cells(judged, at)] for at in range(len(judged.found)))
    return out.getvalue()


def _answer_cells(judged: Judged, at: int) -> list[Any]:
    found, number = judged.found[at], judged.rows.numbers[at]
    if found is None:
        told = judged.rows.of(at)
        head = [number, told.status, "undetermined", told.urgency, "", _guarded(asked(told))]
        return head + list(_NOTHING) * len(CHECK_IDS)
    cells = [number, "judged", found.verdict, found.urgency, found.decided_by, ""]
    for finding in found.findings:
        cells += finding or _NOTHING
    return cells


def asked(told: Told) -> str:
    """What holds or refuses a row, in one line."""
    held = [f"{q.where}: {q.question}" for q in told.questions]
    return "; ".join(held + [f"{f.where}: {f.detail}" if f.where else f.detail for f in told.faults])


def _guarded(value: str) -> str:
    return f"'{value}" if value[:1] in ("=", "+", "-", "@", "\t", "\r") else value
