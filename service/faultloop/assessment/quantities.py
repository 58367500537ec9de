"""What several checks share, computed once from the columns."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Choice, Codes, Current, Earthing, Number, Reading, Role, among
from faultloop.assessment.given import Given, given
from faultloop.assessment.insulated import Insulated, insulated
from faultloop.assessment.let_through import LetThroughEnergy, let_through
from faultloop.assessment.line_neutral import LineNeutral, line_neutral
from faultloop.assessment.loops import Basis, Loops, loops
from faultloop.assessment.points import Flags, Ints, Points
from faultloop.assessment.policies import by_policy, limit_factor
from faultloop.assessment.residual_times import ResidualTimes, residual_times
from faultloop.assessment.rule_table import required_time
from faultloop.assessment.separated import Separated, separated
from faultloop.assessment.series import Upstream, greatest_time, least_time, quickest_upstream
from faultloop.assessment.severity import Severity, of_insulated, of_separated, severity
from faultloop.assessment.standing import Verdict, compare
from faultloop.assessment.tables import Tables
from faultloop.electrical.body import touch_voltage
from faultloop.electrical.conductors import temperature_factor
from faultloop.electrical.fault_current import heated_loop, prospective_current
from faultloop.electrical.measurement import Array, Interval

AT_MOST = np.array(1)
COVERED = among((Earthing.TN_S, Earthing.TN_C_S, Earthing.TT, Earthing.IT))
# Nominal voltages are rounded: 230/400 V is not quite the square root of three.
SYSTEM_RATIO_TOLERANCE = 0.1


class Wanting(Codes):
    """Prerequisites without which nothing can be decided; 0 where all are there."""

    NOTHING = 0
    EARTHING = 1
    EARTHING_NOT_COVERED = 2
    DIRECT_CURRENT = 3
    VOLTAGE = 4
    ROLE = 5


@dataclass(frozen=True, slots=True)
class Quantities:
    """Shared intervals and numbers, (n,) each; nan where unknown."""

    given: Given
    wanting: Ints
    required_s: Array
    loops: Loops
    factor: Array
    hot: Interval
    compared: Interval
    operating_current: Array
    loop_limit: Array
    overcurrent: Ints
    no_trip_undecided: Flags
    upstream: Upstream
    current: Interval
    overcurrent_s: Interval
    residual: ResidualTimes
    severity: Severity
    line_neutral: LineNeutral
    let_through: LetThroughEnergy
    electrode: Interval
    touch_v: Array
    touch_known: Flags
    separated: Separated | None
    insulated: Insulated | None

    @property
    def cleared_upstream(self) -> Flags:
        """Where a device upstream clears an earth fault in time and the circuit's own does not."""
        points = self.given.points
        if not len(points.upstream):
            return np.zeros(points.count, dtype=np.bool_)
        cleared: Flags = (self.overcurrent != Verdict.PASS) & (self.upstream.verdict == Verdict.PASS)
        return cleared

    @property
    def tt(self) -> Flags:
        """Where the supply is TT."""
        return self.given.tt

    def rule(self, name: str) -> Array:
        """One value of each point's rule set, (n,)."""
        return self.given.rule[name]


def shared(points: Points, tables: Tables) -> Quantities:
    """Compute the shared quantities of n points."""
    g = given(points, tables)
    rule, voltage, device = g.rule, points.number(Number.VOLTAGE), points.choice(Choice.DEVICE)
    found, required = loops(g), required_time(points, rule)
    factor = temperature_factor(points.number(Number.SERVICE_C), points.number(Number.TEST_C), rule["alpha"])
    hot = heated_loop(found.loop, found.heated_known, found.external, found.external_u, factor)
    operating = points.overcurrent.operating_current(device, required)
    limit, compared = _loop_limit(g, operating), by_policy(points, hot, found.loop)
    current = Interval(
        prospective_current(rule["c_min"], voltage, hot.greatest),
        prospective_current(rule["c_max"], voltage, found.loop.least),
        prospective_current(rule["c_min"], voltage, hot.nominal),
    )
    slow = greatest_time(points, np.array([current.least, current.nominal]))
    overcurrent_s = Interval(least_time(points, current.greatest), slow[0], slow[1])
    residual = residual_times(g, current)
    overcurrent = compare(compared, limit, AT_MOST, points.choice(Choice.DECISION))
    # A no-trip reading never fails alone within what its method can add, whatever the decision rule.
    undecided = (found.basis == Basis.NO_TRIP) & (overcurrent == Verdict.FAIL) & (compared.least <= limit)
    touch, touch_known = _touch(g, found, hot, factor)
    earthing = points.choice(Choice.EARTHING)
    apart = separated(g, factor) if (earthing == Earthing.SEPARATED).any() else None
    unearthed = insulated(g, operating, found.live, factor) if (earthing == Earthing.IT).any() else None
    harm = severity(g, touch, overcurrent_s, residual)
    if apart is not None:
        harm = of_separated(harm, g, apart)
    if unearthed is not None:
        harm = of_insulated(harm, g, unearthed)
    return Quantities(
        given=g,
        wanting=_wanting(g, required),
        required_s=required,
        loops=found,
        factor=factor,
        hot=hot,
        compared=compared,
        operating_current=operating,
        loop_limit=limit,
        overcurrent=np.where(undecided, Verdict.UNDETERMINED, overcurrent),
        no_trip_undecided=undecided,
        upstream=_upstream(g, compared, required),
        current=current,
        overcurrent_s=overcurrent_s,
        residual=residual,
        severity=harm,
        line_neutral=line_neutral(g, found, hot, factor),
        let_through=let_through(g, current),
        electrode=_electrode(g, found),
        touch_v=touch,
        touch_known=touch_known,
        separated=apart,
        insulated=unearthed,
    )


