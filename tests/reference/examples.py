"""Worked examples of others, each by the service's own functions."""

import math
from collections.abc import Callable, Iterator
from typing import Any

import numpy as np

from faultloop import assess
from faultloop.electrical.body import touch_voltage
from faultloop.electrical.conductors import adiabatic_area, resistance, temperature_factor, withstand_time
from faultloop.electrical.fault_current import heated_loop, prospective_current
from faultloop.electrical.measurement import Interval
from faultloop.protection.designations import Breaker, parse_overcurrent
from faultloop.rules.conductors import ohm_per_km
from tests.reference.limits import limit, operating_current
from tests.reference.published import Comparison, Row, named

OHM = "earth_fault_loop_impedance_ohm"


def one(function: Callable[..., Any], *values: float) -> float:
    """A function of columns, asked for one value."""
    return float(function(*(np.array([value], dtype=np.float64) for value in values))[0])


def current(row: Row, factor: float = 1.0) -> float:
    """Fault current of an example that states voltage and loop."""
    given = row["inputs"]
    loop = given.get(OHM, given.get("loop_impedance_ohm"))
    return one(prospective_current, factor, given["nominal_voltage_to_earth_v"], loop)


def area(row: Row, amperes: float) -> float:
    """Least area of an example for a current."""
    return one(adiabatic_area, row["inputs"]["k"], amperes, row["inputs"]["time_s"])


def hot_loop(external: float, cold_part: float, factor: float) -> float:
    """Loop whose part behind the origin is raised by a factor."""
    exact = [np.array([external + cold_part])] * 3
    columns = (np.array([cold_part]), np.array([external]), np.array([0.0]), np.array([factor]))
    return float(heated_loop(Interval(*exact), *columns).nominal[0])


def example(row: Row, name: str, compute: Callable[..., float]) -> Comparison:
    """Compare one printed result of an example."""
    source = f"{row['source']}, {row['edition']}"
    return Comparison(row["id"], name, source, float(row["printed"][name]), row["printed_step"][name], compute)


def adiabatic() -> Iterator[Comparison]:
    """Fault currents and the areas that bear them."""
    for name in ("WE-01", "WE-13", "WE-52", "WE-53"):
        row = named("worked_examples", name)
        yield example(row, "fault_current_a", lambda r=row: current(r))
        # The area is worked out from the current as it was printed.
        yield example(row, "least_area_mm2", lambda r=row: area(r, r["printed"]["fault_current_a"]))
    for name in ("WE-02", "WE-22", "WE-51"):
        row = named("worked_examples", name)
        yield example(row, "least_area_mm2", lambda r=row: area(r, r["inputs"]["current_a"]))
    # Here the current is the device's own operating current, which the service holds itself.
    for name in ("WE-14", "WE-21"):
        row = named("worked_examples", name)
        device, time = row["inputs"]["device"], row["inputs"]["time_s"]
        yield example(
            row, "least_area_mm2", lambda r=row, d=device, t=time: area(r, operating_current(d, "iec-60364", t))
        )
    row = named("worked_examples", "WE-15")
    k, size = row["inputs"]["k"], row["inputs"]["area_mm2"]
    yield example(row, "k2s2_a2s", lambda: one(withstand_time, k, size, 50.0) * 50.0**2)


def lengths() -> Iterator[Comparison]:
    """Loops from an external part and a length."""
    for name in ("WE-03", "WE-20"):
        row = named("worked_examples", name)
        part = one(resistance, row["inputs"]["resistance_mohm_per_m"], row["inputs"]["length_m"])
        factor = one(temperature_factor, 70.0, 20.0, 0.004)
        external = row["inputs"]["external_earth_fault_loop_impedance_ohm"]
        yield example(row, "line_plus_protective_resistance_ohm", lambda p=part, f=factor: p * f)
        yield example(row, OHM, lambda e=external, p=part, f=factor: hot_loop(e, p, f))
    row = named("worked_examples", "WE-04")
    part = one(resistance, row["inputs"]["resistance_mohm_per_m"], row["inputs"]["length_m"])
    yield example(row, OHM, lambda p=part: hot_loop(0.6, p, one(temperature_factor, 20.0, 20.0, 0.004)))
    row = named("worked_examples", "WE-06")
    line, protective = (held(size, 22.0) for size in (2.5, 1.5))
    yield example(row, "line_ohm", lambda: line)
    yield example(row, "protective_ohm", lambda: protective)
    yield example(row, "line_plus_protective_resistance_ohm", lambda: line + protective)
    row = named("worked_examples", "WE-16")
    armour = row["inputs"]["armour_ohm_per_km"]
    yield example(
        row,
        "line_plus_protective_resistance_ohm",
        lambda: held(16.0, 100.0) + one(resistance, armour, 100.0),
    )


