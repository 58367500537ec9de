"""Files of points: one row a point, columns by their contract names, and the answers beside them."""

import csv
import io
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from difflib import get_close_matches
from typing import Any, Literal

from pydantic import ValidationError

from faultloop.assessment.checks import CHECKS
from faultloop.exchange.cells import read_cell
from faultloop.exchange.render import assess_requests
from faultloop.exchange.requests import AssessmentRequest
from faultloop.protection.designations import (
    Breaker,
    UnknownDesignation,
    parse_overcurrent,
    parse_residual,
)

Body = dict[str, Any]
TEXTS = {
    "point_id": ("point", "id"), "label": ("point", "label"), "location": ("point", "location"),
    "earthing": ("supply", "earthing"), "role": ("circuit", "role"), "feeds": ("circuit", "feeds"),
    "users": ("circuit", "users"), "rules": (None, "rules"),
}  # fmt: skip
NUMBERS = {
    "nominal_voltage_to_earth_v": ("supply", "nominal_voltage_to_earth_v"),
    "rated_current_a": ("circuit", "rated_current_a"),
    "length_m": ("circuit", "length_m"),
}
CONDUCTORS = {
    "line_conductor_mm2": "line_conductor",
    "neutral_conductor_mm2": "neutral_conductor",
    "protective_conductor_mm2": "protective_conductor",
}
READINGS = (
    "earth_fault_loop_impedance_ohm", "external_earth_fault_loop_impedance_ohm", "line_neutral_loop_impedance_ohm",
    "line_plus_protective_resistance_ohm", "protective_conductor_resistance_ohm", "earth_electrode_resistance_ohm",
)  # fmt: skip
BOARD = {
    "board_line_neutral_loop_impedance_ohm": "line_neutral_loop_impedance_ohm",
    "board_prospective_current_ka": "prospective_current_ka",
}
OTHERS = (
    "phases", "overcurrent_device", "breaking_capacity_ka", "residual_current_device", "reading_method",
    "residual_operating_time_ms", "conductor_material", "conductor_insulation",
)  # fmt: skip
COLUMNS = (*TEXTS, *NUMBERS, *CONDUCTORS, *READINGS, *BOARD, *OTHERS)


class FileRefused(ValueError):
    """A file that cannot be read as a table of points; the message says what is wrong and where."""


@dataclass(slots=True)
class FileRow:
    """One row: as it came, what it asks for, and what became of it."""

    number: int
    raw: dict[str, str]
    request: AssessmentRequest | None = None
    questions: list[str] = field(default_factory=list)
    faults: list[str] = field(default_factory=list)
    answer: Body | None = None
    over_range: bool = False

    @property
    def urgency(self) -> str:
        """Urgency of a row that could not be judged: an over-range reading may mean that there is no earth."""
        return "stop-use" if self.over_range else "planned"

    @property
    def status(self) -> Literal["judged", "held", "refused"]:
        """Judged, held with a question, or refused with the fault."""
        return "refused" if self.faults else "held" if self.questions else "judged"


def read_rows(text: str, defaults: dict[str, str] | None = None) -> list[FileRow]:
    """Read a CSV file of points; a column that is not known is refused, because a misspelt reading can kill."""
    reader = csv.DictReader(io.StringIO(text.removeprefix("\ufeff")), strict=True)
    header = [name.strip() for name in reader.fieldnames or []]
    _refuse_columns([*header, *(defaults or {})])
    reader.fieldnames = header
    rows = []
    try:
        for at, raw in enumerate(reader, start=2):
            told = {name: value or "" for name, value in raw.items() if name is not None}
            filled = {**(defaults or {}), **{name: value for name, value in told.items() if value.strip()}}
            rows.append(_row(at, told, filled, extra=None in raw))
    except csv.Error as error:
        raise FileRefused(f"line {reader.line_num}: {error}") from error
    return rows


def _refuse_columns(header: list[str]) -> None:
    if not header:
        raise FileRefused("the file is empty: the first line must name the columns")
    for at, name in enumerate(header, start=1):
        if name not in COLUMNS:
            near = get_close_matches(name, COLUMNS, n=1)
            hint = f"; did you mean {near[0]}?" if near else f"; known are {', '.join(sorted(COLUMNS))}"
            raise FileRefused(f"column {at} ({name!r}) is not known{hint}")
    doubled = {name for name in header if header.count(name) > 1}
    if doubled and len(set(header)) < len(header):
        raise FileRefused(f"column {sorted(doubled)[0]!r} stands twice")


def _row(number: int, raw: dict[str, str], filled: dict[str, str], *, extra: bool) -> FileRow:
    row = FileRow(number, raw)
    if extra:
        row.faults.append("more cells than columns")
        return row
    body: Body = {"point": {"label": filled.get("label") or filled.get("point_id") or f"row {number}"}}
    _put_words(body, filled)
    _put_devices(body, filled, row)
    _put_conductors(body, filled, row)
    _put_readings(body, filled, row)
    if row.status == "judged":
        _check(body, row)
    return row


def _put_words(body: Body, filled: dict[str, str]) -> None:
    for column, (part, name) in TEXTS.items():
        if filled.get(column, "").strip():
            target = body if part is None else body.setdefault(part, {})
            target[name] = filled[column].strip()


def _number(filled: dict[str, str], column: str, row: FileRow) -> float | None:
    """A plain number of a cell that is no reading; anything else holds the row."""
    cell = read_cell(filled.get(column, ""), column)
    if cell.question or cell.bound != "exact":
        row.questions.append(f"{column}: {cell.question or 'a plain number is expected'}")
        return None
    return cell.value


