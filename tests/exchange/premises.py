"""The invented premises: files as an engineer records them, and what is expected of them, worked by hand."""

import csv
import json
import math
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from faultloop.exchange.rows import Format, read_cells

Body = dict[str, Any]
FOLDER = Path(__file__).parents[2] / "fixtures"
NAMES = ("repair-shop", "teaching-laboratory")


@dataclass(frozen=True)
class Premises:
    """One premises: its file, the rows of it as text, and the expectation."""

    name: str
    file: Path
    rows: dict[str, dict[str, str]]
    expected: Body

    @property
    def judged(self) -> dict[str, Body]:
        """Expectations of the rows that are judged, by point."""
        rows: dict[str, Body] = self.expected["rows"]
        return {name: row for name, row in rows.items() if "verdict" in row}


def premises(name: str) -> Premises:
    """Read one of the premises."""
    file = FOLDER / name / "outlets.csv"
    with file.open(newline="", encoding="utf-8") as opened:
        rows = {row["point_id"]: row for row in csv.DictReader(opened, strict=True)}
    return Premises(name, file, rows, json.loads((FOLDER / name / "expected.json").read_text(encoding="utf-8")))


def body(row: dict[str, str]) -> Body:
    """The request of one row alone, as it is sent."""
    request = read_cells(row, 2, Format()).request
    assert request is not None
    told: Body = request.model_dump(mode="json", by_alias=True, exclude_unset=True)
    return told


def by_hand(formula: str) -> float:
    """The arithmetic of an expectation, carried out."""
    known = {"pi": math.pi, "sqrt": math.sqrt, "log": math.log}
    return float(eval(formula, {"__builtins__": {}}, known))


def at(answer: Body, path: str) -> Any:
    """A number in an answer by its path; findings are named by their check; None where there is none."""
    part: Any = {**answer, "findings": {finding["check"]: finding for finding in answer["findings"]}}
    for step in path.split("/"):
        part = part.get(step) if isinstance(part, dict) else None
    return part


def differences(answer: Body, expected: Body) -> list[Any]:
    """What an answer says otherwise than was worked out by hand: words, conditions, numbers."""
    found: list[Any] = [
        (word, answer[word], expected[word]) for word in ("verdict", "urgency") if answer[word] != expected[word]
    ]
    for check, word in expected["checks"].items():
        if (told := at(answer, f"findings/{check}/verdict")) != word:
            found.append((check, told, word))
    if "conditions" in expected:
        conditions = {condition["condition"] for condition in answer["conditions"]}
        if conditions != set(expected["conditions"]):
            found.append(("conditions", conditions, expected["conditions"]))
    for value in expected["values"]:
        told = at(answer, value["at"])
        if told is None or abs(told - value["value"]) > value["rel_tol"] * abs(value["value"]):
            found.append((value["at"], told, value["value"], value["by_hand"]))
    return found


def numbers(answer: Body) -> list[Any]:
    """Every number of the findings, in order, with the words that no language changes."""
    names = ("check", "verdict", "value", "interval", "limit", "unit", "reason", "counts")
    return [[finding.get(name) for name in names] for finding in answer["findings"]]
