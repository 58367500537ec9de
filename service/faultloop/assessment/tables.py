"""The rule sets that points are judged by, compiled: the shipped ones and those that callers brought."""

from dataclasses import dataclass
from functools import lru_cache

from faultloop.assessment.rule_table import RuleTable, compile_rules
from faultloop.rules.loader import LoadedRules, shipped

# A service meets few callers' sets at a time; what is pushed out is compiled again.
TABLES_KEPT = 32


@dataclass(frozen=True, slots=True)
class Tables:
    """Compiled rule sets, and the row of each by its digest; devices under them are the points' own affair."""

    rules: RuleTable
    rows: dict[LoadedRules, int]

    def rules_row(self, loaded: LoadedRules) -> int:
        """Row of a rule set."""
        return self.rows[loaded]


@lru_cache(maxsize=TABLES_KEPT)
def tables(own: tuple[LoadedRules, ...] = ()) -> Tables:
    """Compile the shipped rule sets and callers' own; the shipped rows are the same in every table."""
    sets = [*shipped().values(), *own]
    return Tables(compile_rules([loaded.rules for loaded in sets]), {loaded: row for row, loaded in enumerate(sets)})
