"""A time-current figure as data: what is drawn, and the same in words for those who do not see it."""

from dataclasses import dataclass, field

from faultloop.protection.band import Band
from faultloop.reports.scale import Axis, ampere, decades, second

PLOT_LEFT, PLOT_WIDTH, PLOT_HEIGHT = 80.0, 608.0, 420.0


@dataclass(frozen=True, slots=True)
class Region:
    """The band of one device: currents are its steps' times the scale [A], times in second."""

    residual: bool
    band: Band
    scale: float
    words: str
    slow_words: str
    fast_words: str

    @property
    def slow(self) -> list[tuple[float, float]]:
        """Points of the greatest operating time."""
        return [(current * self.scale, time) for current, time in self.band.slow]

    @property
    def fast(self) -> list[tuple[float, float]]:
        """Points of the least operating time."""
        return [(current * self.scale, time) for current, time in self.band.fast]


@dataclass(frozen=True, slots=True)
class Span:
    """Prospective currents from least to greatest [A]; an end that is not bounded is None."""

    least: float | None
    greatest: float | None
    words: str


@dataclass(frozen=True, slots=True)
class Deadline:
    """A required disconnection time [s]."""

    time_s: float
    words: str


@dataclass(frozen=True, slots=True)
class Figure:
    """Everything that one drawing shows; `description` holds it in words."""

    key: str
    language: str
    title: str
    subtitle: str
    current_axis: str
    time_axis: str
    regions: list[Region]
    span: Span | None = None
    deadline: Deadline | None = None
    notes: list[str] = field(default_factory=list)
    footer: list[str] = field(default_factory=list)
    description: str = ""

    def axes(self, top: float) -> tuple[Axis, Axis]:
        """The current axis and the time axis, in whole decades around everything that is shown."""
        points = [point for region in self.regions for point in (*region.slow, *region.fast)]
        ends = [self.span.least, self.span.greatest] if self.span else []
        currents = [*(current for current, _ in points), *(end for end in ends if end is not None)]
        times = [*(time for _, time in points), *([self.deadline.time_s] if self.deadline else [])]
        low, high = decades(currents)
        x = Axis(low, high, PLOT_LEFT, PLOT_WIDTH, ampere, room=52)
        low, high = decades(times)
        return x, Axis(low, high, top + PLOT_HEIGHT, -PLOT_HEIGHT, second, room=17)
