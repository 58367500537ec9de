"""Printed limits of separated and IT supplies, each by the value at which the answers turn."""

import math
from collections.abc import Callable, Iterator
from functools import partial

from tests.reference.published import Comparison, Row, compared, named
from tests.reference.unearthed import (
    RULES,
    Body,
    bench,
    breaker,
    exact,
    finding,
    greatest_number,
    insulated,
    item,
    quantity,
    turning_point,
    verdict,
    without,
)

MILLI = 1e3
# A limit is printed as it is meant: half of this part of it is how near the answer has to turn.
NEAR = 1e-6
MET = ("pass", "pass-with-conditions")
C_MIN = {"iec-60364": 1.0, "bs-7671": 0.95}
# Least currents that trip: 5 In of type B, 10 In of type C (IEC 60898-1), Imax(5 s) of gG 16 A (IEC 60269-1).
GUARANTEED = ((breaker("B16"), "final", 80.0), (breaker("C10"), "final", 100.0))
FUSE = {"kind": "fuse", "fuse_system": "iec-60269", "utilisation_category": "gG", "rated_current_a": 16}


def of(row_id: str) -> Row:
    """A row that a test may rely on."""
    return named("separation", row_id)


def turns(row_id: str, part: str, compute: Callable[..., float]) -> Comparison:
    """Compare a limit that is printed with all its figures."""
    row = of(row_id)
    return compared(row, part, "value", compute, step=NEAR * float(row["value"]))


def figure(row_id: str, part: str, compute: Callable[..., float]) -> Comparison:
    """Compare a figure that is printed as it was rounded."""
    return compared(of(row_id), part, "value", compute)


def separated_circuits() -> Iterator[Comparison]:
    """What a separated circuit may be: voltage, items, nothing at earth, length of its wiring."""
    for rules in RULES:
        ask = partial(bench, rules=rules)
        yield turns(
            "SS-413-voltage",
            rules,
            lambda a=ask: turning_point(lambda u: a(volts=u), verdict("separated-voltage", *MET), 300.0, 900.0),
        )
        yield turns(
            "SS-TR-isolating-ac",
            f"{rules}, by the plate",
            lambda a=ask: turning_point(
                lambda u: a(volts=None, transformer={"secondary_voltage_v": u}),
                verdict("separated-voltage", *MET),
                300.0,
                900.0,
            ),
        )
        yield figure("SS-413-items", f"{rules}, class I", lambda a=ask: most_items(a, "I", verdict_of_items))
        yield figure("SS-413-items", f"{rules}, class II", lambda a=ask: most_items(a, "II", without("supervision")))
        yield figure(
            "SS-413-class-one",
            f"{rules}, beside two of class II",
            lambda a=ask: most_items(a, "I", verdict_of_items, others=2),
        )
        yield figure(
            "SS-413-earthed-points",
            rules,
            lambda a=ask: greatest_number(lambda n: a(pole_earthed=n > 0), verdict("separation", *MET), range(2)),
        )
        for name, volts in (("SS-413-length-230", 230.0), ("SS-413-length-400", 400.0)):
            yield figure(name, f"{rules}, turns", lambda a=ask, u=volts: greatest_length(a, u))
            yield figure(
                name, f"{rules}, limit", lambda a=ask, u=volts: finding(a({}, volts=u), "wiring-length")["limit"]
            )


verdict_of_items = verdict("separated-items", *MET)


def most_items(ask: Callable[..., Body], kind: str, holds: Callable[[Body], bool], others: int = 0) -> int:
    """Greatest number of items of a class on a separated outlet without bonding."""
    rest = [item("II") for _ in range(others)]
    return greatest_number(lambda n: ask(items=[item(kind) for _ in range(n)] + rest), holds, range(1, 5))


def greatest_length(ask: Callable[..., Body], volts: float) -> float:
    """Length of wiring at which guidance is left, where no contact was read."""
    return turning_point(lambda m: ask({}, volts=volts, wiring_length_m=m), verdict("wiring-length", *MET), 10.0, 900.0)