def held(area_mm2: float, length_m: float) -> float:
    """Resistance of a copper conductor of the table."""
    return one(resistance, ohm_per_km("copper", area_mm2) or math.nan, length_m)


def limits() -> Iterator[Comparison]:
    """Greatest loop impedances."""
    row = named("worked_examples", "WE-08")
    amperes = row["inputs"]["operating_current_a"]
    yield example(row, "greatest_loop_impedance_ohm", lambda: one(prospective_current, 1.0, 230.0, amperes))
    for name, rules in (
        ("WE-24", "bs-7671:2018"),
        ("WE-39", "iec-60364"),
        ("WE-45", "bs-7671:2011"),
        ("WE-46", "bs-7671:2018"),
        ("WE-48", "iec-60364"),
    ):
        row = named("worked_examples", name)
        yield example(row, "greatest_loop_impedance_ohm", lambda d=row["inputs"]["device"], e=rules: limit(d, e, 0.4))
    row = named("worked_examples", "WE-46")
    yield example(row, "without_factor_ohm", lambda: limit("B40", "bs-7671:2011", 0.4))
    row = named("worked_examples", "WE-09")
    yield example(row, "required_current_a", lambda: 230.0 / limit("B16", "iec-60364", 0.4, "two-thirds"))
    row = named("worked_examples", "WE-50")
    yield example(row, "measured_limit_ohm", lambda: limit("B6", "bs-7671:2008", 0.4, "four-fifths"))
    for name in ("WE-49a", "WE-49b"):
        row = named("worked_examples", name)
        yield example(row, "limit_ohm", lambda: limit("B50", "bs-7671:2018", 0.4, "four-fifths"))
        yield example(row, OHM, lambda r=row: finding(sum_of_parts(r), "overcurrent-disconnection")["value"])
    row = named("worked_examples", "WE-54")
    yield example(row, "greatest_impedance_ohm", lambda: one(prospective_current, 1.0, 65.0, 70.0))


def electrodes() -> Iterator[Comparison]:
    """Earth electrodes and touch voltages."""
    for name in ("WE-34", "WE-36"):
        row = named("worked_examples", name)
        yield example(row, "greatest_resistance_ohm", lambda r=row: electrode_finding(r)["limit"])
    for name, ratings in (("WE-37", (30, 100)), ("WE-38", (30, 300))):
        row = named("worked_examples", name)
        for rated in ratings:
            yield example(
                row, f"limit_{rated}_ma_ohm", lambda r=row, ma=rated: electrode_finding(r, rated_ma=ma)["limit"]
            )
    row = named("worked_examples", "WE-35")
    yield example(
        row, "greatest_rated_residual_current_ma", lambda: 1000.0 * one(prospective_current, 1.0, 50.0, 200.0)
    )
    row = named("worked_examples", "WE-28")
    yield example(row, "touch_voltage_v", lambda: one(touch_voltage, 230.0, 1000.0, 1022.0))
    yield example(row, "body_current_ma", lambda: 1000.0 * one(prospective_current, 1.0, 230.0, 1022.0))
    row = named("worked_examples", "WE-29")
    yield example(row, "touch_voltage_v", lambda: one(touch_voltage, 230.0, 22.0, 44.0))
    yield example(row, "fault_current_a", lambda: one(prospective_current, 1.0, 230.0, 44.0))
    row = named("worked_examples", "WE-32")
    yield example(row, "touch_voltage_v", lambda: one(touch_voltage, 230.0, 0.3, math.inf))
    yield example(row, "fault_current_a", lambda: one(prospective_current, 1.0, 230.0, math.inf))
    for name, loop in (("WE-41", 19.0), ("WE-42", 50.0)):
        row = named("worked_examples", name)
        yield example(row, "fault_current_a", lambda z=loop: one(prospective_current, 1.0, 230.0, z))
    row = named("worked_examples", "WE-43")
    yield example(row, "touch_voltage_v", lambda: one(touch_voltage, 220.0, 1.0, 2.0))
    row = named("worked_examples", "WE-44")
    yield example(row, "touch_voltage_share", lambda: one(touch_voltage, 1.0, 2.0, 3.0))
    row = named("worked_examples", "WE-27")
    yield example(row, "protective_ohm", lambda r=row: protective_share(r))


