"""Does the protective conductor bear the fault current for as long as it flows, at every current that can occur?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON, PREREQUISITES, prerequisites_are_wanting
from faultloop.assessment.codes import Choice, LetThrough, Number
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing, Verdict
from faultloop.assessment.loops import Fault
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.assessment.series import least_time, upstream_time
from faultloop.electrical.conductors import ADIABATIC_FROM_S, ADIABATIC_TO_S, let_through_area
from faultloop.electrical.measurement import Array, Interval
from faultloop.protection.band import faster
from faultloop.protection.catalogue import catalogue

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    "sizes-not-stated",
    "device-not-held",
    "loop-unusable",
    "size-table",
    "let-through-exceeds",
    "let-through-missing",
    "standard-combination",
    "standard-circuit",
    "too-slow-to-judge",
    "time-too-long-by-band",
)


def _applies(_: Points, q: Quantities) -> Flags:
    return ~q.tt


def _energies(points: Points, q: Quantities, tried: Array) -> tuple[Array, Array]:
    """Energy [A²s] and time [s] of the quickest device at tried currents, (T, n)."""
    row, band = points.choice(Choice.DEVICE), points.overcurrent
    time = band.greatest_time(row, tried)
    multiple = tried / (points.number(Number.RESIDUAL_MA) / 1000.0)
    residual = catalogue().residual.greatest_time(points.choice(Choice.RESIDUAL), multiple)
    credited = q.residual.tested & ~q.residual.over_limit & ~np.isnan(residual)
    others = np.where(credited, residual, np.inf)
    if len(points.upstream):
        others = faster(others, upstream_time(points, tried))
    # What acts at once interrupts before the current is at its full value: only a let-through energy tells.
    # The energy of a fuse-link does not rise with the current (common practice): its last tested point bounds it.
    fuse = points.choice(Choice.LET_THROUGH) == LetThrough.FUSE
    flowing = np.where(fuse, band.tested_current(row, tried), tried)
    own = np.where((time <= ADIABATIC_FROM_S) & ~fuse, q.let_through.energy_a2s, flowing * flowing * time)
    return np.fmin(own, tried * tried * others), np.minimum(time, others)


def _least_energies(points: Points, tried: Array) -> Array:
    """Energy [A²s] that flows even if the device acts as soon as its band allows, (T, n); 0 where a quicker one may."""
    least = least_time(points, tried)
    quicker = ~np.isnan(points.number(Number.RESIDUAL_MA)) | (least < ADIABATIC_FROM_S)
    return np.where(quicker, 0.0, tried * tried * least)


def _anywhere(flags: Flags) -> Flags:
    """Where any of the tried currents, (T, n), has the flag."""
    found: Flags = np.logical_or.reduce(flags, axis=0)
    return found


def _judge(points: Points, q: Quantities) -> Judged:
    k, area = points.number(Number.PROTECTIVE_K), points.number(Number.PROTECTIVE_MM2)
    row, basis = points.choice(Choice.DEVICE), points.choice(Choice.LET_THROUGH)
    cases = Cases(REASONS)
    prerequisites_are_wanting(cases, q, Standing.NOT_EXAMINED)
    cases.when(np.isnan(k * area), Standing.NOT_EXAMINED, "sizes-not-stated")
    cases.when(row < 0, Standing.NOT_EXAMINED, "device-not-held")
    if cases.settle_everything():
        return cases.settle_unvalued()
    table, by_maker = (
        points.number(Number.PROTECTIVE_TABLE_MM2),
        let_through_area(k, points.number(Number.LET_THROUGH_A2S)),
    )
    exceeded = (basis == LetThrough.MAKER) & (by_maker > area)
    cases.when(exceeded, Standing.UNMET, "let-through-exceeds")
    tabled = area >= table
    cases.when(tabled, Standing.MET, "size-table")
    unusable = (q.loops.fault != Fault.NONE) | np.isnan(q.current.least)
    cases.when(unusable, Standing.NOT_EXAMINED, "loop-unusable")
    greatest = q.let_through.board_a
    # Whether the current reaches I_a is for the disconnection to say; what is in doubt there is not held twice.
    least = np.where(q.overcurrent == Verdict.MARGINAL, np.fmax(q.current.least, q.operating_current), q.current.least)
    # Time is constant within a step of the band, so the worst current of each step is its greatest.
    steps = [points.overcurrent.slow_current[device].T for device in (row, *points.upstream)]
    edges = np.nextafter(np.concatenate(steps), 0.0)
    inside = (edges > least) & (edges < greatest)
    tried = np.concatenate([least[None], greatest[None], np.where(inside, edges, least)])
    energy, time = _energies(points, q, tried)
    needed = let_through_area(k, energy)
    over = ~(needed <= area)
    endless = ~(time <= ADIABATIC_TO_S)
    # What is shown to be too much is shown by the circuit's own device: one upstream can only take from it.
    own = tried[: len(steps[0]) + 2]
    surely = let_through_area(k, _least_energies(points, own)) > area
    surely &= points.overcurrent.greatest_time(row, own) <= ADIABATIC_TO_S
    cases.when(_anywhere(surely), Standing.UNMET, "over-limit")
    cases.when(_anywhere(over & endless), Standing.UNDETERMINED, "too-slow-to-judge")
    cases.when(_anywhere(over & (time > ADIABATIC_FROM_S)), Standing.UNDETERMINED, "time-too-long-by-band")
    combined = points.number(Number.COMBINATION_TO_KA) >= greatest / 1000.0
    # The limit of a class, like the 0.1 s step of a band, bounds the energy and refutes nothing.
    cases.when(_anywhere(over) & combined, Standing.MET, "standard-circuit")
    cases.when(_anywhere(over), Standing.UNDETERMINED, "let-through-missing")
    usual = (basis == LetThrough.CLASS_USUAL) & _anywhere(time <= ADIABATIC_FROM_S)
    cases.when(usual, Standing.MET, "standard-combination")
    cases.when(np.ones_like(tabled), Standing.MET, "within-limit")
    worst = np.where(tabled | exceeded, np.where(exceeded, by_maker, table), np.fmax.reduce(needed, axis=0))
    return cases.settle(Interval(worst, worst, worst), area)


CHECK = Check(
    id="protective-conductor-heating",
    quantity="protective_conductor_area_mm2",
    unit="mm2",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
)