def contacts() -> Iterator[Comparison]:
    """Currents at which a contact is felt, is too great, and shows that a pole stands at earth."""
    felt, great, earth = without("contact-felt"), verdict("contact-current", *MET), verdict("separation", *MET)
    lines = (
        ("SS-TC-startle-ac", felt, 3.0),  # a contact that fails carries no condition
        ("SS-BI-perception", felt, 3.0),
        ("SS-TC-limit-ac", great, 9.0),
        ("SS-TC-60950-class-1", great, 9.0),
        ("SS-BI-let-go-10", earth, 90.0),
    )
    for rules in RULES:
        for name, holds, high in lines:
            yield turns(
                name,
                rules,
                lambda h=holds, e=rules, m=high: turning_point(lambda ma: touched(ma, e), h, 0.1, m),
            )
        earthed = bench({}, pole_earthed=True, rules=rules)
        yield figure("SS-BI-assumed", rules, lambda b=earthed: 230.0 / finding(b, "contact-current")["value"] * MILLI)


def touched(milliamperes: float, rules: str) -> Body:
    """A separated outlet by the current of a contact with its second pole."""
    return bench({"contact_current_l1_ma": exact(0.1), "contact_current_l2_ma": exact(milliamperes)}, rules=rules)


def insulated_supplies() -> Iterator[Comparison]:
    """Two faults on an IT supply."""
    for rules in RULES:
        # The British set has a current of its own for the fuse, printed beside BS 88-2.
        for device, role, amperes in (*GUARANTEED, (FUSE, "distribution", 65.0 if rules == "iec-60364" else 55.0)):
            for name, distributed, volts in (
                ("SS-IT-second-divisor", False, 400.0),
                ("SS-IT-second-divisor-neutral", True, 230.0),
            ):
                yield turns(
                    name,
                    f"{rules}, {amperes:g} A",
                    lambda d=device, r=role, n=distributed, c=C_MIN[rules] * volts / amperes, e=rules: (
                        c / greatest_loop(r, d, n, e)
                    ),
                )
        body = insulated({"earth_fault_loop_impedance_ohm": exact(0.5)}, role="distribution", rules=rules)
        yield figure("SS-IT-second-distribution", rules, lambda b=body: quantity(b, "required_disconnection_time_s"))


def greatest_loop(role: str, device: Body, neutral: bool, rules: str) -> float:
    """Loop of one circuit at which a second fault is no longer cleared in time."""

    def ask(ohm: float) -> Body:
        readings = {"earth_fault_loop_impedance_ohm": exact(ohm, method="high-current")}
        return insulated(readings, role, device, it_supply={"neutral_distributed": neutral}, rules=rules)

    return turning_point(ask, verdict("second-fault-disconnection", *MET), 0.1, 50.0)


def stored() -> Iterator[Comparison]:
    """Voltage and time at which something counts as discharged."""
    quick = without("discharged-first")
    # 60 V·e^2 stands two time constants above 60 V: 10 kohm and one microfarad take 20 ms.
    above, each = 60.0 * math.exp(2.0), 0.02
    for rules in RULES:
        for name in ("SS-SE-60204-voltage", "SS-SE-61010-voltage"):
            yield turns(
                name,
                rules,
                lambda e=rules: turning_point(lambda u: charged(1000.0, u, 1e12, e), quick, 10.0, 300.0),
            )
        for name in ("SS-SE-60204-time", "SS-SE-61010-time"):
            yield turns(
                name,
                rules,
                lambda e=rules: each * turning_point(lambda c: charged(c, above, 1e4, e), quick, 10.0, 1000.0),
            )


def charged(microfarads: float, volts: float, ohm: float, rules: str = "iec-60364") -> Body:
    """An outlet with an item that stays charged."""
    told = {"capacitance_uf": microfarads, "voltage_v": volts, "discharge_resistance_ohm": ohm}
    return bench(items=[item(stored=told)], rules=rules)


def insulation() -> Iterator[Comparison]:
    """Insulation resistance of a circuit up to 500 V, on a supply of each kind."""
    row = named("constants", "CO-insulation-0019")
    for rules in RULES:
        for kind, ask in (("separated", bench), ("IT", insulated)):
            yield compared(
                row,
                f"{rules}, {kind}",
                "value",
                lambda a=ask, e=rules: turning_point(
                    lambda megohm: a({"insulation_resistance_megohm": exact(megohm)}, rules=e),
                    verdict("insulation-resistance", "fail"),
                    0.1,
                    9.0,
                ),
                step=NEAR,
            )


def comparisons() -> list[Comparison]:
    """Everything of this module."""
    parts = (separated_circuits, contacts, insulated_supplies, stored, insulation)
    return [comparison for part in parts for comparison in part()]
