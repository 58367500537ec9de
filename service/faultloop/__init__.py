"""faultloop: would a fault be cleared in time?  Measured points in, defensible verdicts out."""

from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"

if TYPE_CHECKING:
    from collections.abc import Sequence

__all__ = ["__version__", "assess", "assess_many", "bench_network"]


def assess(request: dict[str, Any]) -> dict[str, Any]:
    """Judge one measured point; the body and the answer are those of the service."""
    return assess_many([request])[0]


def assess_many(requests: "Sequence[dict[str, Any]]") -> list[dict[str, Any]]:
    """Judge many measured points in one pass; the same answers as one by one."""
    from faultloop.exchange.render import assess_requests
    from faultloop.exchange.requests import AssessmentRequest

    return assess_requests([AssessmentRequest.model_validate(request) for request in requests])


def bench_network(request: dict[str, Any], language: str = "en") -> dict[str, Any]:
    """Solve and judge one bench; the body and the answer are those of the service."""
    from faultloop.exchange.bench_faults import validated
    from faultloop.exchange.bench_render import bench_answer

    return bench_answer(validated(request), language)
