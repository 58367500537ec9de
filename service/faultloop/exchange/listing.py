"""Judged rows as a table that can be read in a terminal."""

from collections import Counter
from collections.abc import Sequence
from textwrap import fill
from typing import Any

from faultloop.assessment.standing import Verdict
from faultloop.assessment.urgency import Urgency
from faultloop.exchange.columns import FileRow

_URGENCIES, _VERDICTS = Urgency.codes(), Verdict.codes()


def table(rows: Sequence[FileRow]) -> str:
    """One line a point: where it is, the verdict, the urgency, and what decides it."""
    lines = [f"{'point':<10} {'label':<30} {'verdict':<21} {'urgency':<9} what decides"]
    lines += ["-" * 110]
    for row in rows:
        name = (row.raw.get("point_id") or f"row {row.number}")[:10]
        label = (row.raw.get("label") or "")[:30]
        verdict, urgency = (row.answer["verdict"], row.answer["urgency"]) if row.answer else (row.status, row.urgency)
        lines.append(f"{name:<10} {label:<30} {verdict:<21} {urgency:<9} {_decides(row)}")
    return "\n".join([*lines, "", reconciled(rows)])


def reconciled(rows: Sequence[FileRow]) -> str:
    """Counts that add up: rows in = judged + held + refused."""
    status = Counter(row.status for row in rows)
    verdicts = Counter(row.answer["verdict"] for row in rows if row.answer)
    told = ", ".join(f"{count} {verdict}" for verdict, count in sorted(verdicts.items()))
    return (
        f"{len(rows)} rows in = {status['judged']} judged ({told}) + {status['held']} held"
        f" + {status['refused']} refused"
    )


def _decides(row: FileRow) -> str:
    if row.answer is None:
        return (row.questions + row.faults)[0]
    worst = deciding(row.answer)
    return f"{worst['check']}: {worst['reason']}" if worst and row.answer["verdict"] != "pass" else ""


def deciding(answer: dict[str, Any]) -> dict[str, Any] | None:
    """The counted finding that gives the verdict."""
    counted = [f for f in answer["findings"] if f["counts"] and f["verdict"] == answer["verdict"]]
    return counted[0] if counted else None


def most_urgent(rows: Sequence[FileRow], count: int = 3) -> str:
    """The most urgent points, each with its arithmetic, the question that would settle it and its conditions."""
    judged = [row for row in rows if row.answer]
    judged.sort(key=lambda row: _rank(row.answer or {}))
    told = []
    for row in judged[:count]:
        answer = row.answer or {}
        finding = deciding(answer) or {}
        name = row.raw.get("label") or row.raw.get("point_id") or f"row {row.number}"
        told.append(f"{name}: {answer['verdict']}, {answer['urgency']}")
        told += [fill(text, 108, initial_indent="  ", subsequent_indent="  ") for text in _sentences(finding)]
    return "\n".join(told)


def _rank(answer: dict[str, Any]) -> tuple[int, int]:
    return _URGENCIES[answer["urgency"]], _VERDICTS[answer["verdict"]]


def _sentences(finding: dict[str, Any]) -> list[str]:
    named = [("", "explanation"), ("To settle it: ", "settled_by"), ("Caution: ", "caution")]
    return [before + finding[key] for before, key in named if key in finding]