def _wanting(g: Given, required: Array) -> Ints:
    points, earthing = g.points, g.points.choice(Choice.EARTHING)
    covered = COVERED[earthing]
    rows = g.rule.table.nominal[points.choice(Choice.RULES)]
    nominal = (points.number(Number.VOLTAGE)[:, None] == rows).any(axis=1)
    no_role = points.choice(Choice.ROLE) == Role.UNKNOWN
    unclear = ~nominal | ~_system_voltage(g) | (np.isnan(required) & ~no_role)
    wanting = np.where(unclear, Wanting.VOLTAGE, np.where(no_role, Wanting.ROLE, Wanting.NOTHING))
    wanting = np.where(points.choice(Choice.CURRENT) == Current.DC, Wanting.DIRECT_CURRENT, wanting)
    wanting = np.where(covered, wanting, Wanting.EARTHING_NOT_COVERED)
    return np.where(earthing == Earthing.UNKNOWN, Wanting.EARTHING, wanting)


def _system_voltage(g: Given) -> Flags:
    """Whether the voltage to earth can be one: by the voltage between lines, or low enough not to be asked about."""
    voltage, between = g.points.number(Number.VOLTAGE), g.points.number(Number.BETWEEN_LINES_V)
    three_phase, split_phase = np.abs(between / voltage - np.sqrt(3.0)), np.abs(between / voltage - 2.0)
    belongs = np.fmin(three_phase, split_phase) <= SYSTEM_RATIO_TOLERANCE
    return np.where(np.isnan(between), ~(voltage > g.rule["voltage_asked"]), belongs)


def _loop_limit(g: Given, operating: Array) -> Array:
    limit = prospective_current(limit_factor(g), g.points.number(Number.VOLTAGE), operating)
    return np.where(np.isinf(operating), np.nan, limit)


def _upstream(g: Given, compared: Interval, required: Array) -> Upstream:
    points = g.points
    operating, place = quickest_upstream(points, required)
    if not len(points.upstream):
        unknown = np.full(points.count, np.nan)
        return Upstream(operating, place, unknown, np.full(points.count, Verdict.UNDETERMINED))
    limit = _loop_limit(g, operating)
    return Upstream(operating, place, limit, compare(compared, limit, AT_MOST, points.choice(Choice.DECISION)))


def _touch(g: Given, found: Loops, hot: Interval, factor: Array) -> tuple[Array, Flags]:
    """Touch voltage at the nominal current: exact where R2 is known, else the most that it can be."""
    points, electrode = g.points, g.points.value[Reading.ELECTRODE]
    line, protective = points.number(Number.LINE_MM2), points.number(Number.PROTECTIVE_MM2)
    share = found.dead_resistance * line / (line + protective)
    measured = np.where(g.known[Reading.PROTECTIVE], points.value[Reading.PROTECTIVE], share)
    most = np.where(np.isnan(found.external), hot.nominal, hot.nominal - found.external)
    # An excess that nothing explains is taken to lie in the protective path.
    unknown = np.isnan(measured) | found.beyond
    path = np.where(unknown, np.maximum(most, 0.0), measured * factor)
    path = np.where(g.tt, np.where(np.isnan(electrode), hot.nominal, electrode), path)
    known = np.where(g.tt, g.known[Reading.ELECTRODE], ~unknown)
    return touch_voltage(points.number(Number.VOLTAGE), path, hot.nominal), known


def _electrode(g: Given, found: Loops) -> Interval:
    """Earth-electrode resistance, else the loop as its upper bound."""
    electrode, loop, from_loop = g.reading(Reading.ELECTRODE), found.live, ~g.known[Reading.ELECTRODE]
    return Interval(
        np.where(from_loop, np.maximum(loop.least - g.rule["source_allowance"], 0.0), electrode.least),
        np.where(from_loop, loop.greatest, electrode.greatest),
        np.where(from_loop, loop.nominal, electrode.nominal),
    )
