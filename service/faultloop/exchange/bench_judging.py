"""States of a solved bench judged by the same checks as any point."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.benches.columns import put_columns
from faultloop.assessment.benches.network import Supply
from faultloop.assessment.benches.solving import SolvedBench
from faultloop.assessment.points import Number, from_rows
from faultloop.assessment.verdicts import decide
from faultloop.digests import canonical_bytes, sha256
from faultloop.exchange.bench_networks import BenchRequest, SeparatedBenchSupply
from faultloop.exchange.mapped import Mapped
from faultloop.exchange.mapping import mapped, tables_of
from faultloop.exchange.render import Body, Renderer
from faultloop.exchange.requests import AssessmentRequest

DEFAULT_RULES = "iec-60364"


@dataclass(frozen=True, slots=True)
class JudgedBench:
    """Verdict and urgency of every state (the worst of its supplies), and full answers of the states that are told."""

    verdict: list[int]
    urgency: list[int]
    answers: dict[int, list[Body]]
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
    for point, body in zip(given, bodies, strict=True):
        _put_supply(point, request, body)
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
        [supply for supply in solved.bench.supplies if supply.kind == "separated"],
    )


def _point(request: BenchRequest, body: SeparatedBenchSupply) -> AssessmentRequest:
    """A separated supply as a point of its own."""
    told = {
        "point": {"label": request.label},
        "supply": {
            "earthing": "separated",
            "nominal_voltage_between_lines_v": body.nominal_voltage_between_lines_v,
            "frequency_hz": request.frequency_hz,
        },
        "policy": request.policy,
    }
    if body.overcurrent_device is not None:
        told["overcurrent_device"] = body.overcurrent_device
    if "rules" in request.model_fields_set:
        told["rules"] = DEFAULT_RULES  # named, so that none is assumed; the set itself follows
    return AssessmentRequest.model_validate(told).under(request.rule_set)


def _put_supply(point: Mapped, request: BenchRequest, body: SeparatedBenchSupply) -> None:
    """What the checks ask of the transformer."""
    numbers, told = point.row.numbers, body.transformer
    numbers[Number.BETWEEN_LINES_V] = body.nominal_voltage_between_lines_v
    numbers[Number.FREQUENCY_HZ] = request.frequency_hz
    if told.rated_power_va is not None:
        numbers[Number.TRANSFORMER_VA] = told.rated_power_va
    percent = told.short_circuit_voltage_percent
    if isinstance(percent, int | float):
        numbers[Number.SHORT_CIRCUIT_PERCENT] = float(percent)
    elif percent is not None and percent.greatest > 0.0:
        middle = 0.5 * (percent.least + percent.greatest)
        numbers[Number.SHORT_CIRCUIT_PERCENT] = middle
        numbers[Number.SHORT_CIRCUIT_TOLERANCE] = 100.0 * (percent.greatest - middle) / middle


def input_digest_of(request: BenchRequest) -> str:
    """Digest of a bench's canonical bytes."""
    return sha256(bench_bytes(request))
