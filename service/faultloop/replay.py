"""Stored bytes -> computed again -> identical, or what differs."""

import json
from dataclasses import dataclass
from typing import Any

import orjson

from faultloop.assessment.texts import LANGUAGES
from faultloop.digests import json_bytes, sha256
from faultloop.exchange.batch_answers import provenance, stored_row
from faultloop.exchange.judging import Judged, judged, judged_alone, pinned
from faultloop.exchange.patterns import Rows
from faultloop.exchange.render import assess_requests, request_bytes
from faultloop.exchange.requests import AssessmentRequest
from faultloop.exchange.uploads import Upload, read_upload
from faultloop.exchange.workshop import workshop
from faultloop.rules.loader import LoadedRules, from_content, resolve
from faultloop.rules.strict import DataFileError

MOST_DIFFERENCES = 100


@dataclass(frozen=True, slots=True)
class Replay:
    """What computing a stored assessment again gave."""

    identical: bool
    recomputed: dict[str, Any] | None
    differences: list[dict[str, Any]]


def language_of(answer: bytes) -> str:
    """Language that a stored answer was given in."""
    language: str = orjson.loads(answer)["provenance"].get("language", LANGUAGES[0])
    return language


def asked_again(request: bytes, rules: str, content: bytes | None = None) -> AssessmentRequest | None:
    """A stored request, pinned to the very set by which it was judged; None where that set is not held here.

    A caller's own set is the content that was remembered with the assessment, whatever the request names.
    """
    try:
        held = resolve(rules) if content is None else from_content(content)
    except DataFileError:
        return None
    if held is None:
        return None
    body = json.loads(request)
    asked = body.get("rules", AssessmentRequest.model_fields["rules"].default)
    if isinstance(asked, dict):
        body["rules"] = asked = rules
    return AssessmentRequest.model_validate(body, context={asked: held})


def replay(request: bytes, answer: bytes, rules: str, input_digest: str, content: bytes | None = None) -> Replay:
    """Compute a stored request again, under the very edition and in the language that were stored with it."""
    point = asked_again(request, rules, content)
    if point is None:
        return Replay(False, None, [{"pointer": "/provenance/rules", "stored": rules}])
    language = language_of(answer)
    if language not in LANGUAGES:
        return Replay(False, None, [{"pointer": "/provenance/language", "stored": language}])
    again = assess_requests([point], [input_digest], [language])[0]
    if json_bytes(again) == answer:
        return Replay(True, again, [])
    return Replay(
        False,
        again,
        list(_differences(json.loads(answer), json.loads(json_bytes(again)), ""))[:MOST_DIFFERENCES],
    )


def _differences(stored: Any, now: Any, pointer: str) -> list[dict[str, Any]]:
    """Every place at which two JSON values differ, by JSON Pointer."""
    if isinstance(stored, dict) and isinstance(now, dict):
        pairs = [(key, stored.get(key), now.get(key)) for key in {**stored, **now}]
    elif isinstance(stored, list) and isinstance(now, list) and len(stored) == len(now):
        pairs = [(str(at), a, b) for at, (a, b) in enumerate(zip(stored, now, strict=True))]
    else:
        return [] if stored == now else [{"pointer": pointer, "stored": stored, "recomputed": now}]
    return [found for key, a, b in pairs for found in _differences(a, b, f"{pointer}/{_escaped(key)}")]


def _escaped(key: str) -> str:
    return key.replace("~", "~0").replace("/", "~1")


def editions_of(stored: dict[str, Any]) -> dict[str, LoadedRules]:
    """The editions that the names of a batch's rule sets stood for when it was judged."""
    held = {told["asked"]: resolve(told["rules"]) for told in stored["provenance"]["rules"]}
    return {asked: rules for asked, rules in held.items() if rules is not None}


def changed_since(stored: dict[str, Any], rows: Rows) -> list[str]:
    """What has changed since a batch was judged."""
    told, now = stored["provenance"], provenance(Judged(rows, []), "", editions_of(stored))
    named = {"engine": "engine", "rules": "rules", "devices": "devices_digest"}
    return [name for name, key in named.items() if told[key] != now[key]]


def batch_row(upload: Upload, answer: bytes, number: int, language: str) -> dict[str, Any] | None:
    """One row of a stored batch in full, computed again under the stored edition; None where there is no such row.

    A batch stores no words but those of its questions and faults, so the others are made in the language asked for.
    """
    rows, stored = read_upload(upload).rows, json.loads(answer)
    if number not in rows.numbers:
        return None
    at, told = (place := list(rows.numbers).index(number)), rows.alone(place)
    kept = next(row for part in ("results", "held", "refused") for row in stored[part] if row["row"] == number)
    body = {"row": number, "status": told.status, "raw": rows.raw(at), "stored": kept}
    now = Judged(rows, [None] * len(rows.pattern))
    if told.request is not None:
        request = pinned(told, editions_of(stored))
        body["assessment"] = assess_requests([request], [sha256(request_bytes(told.request))], [language])[0]
        now.found[at] = judged_alone(request)
    body["identical"] = json.loads(json_bytes(stored_row(now, at))) == kept
    return {**body, "changed": changed_since(stored, rows)}


def batch_workshop(upload: Upload, answer: bytes, population: int | None, language: str) -> dict[str, Any]:
    """The workshop view of a stored batch, computed again under the stored editions."""
    read, stored = read_upload(upload), json.loads(answer)
    editions = editions_of(stored)
    view = workshop(read, judged(read.rows, editions), editions, population, language=language)
    return view | {"provenance": stored["provenance"], "changed": changed_since(stored, read.rows)}
