"""The reported quantities of supplies whose live parts are not earthed."""

from collections.abc import Iterator

import numpy as np

from faultloop.assessment.codes import Number
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.separated import Separated
from faultloop.assessment.verdicts import Outcome
from faultloop.electrical.measurement import Array, Interval
from faultloop.electrical.sources import rated_current, reflected_current, regulation

Own = tuple[Flags, dict[str, Interval], dict[str, Array]]


def unearthed_quantities(points: Points, outcome: Outcome) -> Iterator[Own]:
    """For each kind of supply that there is: where it is, its intervals and its plain numbers by name."""
    q = outcome.quantities
    if q.insulated is not None:
        ends = {
            "first_fault_current_ma": q.insulated.first_fault_ma,
            "touch_voltage_v": q.insulated.touch_v,
            "contact_current_ma": q.insulated.contact_ma,
            "second_fault_current_a": q.insulated.second_fault_a,
        }
        yield q.insulated.here, ends, {}
    if q.separated is not None:
        yield q.separated.here, _ends(points, q.separated), _plain(points, q.separated)


def _ends(points: Points, found: Separated) -> dict[str, Interval]:
    primary, secondary = points.number(Number.PRIMARY_V), points.number(Number.SECONDARY_V)
    fault, second = found.pole_to_pole.current, found.second_fault.current
    ends = (fault.least, fault.greatest, fault.nominal)
    bonded = found.several & ~found.unbonded
    both = (np.where(bonded, of, np.nan) for of in (second.least, second.greatest, second.nominal))
    return {
        "source_impedance_ohm": found.source,
        "line_line_fault_current_a": fault,
        "reflected_fault_current_a": Interval(*(reflected_current(of, primary, secondary) for of in ends)),
        "second_fault_current_a": Interval(*both),
        "contact_current_ma": found.contact.current_ma,
    }


def _plain(points: Points, found: Separated) -> dict[str, Array]:
    number, power = points.number, points.number(Number.TRANSFORMER_VA)
    primary, secondary = number(Number.PRIMARY_V), number(Number.SECONDARY_V)
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio, resistive = primary / secondary, 100.0 * number(Number.LOAD_LOSS_W) / power
    return {
        "transformer_ratio": ratio,
        "rated_secondary_current_a": rated_current(power, secondary),
        "rated_primary_current_a": rated_current(power, primary),
        "regulation_percent": regulation(number(Number.SHORT_CIRCUIT_PERCENT), resistive, np.ones(points.count)),
        "pole_capacitance_to_earth_nf": np.where(found.contact.pole_nf > 0.0, found.contact.pole_nf, np.nan),
        "stored_energy_j": found.stored_j,
        "discharge_time_s": found.discharge_s,
        "required_disconnection_time_s": found.required_s,
    }
