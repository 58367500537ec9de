"""Rows read -> rows judged: patterns laid out as points, their numbers put in, decided in chunks."""

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np

from faultloop.assessment.codes import Bound
from faultloop.assessment.points import Points, from_rows
from faultloop.assessment.suspicions import Suspicion, suspicions
from faultloop.assessment.verdicts import decide
from faultloop.exchange.compact import Compact, compact
from faultloop.exchange.mapping import mapped, tables_of
from faultloop.exchange.patterns import NUMBER_OF, READING_OF, Rows
from faultloop.exchange.requests import AssessmentRequest
from faultloop.exchange.rows import Told
from faultloop.rules.loader import LoadedRules

# Points decided at once: a few thousand keep the columns in the processor's cache and the memory small.
CHUNK = 4096
_RANK = {word: rank for rank, word in enumerate(("stop-use", "urgent", "planned", "note", "none"))}


@dataclass(slots=True)
class Judged:
    """A batch judged: `found` has a compact row for every row that could be judged; `written` looks made up."""

    rows: Rows
    found: list[Compact | None]
    written: list[Suspicion] = field(default_factory=list)

    @property
    def counts(self) -> dict[str, int]:
        """Counts that add up: rows = results + held + refused."""
        status = Counter(self.rows.of(at).status for at in range(len(self.found)))
        return {
            "rows": len(self.found),
            "results": status["judged"],
            "held": status["held"],
            "refused": status["refused"],
        }

    def verdict(self, at: int) -> str:
        """Verdict of a row; what could not be judged is undetermined."""
        found = self.found[at]
        return "undetermined" if found is None else found.verdict

    def urgency(self, at: int) -> str:
        """Urgency of a row."""
        found = self.found[at]
        return self.rows.of(at).urgency if found is None else found.urgency

    def rules_asked(self, editions: Mapping[str, LoadedRules]) -> dict[str, LoadedRules]:
        """Rule sets by the name under which rows asked for them; a caller's own set by its own name."""
        requests = [pinned(told, editions) for told in self.rows.told if told.request is not None]
        asked = {(r.rules if isinstance(r.rules, str) else r.rule_set.rules.key): r.rule_set for r in requests}
        return dict(sorted(asked.items()))

    def repeated(self) -> list[list[int]]:
        """Positions of rows that name the same point, the least favourable first: it governs."""
        by_id: dict[str, list[int]] = {}
        for at, name in enumerate(self.rows.names):
            if name.id:
                by_id.setdefault(name.id, []).append(at)
        return [sorted(places, key=self.standing) for places in by_id.values() if len(places) > 1]

    def standing(self, at: int) -> tuple[int, int]:
        """Order of a row among others: the more urgent, then the worse."""
        worst = ("fail", "undetermined", "marginal", "pass-with-conditions", "pass")
        return _RANK[self.urgency(at)], worst.index(self.verdict(at))


def pinned(told: Told, editions: Mapping[str, LoadedRules]) -> AssessmentRequest:
    """The request of a row under the edition that its rule set's name stood for when it was judged."""
    assert told.request is not None
    asked = told.request.rules
    edition = editions.get(asked) if isinstance(asked, str) else None
    return told.request if edition is None else told.request.under(edition)


def judged(rows: Rows, editions: Mapping[str, LoadedRules] | None = None) -> Judged:
    """Judge every row that can be judged; the path is that of a single point."""
    found: list[Compact | None] = [None] * len(rows.pattern)
    ready = [at for at, told in enumerate(rows.told) if told.request is not None]
    if not ready:
        return Judged(rows, found)
    requests = [pinned(rows.told[at], editions or {}) for at in ready]
    by = tables_of(requests)
    shared = from_rows([mapped(request, by).row for request in requests])
    place = np.full(len(rows.told), -1)
    place[ready] = np.arange(len(ready))
    pattern = place[np.array(rows.pattern)]
    at_row = np.flatnonzero(pattern >= 0)
    columns, read = {name: np.array(column) for name, column in rows.values.items()}, []
    for begin in range(0, len(at_row), CHUNK):
        chunk = at_row[begin : begin + CHUNK]
        points = _filled(shared.picked(pattern[chunk]), {name: column[chunk] for name, column in columns.items()})
        for at, told in zip(chunk.tolist(), compact(decide(points, by)), strict=True):
            found[at] = told
        read.append((points.value, points.bound))
    value, bound = (np.concatenate(parts, axis=1) for parts in zip(*read, strict=True))
    placed = [Suspicion(s.reason, tuple(at_row[list(s.places)].tolist())) for s in suspicions(value, bound)]
    return Judged(rows, found, placed)


def _filled(points: Points, columns: Mapping[str, np.ndarray[tuple[int], np.dtype[np.float64]]]) -> Points:
    """Put each row's numbers where its pattern has a reading; what the pattern leaves out stays out."""
    for name, numbers in columns.items():
        if (reading := READING_OF.get(name)) is not None:
            put = (points.bound[reading] != Bound.MISSING) & ~np.isnan(numbers)
            points.value[reading, put] = numbers[put]
        else:
            number = points.numbers[NUMBER_OF[name]]
            put = ~np.isnan(number) & ~np.isnan(numbers)
            number[put] = numbers[put]
    return points


def judged_alone(request: AssessmentRequest) -> Compact:
    """The compact row of one request."""
    by = tables_of([request])
    return compact(decide(from_rows([mapped(request, by).row]), by))[0]


def requests_of(judged: Judged, places: Sequence[int], editions: Mapping[str, LoadedRules]) -> list[AssessmentRequest]:
    """The requests of some rows, each read by itself, to be answered in full."""
    return [pinned(judged.rows.alone(at), editions) for at in places]