def protective_share(row: Row) -> float:
    """Protective conductor's resistance that an assessment took for its touch voltage."""
    given = row["inputs"]
    body = circuit(
        "B16",
        readings={
            "line_plus_protective_resistance_ohm": given["line_plus_protective_resistance_ohm"],
            "external_earth_fault_loop_impedance_ohm": 0.35,
        },
    )
    for which in ("line", "protective"):
        size = given[f"{which}_conductor_mm2"]
        body["circuit"][f"{which}_conductor"] = {"material": "copper", "insulation": "pvc", "area_mm2": size}
    answer = assess(body)
    told = answer["quantities"]
    # U_t = U0·R2·F/Z: what is left after U0, F and the hot loop is R2.
    hot = 0.35 + given["line_plus_protective_resistance_ohm"] * told["temperature_factor"]
    touch = next(f["value"] for f in answer["findings"] if f["check"] == "touch-voltage")
    return float(touch * hot / told["temperature_factor"] / 230.0)


def circuit(device: str, **body: Any) -> dict[str, Any]:
    """Body of a final socket circuit behind a breaker."""
    found = parse_overcurrent(device)
    assert isinstance(found, Breaker)
    plain: dict[str, Any] = {
        "point": {"label": "bench"},
        "supply": {"earthing": "TN-S", "nominal_voltage_to_earth_v": 230},
        "circuit": {"role": "final", "feeds": "socket-outlets"},
        "overcurrent_device": {
            "kind": "miniature-circuit-breaker",
            "characteristic": found.characteristic,
            "rated_current_a": found.rated_current_a,
        },
    }
    return plain | body


def finding(body: dict[str, Any], check: str) -> dict[str, Any]:
    """One finding of an assessment."""
    found: dict[str, Any] = next(f for f in assess(body)["findings"] if f["check"] == check)
    return found


def sum_of_parts(row: Row) -> dict[str, Any]:
    """Example of an external part and a dead test against four fifths of the table."""
    given = row["inputs"]
    names = ("external_earth_fault_loop_impedance_ohm", "line_plus_protective_resistance_ohm")
    return circuit(
        given["device"],
        readings={name: given[name] for name in names},
        rules="bs-7671:2018",
        policy={"temperature": "four-fifths"},
    )


def electrode_finding(row: Row, rated_ma: float | None = None) -> dict[str, Any]:
    """Finding on the electrode of a TT example, by a whole assessment."""
    given = row["inputs"]
    rated = rated_ma or given["rated_residual_operating_current_ma"]
    body = circuit(
        "B16",
        supply={"earthing": "TT", "nominal_voltage_to_earth_v": 230},
        residual_current_device={"rated_residual_operating_current_ma": rated},
        readings={"earth_electrode_resistance_ohm": given.get("earth_electrode_resistance_ohm", 12.74)},
    )
    return finding(body, "earth-electrode")


def comparisons() -> list[Comparison]:
    """Everything of this module."""
    return [c for part in (adiabatic, lengths, limits, electrodes) for c in part()]


def concluded() -> dict[str, tuple[Row, Callable[..., str]]]:
    """Examples that conclude something, and the verdict of the finding that the service gives for them."""
    cases: dict[str, tuple[Row, Callable[..., str]]] = {}
    for name in ("WE-40a", "WE-40b", "WE-40c", "WE-40d"):
        row = named("worked_examples", name)
        # The question asks of a bare reading: no uncertainty, no heating.
        body = circuit(
            row["inputs"]["device"],
            readings={OHM: row["inputs"][OHM]},
            policy={"temperature": "none", "decision": "simple"},
        )
        cases[name] = (row, lambda b=body: str(finding(b, "overcurrent-disconnection")["verdict"]))
    for name in ("WE-49a", "WE-49b"):
        row = named("worked_examples", name)
        cases[name] = (row, lambda r=row: str(finding(sum_of_parts(r), "overcurrent-disconnection")["verdict"]))
    for name in ("WE-34", "WE-37"):
        row = named("worked_examples", name)
        cases[name] = (row, lambda r=row: str(electrode_finding(r)["verdict"]))
    row = named("worked_examples", "WE-41")
    tt = circuit(
        "B25",
        supply={"earthing": "TT", "nominal_voltage_to_earth_v": 230},
        readings={"earth_electrode_resistance_ohm": 19.0},
    )
    cases["WE-41"] = (row, lambda: str(finding(tt, "overcurrent-disconnection")["verdict"]))
    return cases
