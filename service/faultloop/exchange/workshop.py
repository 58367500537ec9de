"""A judged batch -> the workshop view: what to take out of use, what to put right, what to ask, what was not looked at.

It is made from full answers, chunk by chunk, so that it says nothing that the answers do not say.
"""

from collections import Counter
from collections.abc import Iterator, Mapping
from typing import Any

from faultloop.assessment.suspicions import Suspicion
from faultloop.exchange.batch_answers import asked, provenance
from faultloop.exchange.judging import Judged, requests_of
from faultloop.exchange.listing import deciding
from faultloop.exchange.render import assess_requests
from faultloop.exchange.sampling import greatest_bad
from faultloop.exchange.uploads import Read
from faultloop.exchange.workshop_words import WorkshopWords, workshop_words
from faultloop.rules.loader import LoadedRules

Body = dict[str, Any]
_CHUNK = 500
_MET = ("pass", "pass-with-conditions")


class PopulationTooSmall(ValueError):
    """Fewer points are said to exist than the batch holds."""


def workshop(
    read: Read,
    judged: Judged,
    editions: Mapping[str, LoadedRules],
    population: int | None = None,
    input_digest: str = "",
    language: str = "en",
) -> Body:
    """The view of a batch; rows of the same point count once, by the least favourable."""
    view = _View(judged, workshop_words(language))
    if population is not None and population < view.points:
        raise PopulationTooSmall(f"the batch holds {view.points} different points")
    for at, answer in _answers(judged, editions, language):
        view.take(at, answer)
    for at, found in enumerate(judged.found):
        if found is None:
            view.take_unjudged(at)
    return view.body(population) | {
        "defaults": read.reading["defaults"],
        "provenance": provenance(judged, input_digest, editions),
    }


def _answers(judged: Judged, editions: Mapping[str, LoadedRules], language: str) -> Iterator[tuple[int, Body]]:
    places = [at for at, found in enumerate(judged.found) if found is not None]
    for begin in range(0, len(places), _CHUNK):
        chunk = places[begin : begin + _CHUNK]
        requests = requests_of(judged, chunk, editions)
        yield from zip(chunk, assess_requests(requests, languages=[language] * len(chunk)), strict=True)


class _Groups(dict[Any, Body]):
    """Bodies by key, each with the rows that belong to it."""

    def add(self, key: Any, row: int, body: Body) -> Body:
        """Add a row to its group, which is made of the body when it is new."""
        group = self.setdefault(key, {**body, "rows": []})
        if row not in group["rows"][-1:]:
            group["rows"].append(row)
        return group


