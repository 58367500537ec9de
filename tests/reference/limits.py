"""Printed limits of loops and electrodes, and the currents and times behind them."""

from collections.abc import Iterator
from typing import Any, cast, get_args

import numpy as np

from faultloop import assess
from faultloop.assessment.codes import Choice, Current, Earthing, Feeds, Number, Role
from faultloop.assessment.limits import loop_limit
from faultloop.assessment.points import Row as PointRow
from faultloop.assessment.points import from_rows
from faultloop.assessment.rule_table import required_time
from faultloop.assessment.tables import tables
from faultloop.electrical.fault_current import prospective_current
from faultloop.protection.catalogue import catalogue, residual_multiple
from faultloop.protection.designations import Breaker, Characteristic, Delay, parse_overcurrent
from faultloop.protection.moulded_case import Settings, moulded_case_band
from faultloop.rules.loader import shipped
from tests.reference.published import EDITIONS, TABLE_41_1, Comparison, Row, compared, oracles, rules_for, seconds

DELAYS = get_args(Delay)
# Rule set under which the currents printed beside the curves of a family hold.
FUSES = {
    "OC-BS_88-2.2": "bs-7671:2008",
    "OC-BS_88-3": "bs-7671:2011",
    "OC-BS_3036": "bs-7671:2011",
    "OC-gG-": "iec-60364:2017",
}


def limit(device: str, rules: str, time_s: float, policy: str = "none", voltage_v: float = 230.0) -> float:
    """Greatest loop impedance by the compiled catalogue and a rule set."""
    found = loop_limit(parse_overcurrent(device), rules_for(rules), time_s, policy, voltage_v)
    return float("inf") if found.greatest_loop_impedance_ohm is None else found.greatest_loop_impedance_ohm


def operating_current(device: str, rules: str, time_s: float) -> float:
    """Least current that the compiled catalogue holds for a device and a time."""
    row = np.array([catalogue().rows[rules_for(rules).key, parse_overcurrent(device)]])
    return float(catalogue().overcurrent.operating_current(row, np.array([time_s]))[0])


def loops() -> Iterator[Comparison]:
    """Greatest loop impedances of breakers and fuses, by edition."""
    for row in [*oracles("loop_limits_breakers"), *oracles("loop_limits_fuses")]:
        device = str(row["device"]).replace("BS 88-2.2", "BS 88-2")
        for time in seconds(row):
            yield compared(
                row,
                f"{time:g}s",
                "greatest_loop_impedance_ohm",
                lambda d=device, e=EDITIONS[row["edition"]], t=time: limit(d, e, t),
            )


def four_fifths() -> Iterator[Comparison]:
    """Measured limits printed at four fifths of the table."""
    for row in oracles("loop_limits_four_fifths"):
        for time in seconds(row):
            yield compared(
                row,
                f"{time:g}s",
                "printed_measured_limit_ohm",
                lambda r=row, t=time: limit(r["device"], EDITIONS[r["edition"]], t, "four-fifths"),
            )


def fuse_currents() -> Iterator[Comparison]:
    """Currents printed beside the curves of fuses."""
    for row in [row for start in FUSES for row in oracles("operating_currents", start)]:
        device = str(row["device"]).replace("BS 88-2.2/-6", "BS 88-2")
        rules = FUSES[next(start for start in FUSES if row["id"].startswith(start))]
        for time in seconds(row):
            yield compared(row, f"{time:g}s", "current_a", lambda d=device, e=rules, t=time: operating_current(d, e, t))


def breaker_multiples() -> Iterator[Comparison]:
    """Multiples of the rated current that rules use from 0.1 s to 5 s, in every edition."""
    for row in oracles("operating_currents", "OC-mult-"):
        for rules in ("bs-7671:2008", "bs-7671:2011", "bs-7671:2018"):
            for time in (0.1, 0.4, 5.0):
                yield compared(
                    row,
                    f"{rules},{time:g}s",
                    "value",
                    lambda c=row["characteristic"], e=rules, t=time: operating_current(f"{c}10", e, t) / 10.0,
                )


