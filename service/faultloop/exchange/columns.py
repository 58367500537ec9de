"""Columns of files by their contract names, and where each stands in a request's body."""

from collections.abc import Iterator
from difflib import get_close_matches
from typing import Any, get_args

from pydantic import BaseModel

from faultloop.exchange.fields import MethodWord
from faultloop.exchange.requests import AssessmentRequest, Readings, rule_names
from faultloop.exchange.unearthed_columns import (
    MONITOR,
    MONITOR_WORDS,
    OTHERS,
    TRUTH,
    UNEARTHED_NUMBERS,
    UNEARTHED_WORDS,
    YES_OR_NO,
)

Path = tuple[str, ...]
WORDS: dict[str, Path] = {
    "point_id": ("point", "id"), "label": ("point", "label"), "location": ("point", "location"),
    "earthing": ("supply", "earthing"), "current": ("supply", "current"), "role": ("circuit", "role"),
    "feeds": ("circuit", "feeds"), "arrangement": ("circuit", "arrangement"), "users": ("circuit", "users"),
    "polarity": ("readings", "polarity"), "rules": ("rules",),
    "policy_temperature": ("policy", "temperature"), "policy_decision": ("policy", "decision"), **UNEARTHED_WORDS,
}  # fmt: skip
NUMBERS: dict[str, Path] = {
    "nominal_voltage_to_earth_v": ("supply", "nominal_voltage_to_earth_v"),
    "phases": ("supply", "phases"),
    "declared_prospective_current_ka": ("supply", "declared_prospective_current_ka"),
    "rated_current_a": ("circuit", "rated_current_a"),
    "length_m": ("circuit", "length_m"),
    "current_carrying_capacity_a": ("circuit", "current_carrying_capacity_a"),
    **UNEARTHED_NUMBERS,
}
CONDUCTORS: dict[str, Path] = {
    f"{name}_conductor_mm2": ("circuit", f"{name}_conductor") for name in ("line", "neutral", "protective")
}
BOARD: dict[str, Path] = {
    "board_line_neutral_loop_impedance_ohm": ("board", "line_neutral_loop_impedance_ohm"),
    "board_earth_fault_loop_impedance_ohm": ("board", "earth_fault_loop_impedance_ohm"),
    "board_prospective_current_ka": ("board", "prospective_current_ka"),
}
TIMES: dict[str, Path] = {
    "residual_operating_time_ms": ("readings", "residual_operating_time_ms", "1"),
    "residual_operating_time_at_2_ms": ("readings", "residual_operating_time_ms", "2"),
    "residual_operating_time_at_5_ms": ("readings", "residual_operating_time_ms", "5"),
}
_OTHER_READINGS = ("polarity", "residual_operating_time_ms")
READINGS: dict[str, Path] = {
    name: ("readings", name) for name in Readings.model_fields if name not in _OTHER_READINGS
} | BOARD | TIMES  # fmt: skip
DEVICES = ("overcurrent_device", "breaking_capacity_ka", "residual_current_device")
BESIDES = ("reading_method", "reading_state", "conductor_material", "conductor_insulation")
COLUMNS = (*WORDS, *NUMBERS, *CONDUCTORS, *READINGS, *DEVICES, *BESIDES, *OTHERS)
PATHS: dict[str, Path] = {
    **WORDS, **NUMBERS, **CONDUCTORS, **READINGS, **OTHERS,
    "overcurrent_device": ("overcurrent_device",), "residual_current_device": ("residual_current_device",),
}  # fmt: skip


def _words(annotation: Any) -> Iterator[str]:
    """The words that a field may hold."""
    for argument in get_args(annotation):
        yield from [argument] if isinstance(argument, str) else _words(argument)


def _model(annotation: Any) -> type[BaseModel] | None:
    """The model that a field holds, or may hold."""
    kinds = (annotation, *get_args(annotation))
    return next((kind for kind in kinds if isinstance(kind, type) and issubclass(kind, BaseModel)), None)


def _choices() -> dict[str, dict[str, str]]:
    """Words of a column by their lower-case form: a file may write them in capitals."""
    fields = {part: field.annotation for part, field in AssessmentRequest.model_fields.items()}
    words = {"reading_method": set(_words(MethodWord)), "rules": set(rule_names())}
    words |= {column: set(TRUTH) for column in YES_OR_NO} | {MONITOR: set(MONITOR_WORDS)}
    for column, path in WORDS.items():
        told = fields.get(path[0])
        for part in path[1:]:
            model = _model(told)
            told = None if model is None else model.model_fields[part].annotation
        if len(path) > 1:
            words[column] = set(_words(told))
    return {column: {word.casefold(): word for word in sorted(told)} for column, told in words.items() if told}


CHOICES = _choices()


class FileRefused(ValueError):
    """A file that cannot be read as a table of points; the message says what is wrong and where."""


def unknown(name: str) -> str:
    """What to say of a column that is not known: a misspelt reading that is passed over can kill."""
    near = get_close_matches(name, COLUMNS, n=1)
    hint = f"did you mean {near[0]}?" if near else f"known are {', '.join(sorted(COLUMNS))}."
    return f"is not known; {hint} A column with nothing to be judged may be passed over with ignore and its heading"


def column_at(path: Path) -> str | None:
    """The column that fills a place of the body, or a place inside or above it."""
    for column, filled in PATHS.items():
        shared = min(len(filled), len(path))
        if filled[:shared] == path[:shared]:
            return column
    return None
