"""One row in words -> a request, or the questions that hold it, or the faults that refuse it."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

from pydantic import ValidationError

from faultloop.exchange import faults
from faultloop.exchange.cells import MISSING, Cell, Decimal, read_cell
from faultloop.exchange.columns import CHOICES, CONDUCTORS, NUMBERS, READINGS, WORDS, Path, column_at
from faultloop.exchange.requests import AssessmentRequest
from faultloop.exchange.unearthed_columns import (
    ITEMS,
    MONITOR,
    MONITOR_WORDS,
    SET_POINT,
    TRUTH,
    WHOLE,
    YES_OR_NO,
    items_fault,
    items_of,
)
from faultloop.protection.designations import Breaker, UnknownDesignation, parse_overcurrent, parse_residual
from faultloop.rules.loader import LoadedRules

Body = dict[str, Any]
# Callers' stored rule sets by the name under which a row may ask for one.
Stored = Mapping[str, LoadedRules] | None
NO_RESIDUAL_DEVICE = {"-", "none", "n/a"}


# In these a dash says nothing, as a blank cell does; of a residual device it says that there is none.
_UNMARKED = {*CHOICES, "overcurrent_device"}
_LONGEST_RAW = 200
_MOST_FAULTS = 10


@dataclass(frozen=True, slots=True)
class Question:
    """What must be answered before a row can be judged: where it stands, the text as it came, what was expected."""

    where: str
    raw: str
    question: str


@dataclass(frozen=True, slots=True)
class Fault:
    """Why a row is refused: where, by which code, what was expected; the input is not repeated."""

    where: str
    code: str
    detail: str


@dataclass(slots=True)
class Told:
    """What one row says: the request, else what holds or refuses it."""

    request: AssessmentRequest | None = None
    questions: list[Question] = field(default_factory=list)
    faults: list[Fault] = field(default_factory=list)
    over_range: bool = False

    @property
    def status(self) -> str:
        """Judged, held with a question, or refused with the fault."""
        return "refused" if self.faults else "held" if self.questions else "judged"

    @property
    def urgency(self) -> str:
        """Urgency of a row that could not be judged: an over-range reading may mean that there is no earth."""
        return "stop-use" if self.over_range else "planned"


@dataclass(frozen=True, slots=True)
class Format:
    """How a file writes its numbers."""

    decimal: Decimal = "point"
    units: Mapping[str, str] = field(default_factory=dict)

    def cell(self, text: str, column: str) -> Cell:
        """Read the cell of a number."""
        return read_cell(text, column, self.decimal, self.units.get(column))


def read_cells(cells: Mapping[str, str], number: int, form: Format, stored: Stored = None) -> Told:
    """Read a row of a file, cell by cell by contract names; a blank cell says nothing."""
    said = {column: text.strip() for column, text in cells.items() if text.strip()}
    for column in _UNMARKED & said.keys():
        if said[column].lower() in MISSING:
            del said[column]
    told = Told()
    if "rules" in cells and "rules" not in said:
        told.questions.append(
            _asked("rules", cells["rules"], "by which rule set? the file has the column, so none is assumed")
        )
    body: Body = {"point": {"label": said.get("point_id") or f"row {number}"}}
    if "earthing" in said and said["earthing"].casefold() not in CHOICES["earthing"]:
        # Everything else hangs on it, so it is told even where the row is held for another cell.
        known = f"{', '.join(CHOICES['earthing'].values())} is expected; separated is behind an isolating transformer"
        told.faults.append(Fault("earthing", "unknown-word", known))
    for column, path in WORDS.items():
        if column in said:
            _put(body, path, CHOICES.get(column, {}).get(said[column].casefold(), said[column]))
    _put_devices(body, said, told, form)
    for column, path in NUMBERS.items():
        if (value := _plain(said, column, told, form)) is not None:
            _put(body, path, int(value) if column in WHOLE and value.is_integer() else value)
    _put_unearthed(body, said, told, form)
    _put_conductors(body, said, told, form)
    _put_readings(body, said, told, form)
    return _checked(told, body, _in_file, stored)


def _put(body: Body, path: Path, value: Any) -> None:
    for part in path[:-1]:
        body = body.setdefault(part, {})
    body[path[-1]] = value


def _plain(said: Mapping[str, str], column: str, told: Told, form: Format) -> float | None:
    """A plain number of a cell that is no reading; anything else holds the row."""
    if column not in said:
        return None
    cell = form.cell(said[column], column)
    if cell.question or cell.bound != "exact":
        told.questions.append(_asked(column, said[column], cell.question or "a plain number is expected"))
        return None
    return cell.value


def _asked(where: str, raw: str, question: str) -> Question:
    shown = raw if len(raw) <= _LONGEST_RAW else raw[:_LONGEST_RAW] + " …"
    return Question(where, shown, question)


def _put_devices(body: Body, said: Mapping[str, str], told: Told, form: Format) -> None:
    """The overcurrent device, and one residual device or several in series parted by " + ", the circuit's own first."""
    try:
        if "overcurrent_device" in said:
            body["overcurrent_device"] = _overcurrent(said["overcurrent_device"])
            if (capacity := _plain(said, "breaking_capacity_ka", told, form)) is not None:
                body["overcurrent_device"]["breaking_capacity_ka"] = capacity
    except UnknownDesignation as error:
        told.faults.append(Fault("overcurrent_device", "unknown-designation", str(error)))
    residual = said.get("residual_current_device", "")
    if not residual or residual.lower() in NO_RESIDUAL_DEVICE:
        return
    try:
        first, *others = [_residual(part) for part in residual.split("+")]
    except UnknownDesignation as error:
        told.faults.append(Fault("residual_current_device", "unknown-designation", str(error)))
        return
    body["residual_current_device"] = first
    if others:
        body["upstream_residual_current_devices"] = others


