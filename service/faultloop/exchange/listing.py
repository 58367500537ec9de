"""A judged batch as a table that can be read in a terminal."""

from collections import Counter
from textwrap import fill
from typing import Any

from faultloop.exchange.batch_answers import asked
from faultloop.exchange.compact import CHECK_IDS
from faultloop.exchange.judging import Judged, requests_of
from faultloop.exchange.render import assess_requests


def table(judged: Judged) -> str:
    """One line a point: where it is, the verdict, the urgency, and what decides it."""
    lines = [f"{'point':<10} {'label':<30} {'verdict':<21} {'urgency':<9} what decides"]
    lines += ["-" * 110]
    for at, found in enumerate(judged.found):
        name = (judged.rows.names[at].id or f"row {judged.rows.numbers[at]}")[:10]
        label = " ".join(judged.rows.names[at].label.split())[:30]
        verdict = judged.rows.of(at).status if found is None else found.verdict
        lines.append(f"{name:<10} {label:<30} {verdict:<21} {judged.urgency(at):<9} {_decides(judged, at)}")
    return "\n".join([*lines, "", reconciled(judged)])


def reconciled(judged: Judged) -> str:
    """Counts that add up: rows in = judged + held + refused."""
    counts = judged.counts
    verdicts = Counter(found.verdict for found in judged.found if found is not None)
    told = ", ".join(f"{count} {verdict}" for verdict, count in sorted(verdicts.items()))
    return (
        f"{counts['rows']} rows in = {counts['results']} judged ({told}) + {counts['held']} held"
        f" + {counts['refused']} refused"
    )


def _decides(judged: Judged, at: int) -> str:
    found = judged.found[at]
    if found is None:
        return asked(judged.rows.of(at)).split("; ")[0]
    if found.decided_by is None or found.verdict == "pass":
        return ""
    finding = found.findings[CHECK_IDS.index(found.decided_by)]
    return f"{found.decided_by}: {finding[3]}" if finding else ""


def deciding(answer: dict[str, Any]) -> dict[str, Any] | None:
    """The counted finding that gives the verdict."""
    counted = [f for f in answer["findings"] if f["counts"] and f["verdict"] == answer["verdict"]]
    return counted[0] if counted else None


def most_urgent(judged: Judged, count: int = 3) -> str:
    """The most urgent points, each with its arithmetic, the question that would settle it and its conditions."""
    places = sorted((at for at, found in enumerate(judged.found) if found is not None), key=judged.standing)[:count]
    told = []
    for at, answer in zip(places, assess_requests(requests_of(judged, places, {})), strict=True):
        name = judged.rows.names[at]
        told.append(f"{name.label or name.id or at}: {answer['verdict']}, {answer['urgency']}")
        sentences = _sentences(deciding(answer) or {})
        told += [fill(text, 108, initial_indent="  ", subsequent_indent="  ") for text in sentences]
    return "\n".join(told)


def _sentences(finding: dict[str, Any]) -> list[str]:
    named = [("", "explanation"), ("To settle it: ", "settled_by"), ("Caution: ", "caution")]
    return [before + finding[key] for before, key in named if key in finding]