def slow_and_fast(characteristic: str, rated: float) -> tuple[dict[float, float], dict[float, float]]:
    """Edges of a breaker's band as time by multiple of the rated current."""
    band = catalogue().bands["iec-60364:2017", Breaker(cast(Characteristic, characteristic), rated)]
    slow, fast = ({round(i / rated, 9): t for i, t in edge} for edge in (band.slow, band.fast))
    return slow, fast


def breaker_tests() -> Iterator[Comparison]:
    """The time-current tests of the standard for breakers."""
    rows = {row["id"]: row for row in oracles("operating_currents", "OC-mcb-")}
    for rated, hours in ((32.0, 1.0), (63.0, 1.0), (80.0, 2.0)):
        slow, fast = slow_and_fast("B", rated)
        conventional = hours * 3600.0
        yield compared(rows["OC-mcb-0001"], f"{rated:g}A", "value", lambda f=fast, t=conventional: at_time(f, t))
        yield compared(rows["OC-mcb-0002"], f"{rated:g}A", "value", lambda s=slow, t=conventional: at_time(s, t))
    for name, rated in (("OC-mcb-0003", 32.0), ("OC-mcb-0004", 40.0)):
        slow, fast = slow_and_fast("C", rated)
        row = rows[name]
        ends = {**row, "least": row["value"][0], "greatest": row["value"][1]}
        yield compared(ends, "least", "least", lambda f=fast: f[2.55])
        yield compared(ends, "greatest", "greatest", lambda s=slow: s[2.55])
    for at, characteristic in enumerate("BCD"):
        slow, fast = slow_and_fast(characteristic, 16.0)
        yield compared(rows[f"OC-mcb-{5 + 2 * at:04d}"], "hold", "value", lambda f=fast: at_time(f, 0.1))
        yield compared(rows[f"OC-mcb-{6 + 2 * at:04d}"], "trip", "value", lambda s=slow: at_time(s, 0.1))


def industrial_breakers() -> Iterator[Comparison]:
    """Conventional currents of the industrial standard and the instantaneous bands of types K and Z.

    Two sources differ on K; the band held is the widest of both, so each is compared at its wider end.
    """
    rows = {row["id"]: row for row in oracles("operating_currents", "OC-mcb-")}
    for letter in "KZ":
        slow, fast = slow_and_fast(letter, 20.0)
        yield compared(rows["OC-mcb-0044"], letter, "value", lambda f=fast: at_time(f, 3600.0))
        yield compared(rows["OC-mcb-0045"], letter, "value", lambda s=slow: at_time(s, 3600.0))
    for name, letter, end in (
        ("OC-mcb-0046", "K", "trip"),
        ("OC-mcb-0047", "K", "hold"),
        ("OC-mcb-0048", "Z", "hold"),
        ("OC-mcb-0048", "Z", "trip"),
    ):
        slow, fast = slow_and_fast(letter, 20.0)
        ends = {**rows[name], "hold": rows[name]["value"][0], "trip": rows[name]["value"][1]}
        yield compared(ends, end, end, lambda e=fast if end == "hold" else slow: at_time(e, 0.2))


def moulded_case() -> Iterator[Comparison]:
    """Tolerance of magnetic releases and conventional currents of breakers that are set."""
    rows = {row["id"]: row for row in oracles("operating_currents", "OC-mcb-")}
    band = moulded_case_band(Settings(200.0, instantaneous_a=2000.0))
    tolerance, holds, trips = (rows[f"OC-mcb-{number:04d}"] for number in (43, 44, 45))
    yield compared(tolerance, "above", "value", lambda: 100.0 * (band.slow[1][0] / 2000.0 - 1.0))
    yield compared(tolerance, "below", "value", lambda: 100.0 * (1.0 - band.fast[1][0] / 2000.0))
    yield compared(holds, "Ir", "value", lambda: band.fast[0][0] / 200.0)
    yield compared(trips, "Ir", "value", lambda: band.slow[0][0] / 200.0)


