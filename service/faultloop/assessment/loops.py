"""Which loop impedance is decided on, from a live reading, a dead test and the external loop."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Bound, Choice, Codes, Method, Number, Reading
from faultloop.assessment.given import Given
from faultloop.assessment.points import Flags, Ints
from faultloop.electrical.conductors import resistance
from faultloop.electrical.measurement import Array, Interval, combined


class Basis(Codes):
    """What the loop rests on."""

    NONE = 0
    LIVE = 1
    NO_TRIP = 2
    DEAD = 3
    ELECTRODE = 4


class Fault(Codes):
    """Why a loop may not be decided on; 0 where it may."""

    NONE = 0
    MISSING = 1
    IMPLAUSIBLE = 2
    BELOW_EXTERNAL = 3


@dataclass(frozen=True, slots=True)
class Expected:
    """The loop that the circuit's parts add up to, by a dead test or by length; nan where unknown."""

    value: Array
    uncertainty: Array
    by_dead_test: Flags
    dead_excess: Array
    dead_slack: Array


@dataclass(frozen=True, slots=True)
class Loops:
    """The loop and what is known of its parts, (n,) each."""

    loop: Interval
    live: Interval
    basis: Ints
    fault: Ints
    dead_resistance: Array
    heated_known: Array
    external: Array
    external_u: Array
    expected: Expected
    excess: Array
    slack: Array
    uplift: Array
    explained: Flags
    beyond: Flags
    dead_beyond: Flags


def loops(g: Given) -> Loops:
    """Choose the loop.

    A no-trip reading errs high, one-sided; Ze with a dead R1 + R2 stands in its place unless the reading
    exceeds them by more than the uplift and the combined uncertainty.  A high-current reading and the dead
    sum are both believed, and the higher of the two decides.
    """
    points, known_live = g.points, g.known[Reading.LOOP]
    no_trip = points.method[Reading.LOOP] == Method.NO_TRIP
    live, dead_resistance = _live(g, no_trip), _dead_resistance(g)
    expected = _expected(g, dead_resistance)
    excess = points.value[Reading.LOOP] - expected.value
    uplift = np.where(no_trip, g.rule["uplift"], 0.0)
    slack = combined(g.uncertainty[Reading.LOOP], expected.uncertainty) + uplift
    # A dead test that says more than its route can have names the fault itself, whatever it then adds up to.
    dead_beyond = expected.dead_excess > expected.dead_slack
    beyond = (known_live & (excess > slack)) | dead_beyond
    outranked = expected.by_dead_test & no_trip & ~(excess > slack) & (points.bound[Reading.LOOP] != Bound.ABOVE)
    loop, basis = _chosen(g, live, expected, outranked | (expected.by_dead_test & ~known_live), no_trip)
    external, external_u = _external(g)
    return Loops(
        loop=loop,
        live=live,
        basis=basis,
        fault=_fault(g, basis),
        dead_resistance=dead_resistance,
        # An electrode is not a conductor that warms in service.
        heated_known=np.where(basis == Basis.ELECTRODE, 0.0, dead_resistance),
        external=external,
        external_u=external_u,
        expected=expected,
        excess=excess,
        slack=slack,
        uplift=uplift,
        explained=~np.isnan(expected.value) & ~beyond,
        beyond=beyond,
        dead_beyond=dead_beyond,
    )


def _live(g: Given, no_trip: Flags) -> Interval:
    """The live reading; a no-trip one may be high by the uplift, but is floored at Ze."""
    plain = g.reading(Reading.LOOP)
    external = np.where(g.known[Reading.EXTERNAL], g.points.value[Reading.EXTERNAL], 0.0)
    lower = np.maximum(plain.least - g.rule["uplift"], np.minimum(external, plain.nominal))
    return Interval(np.where(no_trip, np.fmin(lower, plain.least), plain.least), plain.greatest, plain.nominal)


def _dead_resistance(g: Given) -> Array:
    """R1 + R2 where a dead test measured it; a value computed from the loop itself proves nothing."""
    reading = Reading.LINE_PLUS_PROTECTIVE
    method = g.points.method[reading]
    tested = (g.points.bound[reading] == Bound.EXACT) & (method != Method.CALCULATED) & (method != Method.DECLARED)
    return np.where(tested, g.points.value[reading], np.nan)


