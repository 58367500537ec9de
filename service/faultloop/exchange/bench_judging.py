"""States of a solved bench judged by the same checks as any point."""

from dataclasses import dataclass
from typing import Any

import numpy as np

from faultloop.assessment.benches.columns import put_columns
from faultloop.assessment.benches.network import Supply
from faultloop.assessment.benches.solving import SolvedBench
from faultloop.assessment.checks import CHECKS
from faultloop.assessment.points import from_rows
from faultloop.assessment.standing import Verdict
from faultloop.assessment.texts import texts
from faultloop.assessment.verdicts import Outcome, decide
from faultloop.digests import canonical_bytes, sha256
from faultloop.exchange.bench_mapping import stated
from faultloop.exchange.bench_networks import BenchItem, BenchRequest, BenchTransformer, SeparatedBenchSupply
from faultloop.exchange.mapping import mapped, tables_of
from faultloop.exchange.render import Body, Renderer
from faultloop.exchange.requests import AssessmentRequest

DEFAULT_RULES = "iec-60364"
SOLVED_NF = 0.0
_CONTACTS = {"none": "unconnected", "non-earthed": "bonded", "earthed": "earthed"}


@dataclass(frozen=True, slots=True)
class JudgedBench:
    """Verdict and urgency of every state (the worst of its supplies), and full answers of the states that are told."""

    verdict: list[int]
    urgency: list[int]
    answers: dict[int, list[Body]]
    unmet: list[list[str]]
    supplies: list[Supply]


def bench_bytes(request: BenchRequest) -> bytes:
    """Canonical bytes of a validated bench, unset fields left out, numbers as floats."""
    return canonical_bytes(request.model_dump(mode="json", by_alias=True, exclude_unset=True))


def judged_bench(request: BenchRequest, solved: SolvedBench, input_digest: str, language: str) -> JudgedBench:
    """Judge every separated supply in every state."""
    bodies = sorted((s for s in request.supplies if isinstance(s, SeparatedBenchSupply)), key=lambda s: s.id)
    points_of = [_point(request, body) for body in bodies]
    by = tables_of(points_of)
    given = [mapped(point, by) for point in points_of]
    rows = from_rows([point.row for point in given])
    points = rows.picked(np.tile(np.arange(len(given)), solved.count))
    put_columns(points, solved)
    outcome = decide(points, by)
    shape = (solved.count, len(given))
    base = solved.states.base
    renderer = Renderer(points, outcome, language)
    told = [renderer.answer(base * len(given) + row, point, input_digest) for row, point in enumerate(given)]
    return JudgedBench(
        outcome.verdict.reshape(shape).min(axis=1).tolist(),
        outcome.urgency.reshape(shape).min(axis=1).tolist(),
        {base: told},
        _unmet(outcome, shape, language),
        [supply for supply in solved.bench.supplies if supply.kind == "separated"],
    )


def _unmet(outcome: Outcome, shape: tuple[int, int], language: str) -> list[list[str]]:
    """Of every state the titles of the checks that fail or are undetermined at any of its supplies."""
    verdict, counts = outcome.findings.verdict.reshape(-1, *shape), outcome.findings.counts.reshape(-1, *shape)
    # A finding that decides nothing, as another of its group does, is left out.
    unmet = np.logical_or.reduce((verdict <= Verdict.UNDETERMINED) & counts, axis=2)
    titles = [texts(language).checks[check.id].title for check in CHECKS]
    return [[titles[at] for at in np.flatnonzero(unmet[:, state])] for state in range(shape[0])]


def _point(request: BenchRequest, body: SeparatedBenchSupply) -> AssessmentRequest:
    """A separated supply as a point of its own; what was solved of it takes the place of what would be estimated."""
    told: dict[str, Any] = {
        "point": {"label": request.label},
        "supply": {
            "earthing": "separated",
            "nominal_voltage_between_lines_v": body.nominal_voltage_between_lines_v,
            "frequency_hz": request.frequency_hz,
        },
        "separated_supply": {
            "transformer": _transformer(body.transformer),
            "outlets": body.outlets,
            "items": [_item(item) for item in request.items if item.fed_by == body.id],
            "earth_contacts": _CONTACTS[body.bonding],
            "bonding_conductor": body.bonding_conductor,
            "wiring_length_m": body.wiring_length_m,
        },
        "policy": request.policy,
    }
    if body.overcurrent_device is not None:
        told["overcurrent_device"] = body.overcurrent_device
    if "rules" in request.model_fields_set:
        told["rules"] = DEFAULT_RULES  # named, so that none is assumed; the set itself follows
    return AssessmentRequest.model_validate(told).under(request.rule_set)


def _transformer(body: BenchTransformer) -> dict[str, Any]:
    """The transformer as a point has it: the middle of an impedance with its half width as tolerance."""
    told: dict[str, Any] = {"rated_power_va": body.rated_power_va, "screen": body.screen}
    # The current of a contact is solved with the windings' capacitance, so none is to be assumed.
    told["interwinding_capacitance_nf"] = SOLVED_NF
    if body.short_circuit_voltage_percent is None:
        return told
    percent = stated(body.short_circuit_voltage_percent)
    told["short_circuit_voltage_percent"] = percent.nominal
    if percent.open:
        told["short_circuit_tolerance_percent"] = 100.0 * (percent.greatest - percent.nominal) / percent.nominal
    return told


def _item(body: BenchItem) -> dict[str, Any]:
    return {"protection_class": body.protection_class, "lead": body.lead}


def input_digest_of(request: BenchRequest) -> str:
    """Digest of a bench's canonical bytes."""
    return sha256(bench_bytes(request))
