"""Which of the representations offered a caller's Accept header likes best."""

from collections.abc import Sequence

CSV, HTML, JSON = "text/csv", "text/html", "application/json"


def preferred(accept: str | None, offered: Sequence[str]) -> str:
    """The best liked of what is offered; the first of equals, and the first where none is named."""
    ranges = [_range(part) for part in (accept or "*/*").split(",")]
    return max(offered, key=lambda kind: max((_fits(kind, name) * weight for name, weight in ranges), default=0.0))


def _range(part: str) -> tuple[str, float]:
    name, *parameters = (piece.strip().lower() for piece in part.split(";"))
    told = next((p.removeprefix("q=") for p in parameters if p.startswith("q=")), "1")
    try:
        return name, min(max(float(told), 0.0), 1.0)
    except ValueError:
        return name, 0.0


def _fits(kind: str, name: str) -> float:
    """A named type counts a little more than one that only its family or */* covers, at the same weight."""
    if name == kind:
        return 1.0
    return 0.99 if name == kind.split("/")[0] + "/*" else 0.98 if name == "*/*" else 0.0