class _View:
    """Takes answers one by one and keeps what the view needs of them."""

    def __init__(self, judged: Judged, words: WorkshopWords) -> None:
        self._judged, self._words = judged, words
        repeated = judged.repeated()
        self._others = {places[0]: places for places in repeated}
        self._passed_over = {at for places in repeated for at in places[1:]}
        self.points = len(judged.found) - len(self._passed_over)
        self._work: list[tuple[Any, Body]] = []
        self._questions, self._conditions, self._untested = _Groups(), _Groups(), _Groups()
        self._cautions: dict[str, Body] = {}
        self._decided: Counter[bool] = Counter()

    def take(self, at: int, answer: Body) -> None:
        """Take a judged row."""
        row, verdict = self._judged.rows.numbers[at], answer["verdict"]
        for caution in answer["cautions"]:
            self._cautions[caution["caution"]] = caution
        for told in answer["not_examined"]:
            self._untested.add((told["subject"], told["reason"]), row, told)
        for condition in answer["conditions"]:
            self._conditions.add(condition["condition"], row, condition)
        for finding in answer["findings"]:
            if finding["counts"] and "settled_by" in finding:
                question = {"question": finding["settled_by"], "who": self._words.acts(self._words.default.settle)}
                self._questions.add(finding["settled_by"], row, question)
        if at in self._passed_over:
            return
        if verdict == "fail" or verdict in _MET:
            self._decided[verdict == "fail"] += 1
        if verdict == "fail" or answer["urgency"] == "stop-use":
            self._work.append((_risk(answer), self._item(at, answer)))

    def take_unjudged(self, at: int) -> None:
        """Take a row that was held or refused."""
        told, row, words = self._judged.rows.of(at), self._judged.rows.numbers[at], self._words
        for question in told.questions:
            body = {"question": question.question, "who": words.acts(words.default.held), "where": question.where}
            group = self._questions.add((question.where, question.question), row, body)
            raw = group.setdefault("raw", [])
            if question.raw not in raw:
                raw.append(question.raw)
        for fault in told.faults:
            body = {"question": fault.detail, "who": words.acts(words.default.held), "where": fault.where}
            self._questions.add((fault.where, fault.detail), row, body if fault.where else _without(body, "where"))
        if told.urgency == "stop-use" and at not in self._passed_over:
            explanation = words.sentences.held_explanation.format(question=asked(told))
            item = {"verdict": "undetermined", "urgency": "stop-use", "explanation": explanation}
            self._work.append(((0, 1, 0.0, 0.0), self._named(at) | item | {"who": words.acts(words.default.stop_use)}))

    def _named(self, at: int) -> Body:
        rows = self._judged.rows
        name, told = rows.names[at], {"row": rows.numbers[at]}
        both = zip(("point_id", "label", "location"), name, strict=True)
        also = self._others.get(at)
        numbers = ", ".join(str(number) for number in sorted(rows.numbers[place] for place in also or ()))
        return (
            told
            | {part: text for part, text in both if text}
            | ({"also": self._words.sentences.also.format(rows=numbers)} if also else {})
        )

    def _item(self, at: int, answer: Body) -> Body:
        finding, words = deciding(answer), self._words
        stop = answer["urgency"] == "stop-use"
        body = self._named(at) | {"verdict": answer["verdict"], "urgency": answer["urgency"]}
        if finding is not None:
            body |= {"check": finding["check"], "title": finding["title"]}
        body["explanation"] = finding["explanation"] if finding is not None else ""
        body["who"] = words.acts(words.default.stop_use) if stop else words.fixes_by(body.get("check", ""))
        touch = answer["quantities"].get("touch_voltage_v", {}).get("greatest")
        return body if touch is None else body | {"touch_voltage_v": touch}

    def body(self, population: int | None) -> Body:
        """The view, most urgent first."""
        counts, words = self._judged.counts, self._words
        work = [item for _, item in sorted(self._work, key=lambda told: (told[0], told[1]["row"]))]
        body: Body = {
            "counts": counts,
            "points": self.points,
            "verdicts": dict(Counter(self._judged.verdict(at) for at in range(counts["rows"]))),
            "stop_use": [item for item in work if item["urgency"] == "stop-use"],
            "fix": [item for item in work if item["urgency"] != "stop-use"],
            "questions": sorted(self._questions.values(), key=lambda group: -len(group["rows"])),
            "conditions": list(self._conditions.values()),
            "written": [self._written(found) for found in self._judged.written],
            "not_tested": [_counted(group) for group in self._untested.values()],
            "sample": self._sample(population),
            "cautions": list(self._cautions.values()),
            "changed": [],
        }
        if missing := counts["held"] + counts["refused"]:
            body["not_judged"] = words.sentences.not_judged.format(count=missing, rows=counts["rows"])
        return body

    def _written(self, found: Suspicion) -> Body:
        rows = [self._judged.rows.numbers[at] for at in found.places]
        return {"reason": found.reason, "text": self._words.written[found.reason], "rows": rows}

    def _sample(self, population: int | None) -> Body:
        failed, decided, words = self._decided[True], self._decided.total(), self._words.sample
        plain = words.plain.format(decided=decided, failed=failed)
        if population is None:
            return {"decided": decided, "failed": failed, "text": [plain, words.unstated]}
        greatest = greatest_bad(population, decided, failed)
        told = (words.all if decided == population else words.stated).format(
            population=population, decided=decided, failed=failed, greatest=greatest
        )
        known = {"decided": decided, "failed": failed, "population": population}
        return {**known, "greatest_failing": greatest, "text": [plain, told]}


def _risk(answer: Body) -> tuple[int, int, float, float]:
    """Order of work: urgency, then a shown failure, then touch voltage, then how long it lasts."""
    urgency = ("stop-use", "urgent", "planned", "note", "none").index(answer["urgency"])
    quantities = answer["quantities"]
    touch = quantities.get("touch_voltage_v", {}).get("greatest")
    time = quantities.get("disconnection_time_s", {}).get("greatest")
    # An open end has no number and comes first.
    return (
        urgency,
        int(answer["verdict"] != "fail"),
        -(float("inf") if touch is None else touch),
        -(float("inf") if time is None else time),
    )


def _counted(group: Body) -> Body:
    return {name: group[name] for name in ("subject", "reason", "text")} | {"rows": len(group["rows"])}


def _without(body: Body, name: str) -> Body:
    return {key: value for key, value in body.items() if key != name}
