"""The floor: a FastAPI and Pydantic route that takes and returns the service's bodies and computes nothing."""

import gc

from fastapi import FastAPI

from faultloop.exchange.answers import Assessment
from faultloop.exchange.bench_answers import BenchNetwork
from faultloop.exchange.bench_faults import validated
from faultloop.exchange.bench_networks import BenchRequest
from faultloop.exchange.bench_render import bench_answer
from faultloop.exchange.examples import EXAMPLE_BENCH, EXAMPLE_REQUEST, EXAMPLE_SEPARATED
from faultloop.exchange.render import assess_requests
from faultloop.exchange.requests import AssessmentRequest
from faultloop.exchange.separated_supplies import SeparatedSupplyRequest, as_assessment

ANSWER = Assessment.model_validate(assess_requests([AssessmentRequest.model_validate(EXAMPLE_REQUEST)])[0])
BENCH = BenchNetwork.model_validate(bench_answer(validated(EXAMPLE_BENCH)))
_SUPPLY = as_assessment(SeparatedSupplyRequest.model_validate(EXAMPLE_SEPARATED))
SUPPLY_ANSWER = Assessment.model_validate(assess_requests([_SUPPLY])[0])

app = FastAPI()


@app.post("/bare", response_model_exclude_none=True)
async def bare(body: AssessmentRequest) -> Assessment:  # noqa: ARG001
    """Validate the request, answer a ready answer through its model."""
    return ANSWER


@app.post("/bare-bench", response_model_exclude_none=True)
async def bare_bench(body: BenchRequest) -> BenchNetwork:  # noqa: ARG001
    """The same for a bench."""
    return BENCH


@app.post("/bare-supply", response_model_exclude_none=True)
async def bare_supply(body: SeparatedSupplyRequest) -> Assessment:  # noqa: ARG001
    """The same for one separating transformer."""
    return SUPPLY_ANSWER


gc.collect()
gc.freeze()
