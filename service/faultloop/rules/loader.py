"""The one loader of rule sets: strict, extending, dated, digested."""

from collections.abc import Iterable
from dataclasses import dataclass, field
from functools import lru_cache
from importlib import resources
from importlib.resources.abc import Traversable
from pathlib import Path

from pydantic import ValidationError

from faultloop.digests import canonical_bytes, digest
from faultloop.rules.sheets import RuleSet
from faultloop.rules.strict import DataFileError, read_sheet, read_table, refuse_duplicates

Table = dict[str, object]


@dataclass(frozen=True, slots=True)
class LoadedRules:
    """A rule set with the digest of everything that it says; the digest is what it is told by."""

    rules: RuleSet = field(compare=False)
    digest: str


def load(files: Iterable[Traversable | Path]) -> dict[str, LoadedRules]:
    """Load rule-set files by `id:edition`; one file may extend another by name and override values."""
    tables: dict[str, Table] = {}
    names: dict[str, str] = {}
    for file in files:
        table = read_table(file)
        for name in ("id", "edition"):
            # Said before extending, or a file without them would call itself by its base's name.
            if name not in table:
                raise DataFileError(f"{file.name}: {name}: missing")
        key = f"{table['id']}:{table['edition']}"
        if key in tables:
            raise DataFileError(f"{file.name}: id and edition {key} stand already in {names[key]}")
        tables[key], names[key] = table, file.name
    return {key: _checked(_resolved(key, tables, names, ()), names[key]) for key in tables}


def _resolved(key: str, tables: dict[str, Table], names: dict[str, str], above: tuple[str, ...]) -> Table:
    table = dict(tables[key])
    base = table.pop("extends", None)
    if base is None:
        return table
    if not isinstance(base, str) or base not in tables:
        raise DataFileError(f"{names[key]}: extends: no rule set {base!r} (write id:edition)")
    if base in (*above, key):
        raise DataFileError(f"{names[key]}: extends: {base} leads back to itself")
    return overlaid(_resolved(base, tables, names, (*above, key)), table)


def overlaid(base: Table, over: Table) -> Table:
    """Put what a set says over what its base says."""
    merged = dict(base)
    for key, value in over.items():
        below = merged.get(key)
        # A parameter is replaced whole: half of an old source under a new value would be a lie.
        deeper = isinstance(value, dict) and isinstance(below, dict) and "source" not in below
        merged[key] = overlaid(below, value) if deeper else value  # type: ignore[arg-type]
    return merged


def _checked(table: Table, name: str) -> LoadedRules:
    rules = read_sheet(RuleSet, table, name)
    rows = rules.disconnection.table
    refuse_duplicates(name, "disconnection.table", [(r.earthing, r.current, r.above_v) for r in rows])
    printed = [(device, row.time_s) for row in rules.operating_current for device in row.devices]
    refuse_duplicates(name, "operating_current", list(printed))
    return digested(rules)


def content(loaded: LoadedRules) -> bytes:
    """Everything that a resolved set says, as the bytes that its digest is of."""
    return canonical_bytes(loaded.rules.model_dump(mode="json"))


def from_content(told: bytes) -> LoadedRules:
    """Read a set back from such bytes; one that was written for another shape of sheet is refused."""
    try:
        return digested(RuleSet.model_validate_json(told))
    except ValidationError as error:
        raise DataFileError("this rule set was written for another version of the service") from error


def digested(rules: RuleSet) -> LoadedRules:
    """A rule set with its digest."""
    return LoadedRules(rules, digest(rules.model_dump(mode="json")))


@lru_cache(maxsize=1)
def shipped() -> dict[str, LoadedRules]:
    """Load the rule sets that come with the package."""
    folder = resources.files("faultloop.rules") / "data" / "sets"
    return load(sorted((f for f in folder.iterdir() if f.name.endswith(".toml")), key=lambda f: f.name))


@lru_cache(maxsize=256)
def resolve(name: str) -> LoadedRules | None:
    """Find a rule set by `id:edition`, or the newest edition by `id` alone."""
    rules = shipped()
    if name in rules:
        return rules[name]
    editions = sorted(key for key, loaded in rules.items() if loaded.rules.id == name)
    return rules[editions[-1]] if editions else None
