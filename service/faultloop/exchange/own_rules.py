"""A caller's own set of rules: what it says is put over a shipped set and held to the contract."""

import json
import re
from collections.abc import Iterable, Iterator
from functools import lru_cache
from typing import Annotated, Any

from pydantic import BeforeValidator, Field, ValidationError, create_model
from pydantic_core import InitErrorDetails, PydanticCustomError

from faultloop.assessment.checks import CHECKS
from faultloop.digests import canonical_bytes
from faultloop.protection.breakers import breaker_tables
from faultloop.protection.catalogue import listed_devices
from faultloop.rules.contract import Fault, faults
from faultloop.rules.loader import LoadedRules, Table, digested, overlaid, shipped
from faultloop.rules.sheets import RuleSet
from faultloop.rules.strict import Sheet, Sourced

LONGEST_SET = 65_536
LONGEST_ID = 48
LONGEST_TITLE = 200
CAUTION = "own-rules"
STORED_NAME = re.compile(r"[a-z0-9]+(-[a-z0-9]+)*:[0-9]{4}(-[0-9]{2})?", re.ASCII)
NEEDED_CLAUSES = frozenset(check.id for check in CHECKS)
KNOWN_CLAUSES = NEEDED_CLAUSES | {f"{name}-{own}" for name in NEEDED_CLAUSES for own in ("tt", "it")}
# Times the rated current: below the conventional tripping current no breaker is sure to operate at all.
LEAST_MULTIPLE = 1.45


def _without_default(schema: dict[str, Any]) -> None:
    """What is left out is left to the base: there is no default."""
    schema.pop("default", None)


def _partial(sheet: type[Sheet], **more: Any) -> Any:
    """The tables of a sheet with every key optional: a set that extends another says only what differs.

    A value that carries its source stays whole: half of an old source under a new value would be a lie.
    """
    fields: dict[str, Any] = {}
    for name, known in sheet.model_fields.items():
        kind: Any = known.annotation
        nested = isinstance(kind, type) and issubclass(kind, Sheet) and not issubclass(kind, Sourced)
        whole = Annotated[(kind, *known.metadata)] if known.metadata else kind
        optional = Field(None, description=known.description, json_schema_extra=_without_default)
        fields[name] = (_partial(kind) if nested else whole, optional)
    told = {name: field for name, field in (fields | more).items() if field is not None}
    return create_model(f"Own{sheet.__name__}", __base__=Sheet, __doc__=sheet.__doc__, **told)


Extends = Annotated[str, Field(max_length=60, description="A shipped set, id:edition; without it every key is needed")]
# Cautions are not the caller's to say, or to silence.
OwnRuleSet: Any = _partial(RuleSet, extends=(Extends, Field(None, json_schema_extra=_without_default)), cautions=None)


def _read(told: Any) -> Any:
    """Read a set by JSON's own types, wherever it comes from."""
    if not isinstance(told, dict):
        return told
    try:
        text = json.dumps(told, allow_nan=False)
    except (TypeError, ValueError, RecursionError):
        raise PydanticCustomError("rule_set", "this cannot be written as JSON, or is nested too deeply") from None
    return OwnRuleSet.model_validate_json(text)


OwnRules = Annotated[OwnRuleSet, BeforeValidator(_read)]


def own_rules(said: Any) -> LoadedRules:
    """Resolve what a caller says; one that breaks the contract is refused with every fault at its place."""
    told = said.model_dump_json(exclude_unset=True)
    if len(told) > LONGEST_SET:
        _refuse([Fault((), f"a rule set has at most {LONGEST_SET} characters")])
    return _resolved(told)


def is_own(loaded: LoadedRules) -> bool:
    """Whether a set is a caller's own and not published by this service."""
    return CAUTION in loaded.rules.cautions


@lru_cache(maxsize=128)
def _resolved(told: str) -> LoadedRules:
    said: Table = OwnRuleSet.model_validate_json(told).model_dump(mode="json", exclude_unset=True)
    _refuse(_misnamed(said))
    base = shipped().get(str(said.pop("extends", "")))
    below: Table = {} if base is None else base.rules.model_dump(mode="json")
    cautions = [*(base.rules.cautions if base else []), CAUTION]
    rules = RuleSet.model_validate_json(canonical_bytes({**overlaid(below, said), "cautions": cautions}))
    _refuse([*_unknown(rules), *faults(rules)])
    return digested(rules)


def _refuse(found: Iterable[Fault]) -> None:
    errors = [
        InitErrorDetails(type=PydanticCustomError("rule_set", words), loc=place, input=None) for place, words in found
    ]
    if errors:
        raise ValidationError.from_exception_data("rules", errors)


def _misnamed(said: Table) -> Iterator[Fault]:
    """A set has a name of its own, and extends one that is shipped."""
    for name in ("id", "edition", "title"):
        if name not in said:
            yield Fault((name,), "a rule set needs an id, an edition and a title of its own")
    for name in ("id", "title"):
        if said.get(name) in {getattr(loaded.rules, name) for loaded in shipped().values()}:
            yield Fault((name,), f"this {name} belongs to a published set: give the set one of its own")
    if "extends" in said and said["extends"] not in shipped():
        yield Fault(("extends",), "expected one of " + ", ".join(sorted(shipped())))


def _unknown(rules: RuleSet) -> Iterator[Fault]:
    """Clauses of checks, and currents of devices, that are held here; texts of a length that an answer can carry."""
    for name in sorted(NEEDED_CLAUSES - set(rules.clauses)):
        yield Fault(("clauses", name), "the clause of this check is needed")
    if not set(rules.clauses) <= KNOWN_CLAUSES:
        yield Fault(("clauses",), "only checks have clauses: " + ", ".join(sorted(KNOWN_CLAUSES)))
    if len(rules.id) > LONGEST_ID:
        yield Fault(("id",), f"an id has at most {LONGEST_ID} characters")
    if any(len(text) > LONGEST_TITLE for text in (rules.title, *rules.clauses.values())):
        yield Fault(("title",), f"title and clauses have at most {LONGEST_TITLE} characters")
    letters: list[str] = list(breaker_tables())
    rated = {device.designation: device.rated_current_a for device in listed_devices()}
    for at, row in enumerate(rules.operating_current):
        least = dict.fromkeys(letters, LEAST_MULTIPLE) if row.unit == "x In" else rated
        if not set(row.devices) <= set(least):
            words = "breaker characteristics with x In, or devices held here with A"
            yield Fault(("operating_current", at, "devices"), words)
        elif any(row.value <= least[device] for device in row.devices):
            words = "no device is sure to operate at so small a current"
            yield Fault(("operating_current", at, "value"), words)


def differences(base: LoadedRules, own: LoadedRules) -> list[dict[str, Any]]:
    """The values in which a set differs from the one that it extends, by JSON Pointer."""
    below, above = (loaded.rules.model_dump(mode="json", exclude={"id", "edition"}) for loaded in (base, own))
    return list(_differing(below, above, ""))


def _differing(base: Any, own: Any, pointer: str) -> Iterator[dict[str, Any]]:
    tables = isinstance(base, dict) and isinstance(own, dict) and "source" not in base
    if tables:
        for key in {**base, **own}:
            yield from _differing(base.get(key), own.get(key), f"{pointer}/{key}")
    elif base != own:
        told = {"base": base, "own": own}
        yield {"pointer": pointer, **{name: value for name, value in told.items() if value is not None}}
