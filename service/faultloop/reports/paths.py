"""Outlines of a band: its two edges as steps, and the region between them, in places on the drawing."""

from faultloop.reports.figure import Region
from faultloop.reports.scale import Axis

Place = tuple[float, float]


def slow_edge(region: Region, x: Axis, y: Axis) -> list[Place]:
    """Greatest operating time: below the first point none is promised, after the last one its time holds."""
    steps = region.slow
    places = [(x.at(steps[0][0]), y.at(y.greatest))]
    before = y.greatest
    for current, time in steps:
        places += [(x.at(current), y.at(before)), (x.at(current), y.at(time))]
        before = time
    return _once([*places, (x.at(x.greatest), y.at(before))])


def fast_edge(region: Region, x: Axis, y: Axis) -> list[Place]:
    """Least operating time: up to each point its time holds, after the last one none is promised."""
    steps = region.fast
    if not steps:
        return []
    places = [(x.at(x.least), y.at(steps[0][1]))]
    for (current, time), after in zip(steps, [*(t for _, t in steps[1:]), y.least], strict=True):
        places += [(x.at(current), y.at(time)), (x.at(current), y.at(after))]
    return _once(places)


def outline(region: Region, x: Axis, y: Axis) -> list[Place]:
    """The region between the edges, from the first current at which operation may follow."""
    slow, fast = slow_edge(region, x, y), fast_edge(region, x, y)
    first = fast[1:] or [(slow[0][0], y.at(y.least))]
    left = first[0][0]
    return _once([(left, slow[0][1]), *first, (slow[-1][0], y.at(y.least)), *reversed(slow)])


def _once(places: list[Place]) -> list[Place]:
    """Without a place that repeats the one before."""
    return [place for at, place in enumerate(places) if at == 0 or place != places[at - 1]]