def _overcurrent(text: str) -> Body:
    device = parse_overcurrent(text)
    kind: Body = {"rated_current_a": device.rated_current_a}
    if isinstance(device, Breaker):
        return kind | {"kind": "miniature-circuit-breaker", "characteristic": device.characteristic}
    kind |= {"kind": "fuse", "fuse_system": device.fuse_system}
    return kind | ({"utilisation_category": device.utilisation_category} if device.utilisation_category else {})


def _residual(text: str) -> Body:
    device = parse_residual(text)
    kind: Body = {"rated_residual_operating_current_ma": device.rated_ma, "delay": device.delay}
    return kind | ({"residual_type": device.residual_type} if device.residual_type else {})


def _put_conductors(body: Body, said: Mapping[str, str], told: Told, form: Format) -> None:
    """Areas; material and insulation are copper and PVC unless the columns or the defaults say otherwise."""
    for column, path in CONDUCTORS.items():
        if (area := _plain(said, column, told, form)) is not None:
            material = said.get("conductor_material", "copper")
            insulation = said.get("conductor_insulation", "pvc")
            _put(body, path, {"material": material, "insulation": insulation, "area_mm2": area})


def _put_unearthed(body: Body, said: Mapping[str, str], told: Told, form: Format) -> None:
    """What hangs on a separated supply, an IT supply's monitor, and what is answered by yes or no."""
    for column, path in YES_OR_NO.items():
        if column in said:
            if (word := CHOICES[column].get(said[column].casefold())) is None:
                told.questions.append(_asked(column, said[column], "yes or no is expected"))
            else:
                _put(body, path, TRUTH[word])
    if MONITOR in said:
        if (word := CHOICES[MONITOR].get(said[MONITOR].casefold())) is None:
            told.questions.append(_asked(MONITOR, said[MONITOR], f"{', '.join(MONITOR_WORDS)} is expected"))
        for name, value in MONITOR_WORDS.get(word or "", {}).items():
            _put(body, ("it_supply", MONITOR, name), value)
    elif SET_POINT in said:
        told.questions.append(_asked(MONITOR, "", f"a set point but no monitor: {', '.join(MONITOR_WORDS)}?"))
    if "outlets" in said and not _whole(said["outlets"]):
        told.questions.append(_asked("outlets", said["outlets"], "a whole number is expected"))
    cells = {name: value for name in ITEMS if (value := _plain(said, name, told, form)) is not None}
    unread = {question.where for question in told.questions} & set(ITEMS)
    if not unread and (asked := items_fault(cells)):
        told.questions.append(_asked(asked[0], said.get(asked[0], ""), asked[1]))
    elif not unread and (items := items_of(cells)) is not None:
        _put(body, ("separated_supply", "items"), items)


def _whole(text: str) -> bool:
    """Whether a cell is no number at all, which is asked about elsewhere, or a whole one."""
    try:
        return float(text).is_integer()
    except ValueError:
        return True