def _expected(g: Given, dead_resistance: Array) -> Expected:
    """Ze with R1 + R2 by dead test, else with the resistance that length and areas give."""
    number, at = g.points.number, Reading.EXTERNAL
    usable = g.known[at] & (g.points.method[at] != Method.CALCULATED) & (g.points.bound[at] != Bound.ABOVE)
    external = np.where(usable, g.points.value[at], np.nan)
    both = number(Number.LINE_OHM_PER_KM) + number(Number.PROTECTIVE_OHM_PER_KM)
    route = resistance(both, number(Number.LENGTH_M))
    # Half-way round a ring the two legs lie in parallel.
    route = np.where(g.points.choice(Choice.RING) == 1, route / 4.0, route)
    by_dead_test = ~np.isnan(external + dead_resistance) & ~g.tt
    part = np.where(by_dead_test, dead_resistance, route)
    route_u = route * g.rule["length_uncertainty"] / 100.0 + g.rule["length_constant"]
    dead_u = g.uncertainty[Reading.LINE_PLUS_PROTECTIVE]
    part_u = np.where(by_dead_test, dead_u, route_u)
    return Expected(
        value=external + part,
        uncertainty=combined(g.uncertainty[at], part_u),
        by_dead_test=by_dead_test,
        dead_excess=dead_resistance - route,
        dead_slack=combined(dead_u, route_u),
    )


def _chosen(g: Given, live: Interval, expected: Expected, outranked: Flags, no_trip: Flags) -> tuple[Interval, Ints]:
    dead, dead_u = expected.value, expected.uncertainty
    # On TT without a loop reading the loop is R_A and an allowance for the source's earth.
    electrode, allowance = g.reading(Reading.ELECTRODE), g.rule["source_allowance"]
    stands_in = g.tt & ~g.known[Reading.LOOP] & g.known[Reading.ELECTRODE]

    def pick(of_live: Array, of_dead: Array, of_electrode: Array) -> Array:
        higher = np.where(expected.by_dead_test, np.fmax(of_live, of_dead), of_live)
        return np.where(stands_in, of_electrode, np.where(outranked, of_dead, higher))

    loop = Interval(
        pick(live.least, np.maximum(dead - dead_u, 0.0), electrode.least),
        pick(live.greatest, dead + dead_u, electrode.greatest + allowance),
        pick(live.nominal, dead, electrode.nominal + allowance),
    )
    by_live = np.where(g.known[Reading.LOOP], np.where(no_trip, Basis.NO_TRIP, Basis.LIVE), Basis.NONE)
    by_dead = outranked | (expected.by_dead_test & (dead > live.nominal))
    basis = np.where(by_dead, Basis.DEAD, np.where(stands_in, Basis.ELECTRODE, by_live))
    return loop, basis


def _external(g: Given) -> tuple[Array, Array]:
    """The part of the loop outside the installation, which is not heated: Ze, on TT else R_A."""
    points, ze, ra = g.points, Reading.EXTERNAL, Reading.ELECTRODE
    measured = points.method[ze] <= Method.HIGH_CURRENT
    # An under-range Ze may be anything smaller, and a smaller one leaves more to be heated.
    use = (points.bound[ze] == Bound.EXACT) & measured
    electrode = g.tt & (points.bound[ra] == Bound.EXACT)
    value = np.where(use, points.value[ze], np.where(electrode, points.value[ra], np.nan))
    return value, np.where(use, g.uncertainty[ze], np.where(electrode, g.uncertainty[ra], np.nan))


def _fault(g: Given, basis: Ints) -> Ints:
    value, least = g.points.value, g.rule["least_plausible"]
    parts = [Reading.LOOP, Reading.EXTERNAL, Reading.LINE_PLUS_PROTECTIVE]
    exact = g.points.bound[parts] == Bound.EXACT
    implausible: Flags = np.logical_or.reduce(exact & (value[parts] < least), axis=0)
    u = combined(g.uncertainty[Reading.LOOP], g.uncertainty[Reading.EXTERNAL])
    below = value[Reading.EXTERNAL] - value[Reading.LOOP] > u
    fault = np.where(below, Fault.BELOW_EXTERNAL, np.where(basis == Basis.NONE, Fault.MISSING, Fault.NONE))
    return np.where(implausible, Fault.IMPLAUSIBLE, fault)