def _put_devices(body: Body, filled: dict[str, str], row: FileRow) -> None:
    for column, (part, name) in NUMBERS.items():
        if (value := _number(filled, column, row)) is not None:
            body.setdefault(part, {})[name] = value
    if (phases := _number(filled, "phases", row)) is not None:
        body.setdefault("supply", {})["phases"] = int(phases) if phases == int(phases) else phases
    if told := filled.get("overcurrent_device", "").strip():
        try:
            device = parse_overcurrent(told)
        except UnknownDesignation as error:
            row.faults.append(f"overcurrent_device: {error}")
            return
        kind: Body = {"rated_current_a": device.rated_current_a}
        if isinstance(device, Breaker):
            kind |= {"kind": "miniature-circuit-breaker", "characteristic": device.characteristic}
        else:
            kind |= {"kind": "fuse", "fuse_system": device.fuse_system}
            kind |= {"utilisation_category": device.utilisation_category} if device.utilisation_category else {}
        if (capacity := _number(filled, "breaking_capacity_ka", row)) is not None:
            kind["breaking_capacity_ka"] = capacity
        body["overcurrent_device"] = kind
    _put_residual(body, filled, row)


def _put_residual(body: Body, filled: dict[str, str], row: FileRow) -> None:
    """One residual device, or several in series parted by " + ", the circuit's own first."""
    told = filled.get("residual_current_device", "").strip()
    if not told or told.lower() in {"-", "none", "n/a"}:
        return
    chain = []
    for part in told.split("+"):
        try:
            device = parse_residual(part)
        except UnknownDesignation as error:
            row.faults.append(f"residual_current_device: {error}")
            return
        kind: Body = {"rated_residual_operating_current_ma": device.rated_ma, "delay": device.delay}
        chain.append(kind | ({"residual_type": device.residual_type} if device.residual_type else {}))
    body["residual_current_device"] = chain[0]
    if chain[1:]:
        body["upstream_residual_current_devices"] = chain[1:]


def _put_conductors(body: Body, filled: dict[str, str], row: FileRow) -> None:
    """Areas; material and insulation are copper and PVC unless the columns or the defaults say otherwise."""
    for column, name in CONDUCTORS.items():
        if (area := _number(filled, column, row)) is not None:
            body.setdefault("circuit", {})[name] = {
                "material": filled.get("conductor_material", "").strip() or "copper",
                "insulation": filled.get("conductor_insulation", "").strip() or "pvc",
                "area_mm2": area,
            }


def _put_readings(body: Body, filled: dict[str, str], row: FileRow) -> None:
    method = filled.get("reading_method", "").strip()
    for column in (*READINGS, *BOARD, "residual_operating_time_ms"):
        cell = read_cell(filled.get(column, ""), column)
        if cell.question:
            row.questions.append(f"{column}: {cell.question}")
            row.over_range |= cell.over_range
        if cell.value is None:
            continue
        reading: Body = {"value": cell.value, "bound": cell.bound}
        if column == "earth_fault_loop_impedance_ohm" and method:
            reading["method"] = method
        if column in BOARD:
            body.setdefault("board", {})[BOARD[column]] = reading
        elif column == "residual_operating_time_ms":
            body.setdefault("readings", {})[column] = {"1": reading}
        else:
            body.setdefault("readings", {})[column] = reading


def _check(body: Body, row: FileRow) -> None:
    try:
        row.request = AssessmentRequest.model_validate(body)
    except ValidationError as error:
        for fault in error.errors(include_url=False, include_input=False, include_context=False):
            where = ".".join(str(part) for part in fault["loc"])
            row.faults.append(f"{where}: {fault['msg'].removeprefix('Value error, ')}")


def judge_rows(rows: Sequence[FileRow]) -> None:
    """Judge every row that can be judged, in one pass."""
    ready = [row for row in rows if row.request is not None]
    answers = assess_requests([row.request for row in ready if row.request is not None])
    for row, answer in zip(ready, answers, strict=True):
        row.answer = answer


def answer_cells(row: FileRow) -> dict[str, str]:
    """The answer of one row as cells: verdict, urgency, and each check's verdict, value, limit and reason."""
    asked = "; ".join(row.questions + row.faults)
    cells = {"status": row.status, "verdict": "undetermined", "urgency": row.urgency, "questions": asked}
    if row.answer is None:
        return cells
    cells |= {"verdict": row.answer["verdict"], "urgency": row.answer["urgency"]}
    found = {finding["check"]: finding for finding in row.answer["findings"]}
    for check in CHECKS:
        name, finding = check.id.replace("-", "_"), found.get(check.id, {})
        for what in ("verdict", "value", "limit", "reason"):
            cells[f"{name}_{what}"] = str(finding.get(what, ""))
    return cells


def write_csv(rows: Iterable[FileRow]) -> str:
    """The rows as they came with their answers beside them (RFC 4180); no cell can act as a formula."""
    told = [(row.raw, answer_cells(row)) for row in rows]
    header = list(dict.fromkeys(name for raw, cells in told for name in (*raw, *cells)))
    out = io.StringIO()
    writer = csv.DictWriter(out, header, restval="", lineterminator="\r\n")
    writer.writeheader()
    for raw, cells in told:
        writer.writerow({**{name: _guarded(value) for name, value in raw.items()}, **cells})
    return out.getvalue()


def _guarded(value: str) -> str:
    return f"'{value}" if value[:1] in ("=", "+", "-", "@", "\t", "\r") else value
