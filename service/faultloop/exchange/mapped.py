"""One point on its way from words to numbers."""

from dataclasses import dataclass, field

from faultloop.assessment.points import Row
from faultloop.assessment.tables import Tables
from faultloop.rules.loader import LoadedRules


@dataclass(slots=True)
class Mapped:
    """One point ready to be judged: its row, its rule set, the words needed to explain it."""

    row: Row
    tables: Tables
    rules: LoadedRules
    policy: dict[str, str | float]
    device: str | None
    residual: str | None
    upstream: list[str] = field(default_factory=list)
    assumptions: list[str] = field(default_factory=list)
    cautions: list[str] = field(default_factory=list)
    unused: list[str] = field(default_factory=list)
