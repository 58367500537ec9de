"""Published figures and what it means to agree with one of them."""

import json
import math
import re
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path
from typing import Any

from faultloop.rules.loader import resolve, shipped
from faultloop.rules.sheets import RuleSet

FOLDER = Path(__file__).parents[2] / "fixtures" / "published"
Row = dict[str, Any]

EDITIONS = {
    "BS 7671:2008": "bs-7671:2008",
    "BS 7671:2008+A1:2011": "bs-7671:2011",
    "BS 7671:2008+A3:2015 and BS 7671:2018": "bs-7671:2018",
    "as printed, no edition given": "iec-60364:2017",
}

# The sets that take IEC's own table of times and its figures; others differ in substance.
TABLE_41_1 = sorted(key for key in shipped() if key.startswith(("iec-60364:", "bs-7671:")))


@lru_cache(maxsize=32)
def _file(name: str) -> tuple[Row, ...]:
    return tuple(json.loads((FOLDER / f"{name}.json").read_text(encoding="utf-8")))


def oracles(name: str, prefix: str = "") -> list[Row]:
    """Rows of a file that a test may rely on: seen in print, and their source not itself wrong."""
    return [row for row in _file(name) if row["oracle"] and row["id"].startswith(prefix)]


def named(name: str, row_id: str) -> Row:
    """One row that a test may rely on."""
    return next(row for row in oracles(name) if row["id"] == row_id)


def unproven(name: str, row_id: str) -> Row:
    """One row that no test may rely on: recalled, common practice, or arithmetic that is printed nowhere."""
    return next(row for row in _file(name) if row["id"] == row_id and not row["oracle"])


def files() -> list[str]:
    """Names of all files of published figures."""
    return sorted(file.stem for file in FOLDER.glob("*.json"))


def rules_for(name: str) -> RuleSet:
    """A shipped rule set."""
    found = resolve(name)
    assert found is not None, name
    return found.rules


@dataclass(frozen=True)
class Comparison:
    """A printed figure beside the service's own; `part` tells several figures of one row apart."""

    row: str
    part: str
    source: str
    printed: float
    step: float
    compute: Callable[..., float]

    @property
    def value(self) -> float:
        """The service's figure."""
        return self.compute()

    @property
    def title(self) -> str:
        """How the comparison is called in a test report."""
        return f"{self.row}:{self.part} [{self.source}]"

    def rounds(self, value: float) -> bool:
        """Whether the figure rounds to the printed one; a tie may go either way."""
        return abs(value - self.printed) <= self.step / 2 * (1 + 1e-9)

    def within_one_step(self, value: float) -> bool:
        """Whether the figure lies within one printed step: tables are cut as often as rounded."""
        return math.isfinite(value) and abs(value - self.printed) <= self.step * (1 + 1e-9)


_PLACE = re.compile(r",? (?:Tables?|cl\.?|Appendix|App\.|fig|example|exercise|Annex|411)(?:\b| )")


def document(source: str) -> str:
    """The document of a source, without table, clause, figure or example."""
    return _PLACE.split(source)[0].strip()


def compared(row: Row, part: str, printed: str, compute: Callable[..., float], step: float | None = None) -> Comparison:
    """Compare one field of a row."""
    return Comparison(row["id"], part, row["source"], float(row[printed]), step or row["printed_step"], compute)


def seconds(row: Row) -> list[float]:
    """Times for which a limit is printed."""
    told = row["required_time_s"]
    return list(told) if isinstance(told, list) else [told]