def plug_fuses() -> Iterator[Comparison]:
    """Windows of operating time of plug fuses, each end that is printed."""
    for row in oracles("operating_currents", "OC-BS1362-"):
        which = np.array([catalogue().rows["bs-7671:2018", parse_overcurrent(row["device"])]])
        table, current = catalogue().overcurrent, np.array([float(row["current_a"])])
        window = str(row["time_window_s"]).removesuffix(" s")
        least, greatest = ("0", window[1:]) if window.startswith("<") else window.split("-")
        ends = {**row, "least": least, "greatest": greatest}
        for end, edge in (("least", table.least_time), ("greatest", table.greatest_time)):
            yield compared(ends, end, end, lambda e=edge, w=which, i=current: float(e(w, i)[0]), step=0.001)


def at_time(edge: dict[float, float], time_s: float) -> float:
    """The multiple at which an edge has a time."""
    return next(multiple for multiple, time in edge.items() if time == time_s)


def fuse_conventions() -> Iterator[Comparison]:
    """Conventional fusing current and times of gG fuses."""
    rows = {row["id"]: row for row in oracles("operating_currents", "OC-conv-")}
    for rated in (16, 63, 100, 160):
        hours = rows["OC-conv-0201" if rated <= 63 else "OC-conv-0202"]
        device = parse_overcurrent(f"gG {rated}")
        current, time = catalogue().bands["iec-60364:2017", device].slow[0]
        yield compared(rows["OC-conv-0200"], f"gG {rated}", "value", lambda i=current, r=rated: i / r)
        yield compared(hours, f"gG {rated}", "value", lambda t=time: t / 3600.0)


def electrode_limit(rated_ma: float, rules: str) -> float:
    """Limit of the electrode that a whole assessment of a TT socket circuit answers."""
    body: dict[str, Any] = {
        "point": {"label": "bench"},
        "supply": {"earthing": "TT", "nominal_voltage_to_earth_v": 230},
        "circuit": {"role": "final", "feeds": "socket-outlets", "rated_current_a": 16},
        "overcurrent_device": {"kind": "miniature-circuit-breaker", "characteristic": "B", "rated_current_a": 16},
        "residual_current_device": {"rated_residual_operating_current_ma": rated_ma},
        "readings": {"earth_electrode_resistance_ohm": 12.0, "residual_operating_time_ms": {"1": 25.0}},
        "rules": rules,
    }
    return float(next(f["limit"] for f in assess(body)["findings"] if f["check"] == "earth-electrode"))


def electrodes() -> Iterator[Comparison]:
    """50 V over the rated residual operating current, through an assessment."""
    for row in oracles("residual_limits"):
        if row["touch_voltage_limit_v"] != 50:
            continue  # told as unused: no shipped rule set has a reduced limit
        rules = "bs-7671" if row["source"].startswith("BS") else "iec-60364"
        yield compared(
            row,
            rules,
            "greatest_resistance_ohm",
            lambda r=row, e=rules: electrode_limit(r["rated_residual_operating_current_ma"], e),
        )


def residual_times() -> Iterator[Comparison]:
    """Break times and non-actuating times of residual devices at multiples of the rated current."""
    table = catalogue().residual
    for row in oracles("residual_times"):
        multiple = row["multiple_of_rated_residual_operating_current"]
        if row["delay"] not in DELAYS or multiple is None or str(row.get("standard")).startswith("BS 4293"):
            continue  # told as unused
        # 500 A through a device of 30 mA.
        at = np.array([500.0 / 0.03 if multiple == "500 A" else float(multiple)])
        edge = table.least_time if row["quantity"].startswith("least") else table.greatest_time
        which = np.array([catalogue().residual_rows[row["delay"]]])
        yield compared(row, f"{multiple}x", "time_s", lambda e=edge, w=which, a=at: float(e(w, a)[0]))
    row = next(row for row in oracles("residual_times") if row["id"] == "RT-TT-limit")
    yield compared(row, "multiple", "time_s", multiple_on_the_touch_limit)