def _put_readings(body: Body, said: Mapping[str, str], told: Told, form: Format) -> None:
    for column, path in READINGS.items():
        if column not in said:
            continue
        cell = form.cell(said[column], column)
        if cell.over_range and said.get("earthing", "").casefold() == "separated":
            # Between a pole and earth of a floating supply there is nothing to read.
            continue
        reading = _reading(cell, column, said[column], told)
        if reading is not None:
            if column == "earth_fault_loop_impedance_ohm" and "reading_method" in said:
                method = said["reading_method"]
                reading["method"] = CHOICES["reading_method"].get(method.casefold(), method)
            if column == "earth_fault_loop_impedance_ohm" and "reading_state" in said:
                reading["state"] = said["reading_state"]
            _put(body, path, reading)


def _reading(cell: Cell, where: str, raw: str, told: Told) -> Body | None:
    """A reading's body of its cell; what must be asked is noted."""
    if cell.question:
        told.questions.append(_asked(where, raw, cell.question))
        told.over_range |= cell.over_range
    return None if cell.value is None else {"value": cell.value, "bound": cell.bound}


def _in_file(location: tuple[Any, ...], body: Body, *, absent: bool) -> str:
    return column_at(tuple(str(part) for part in location)) or faults.pointer(location, body, absent=absent)


def _checked(told: Told, body: Any, where: Any, stored: Stored) -> Told:
    """Validate the body where nothing stands against it yet."""
    if told.status != "judged":
        return told
    try:
        told.request = AssessmentRequest.model_validate(body, context=stored)
    except ValidationError as error:
        for fault in error.errors(include_url=False)[:_MOST_FAULTS]:
            place = where(fault["loc"], body, absent=fault["type"] == "missing")
            told.faults.append(Fault(place, fault["type"], faults.told(fault)))
    return told


TWICE = Fault("", "named-twice", "a field stands twice in one object: which of the two is meant?")


class NamedTwice(dict[str, Any]):
    """An object in which a name stood twice: one of the two readings would be dropped without a word."""


def named_twice(value: Any) -> bool:
    """Whether a name stands twice anywhere in a value."""
    inside = value.values() if isinstance(value, dict) else value if isinstance(value, list) else ()
    return isinstance(value, NamedTwice) or any(named_twice(item) for item in inside)


def read_body(row: Any, defaults: Body, stored: Stored = None) -> Told:
    """Read a row that is an assessment request, in which a reading may also be the text that an instrument printed."""
    told = Told()
    body = _printed(_merged(defaults, row), told) if isinstance(row, dict) else row
    return _checked(told, body, faults.pointer, stored)


def _merged(defaults: Body, row: Body) -> Body:
    """The row over the defaults, object by object; of a list or a device the row's own is taken whole."""
    both = {**defaults, **row}
    for name in ("point", "supply", "circuit", "board", "readings", "policy"):
        if isinstance(defaults.get(name), dict) and isinstance(row.get(name), dict):
            both[name] = {**defaults[name], **row[name]}
    return both


def _printed(body: Body, told: Told) -> Body:
    """Read the readings that are text; what says nothing is left out, what is no number is asked about."""
    floating = _is_separated(body)
    for (part, *inner), text in list(_texts(body)):
        where = "/".join(("", part, *inner))
        column = "residual_operating_time_ms" if len(inner) > 1 else inner[0]
        cell = read_cell(text, column)
        reading = None if floating and cell.over_range else _reading(cell, where, text, told)
        holder = body[part] = dict(body[part])
        for name in inner[:-1]:
            holder[name] = holder = dict(holder[name])
        if reading is None:
            del holder[inner[-1]]
        else:
            holder[inner[-1]] = reading
    return body


def _is_separated(body: Body) -> bool:
    """Whether a body's supply floats: between a pole and earth there is nothing to read, which is as it should be."""
    supply = body.get("supply")
    return isinstance(supply, dict) and supply.get("earthing") == "separated"


def _texts(body: Body) -> Iterator[tuple[tuple[str, ...], str]]:
    """Readings that are text, by path; words such as a polarity are no readings."""
    for part in ("readings", "board"):
        inside = body.get(part)
        for name, value in inside.items() if isinstance(inside, dict) else ():
            if name == "residual_operating_time_ms" and isinstance(value, dict):
                yield from (((part, name, multiple), text) for multiple, text in value.items() if isinstance(text, str))
            elif isinstance(value, str) and name != "polarity":
                yield (part, name), value