def multiple_on_the_touch_limit() -> float:
    """Current on the limit R = 50 V/IΔn at 230 V, in multiples of IΔn."""
    current = prospective_current(np.array([1.0]), np.array([230.0]), np.array([50.0 / 0.03]))
    return float(current[0]) / 0.03


def time_required(rules: str, earthing: int, current: int, voltage_v: float, **point: float) -> float:
    """Required disconnection time of a circuit under a rule set."""
    row = PointRow()
    row.numbers[Number.VOLTAGE], row.numbers[Number.RATED_CURRENT] = voltage_v, point.get("rated_current_a", 16.0)
    row.choices[Choice.RULES] = tables().rules_row(shipped()[rules])
    row.choices[Choice.EARTHING], row.choices[Choice.CURRENT] = earthing, current
    row.choices[Choice.ROLE] = int(point.get("role", Role.FINAL))
    row.choices[Choice.FEEDS] = int(point.get("feeds", Feeds.SOCKET_OUTLETS))
    points = from_rows([row])
    return float(required_time(points, tables().rules.of(points))[0])


SYSTEMS = {"TN": Earthing.TN_S, "TT": Earthing.TT}
KINDS = {"ac": Current.AC, "dc": Current.DC}


def sets_of(row: Row) -> list[str]:
    """Rule sets that take a row of the table: all for alternating current, for direct current by edition."""
    if row["edition"].startswith("2018-10"):
        return ["iec-60364:2017"]
    return TABLE_41_1 if row["current"] == "ac" else ["bs-7671:2008", "bs-7671:2011"]


def disconnection_times() -> Iterator[Comparison]:
    """Table 41.1 just above each lower bound and on each upper bound, and the longer times."""
    for row in [*oracles("disconnection_times", "DT-TN-"), *oracles("disconnection_times", "DT-TT-")]:
        system, kind = SYSTEMS[row["earthing"]], KINDS[row["current"]]
        for rules in sets_of(row):
            if "role" in row:
                yield compared(
                    row,
                    rules,
                    "required_time_s",
                    lambda e=rules, s=system: time_required(e, s, Current.AC, 230.0, role=Role.DISTRIBUTION),
                )
            elif row["required_time_s"] is not None:
                for voltage in (row["nominal_voltage_above_v"] + 0.1, row["nominal_voltage_to_v"] or 1000.0):
                    yield compared(
                        row,
                        f"{rules},{voltage:g}V",
                        "required_time_s",
                        lambda e=rules, s=system, k=kind, v=voltage: time_required(e, s, k, v),
                    )


def residual_use() -> Iterator[Comparison]:
    """Multiples whose break time the disconnection check needs: 2 IΔn for 0.2 s and 0.15 s, 5 IΔn for 0.04 s."""
    for name, delay, time in (("RT-USE-0043", "general", 0.04), ("RT-USE-0046", "selective", 0.2)):
        row = next(row for row in oracles("residual_times") if row["id"] == name)
        yield compared(
            row,
            "inverse",
            "multiple_of_rated_residual_operating_current",
            lambda d=delay, t=time: residual_multiple(d, t),
            step=1.0,
        )


def comparisons() -> list[Comparison]:
    """Everything of this module."""
    parts = (loops, four_fifths, fuse_currents, breaker_multiples, breaker_tests, fuse_conventions)
    families = (industrial_breakers, moulded_case, plug_fuses)
    more = (electrodes, residual_times, residual_use, disconnection_times)
    return [comparison for part in (*parts, *families, *more) for comparison in part()]
