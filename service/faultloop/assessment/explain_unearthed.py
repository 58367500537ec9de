"""Numbers that sentences about supplies quote whose live parts are not earthed."""

import numpy as np

from faultloop.assessment.codes import Bound, Number, Reading
from faultloop.assessment.insulated import Insulated
from faultloop.assessment.points import Points
from faultloop.assessment.separated import Separated
from faultloop.assessment.verdicts import Outcome
from faultloop.electrical.measurement import Array


def unearthed_columns(points: Points, outcome: Outcome) -> dict[str, Array]:
    """Columns of the numbers; none where every supply is earthed."""
    q = outcome.quantities
    if q.separated is None and q.insulated is None:
        return {}
    columns: dict[str, Array] = {
        "frequency": points.number(Number.FREQUENCY_HZ),
        "required_2": q.required_s,
        "ia_2": q.operating_current,
        "is_separated": np.zeros(points.count),
    }
    if q.insulated is not None:
        columns |= _insulated(q.insulated, points.number(Number.RESIDUAL_GREATEST_MA), q.operating_current)
    if q.separated is not None:
        here = q.separated.here
        columns |= _separated(points, outcome, q.separated)
        columns["is_separated"] = here.astype(np.float64)
        columns["required_2"] = np.where(here, q.separated.required_s, q.required_s)
        columns["ia_2"] = np.where(here, q.separated.operating_current, q.operating_current)
    return columns


def _separated(points: Points, outcome: Outcome, found: Separated) -> dict[str, Array]:
    q, number, value = outcome.quantities, points.number, points.value
    insulation = q.given.reading(Reading.INSULATION)
    return {
        "u_sep": found.voltage,
        "uk": number(Number.SHORT_CIRCUIT_PERCENT),
        "va": number(Number.TRANSFORMER_VA),
        "zt": found.source.nominal,
        "cores": found.conductors_ohm,
        "wiring": found.wiring_ohm,
        "line_line": value[Reading.LINE_LINE],
        "ia_sep": found.operating_current,
        "required_sep": found.required_s,
        "second_least": found.second_fault.current.least,
        "pp_least": found.pole_to_pole.current.least,
        "contact_solved": found.contact.solved.astype(np.float64),
        "joined": found.joined.whole.astype(np.float64),
        "body": q.rule("body_dry"),
        "contact_ma": found.contact.current_ma.nominal,
        "contact_l1": value[Reading.L1_CONTACT],
        "contact_l2": value[Reading.L2_CONTACT],
        "above_l1": (points.bound[Reading.L1_CONTACT] == Bound.ABOVE).astype(np.float64),
        "above_l2": (points.bound[Reading.L2_CONTACT] == Bound.ABOVE).astype(np.float64),
        "every_pole_read": found.contact.every_pole_read.astype(np.float64),
        "primary": np.where(np.isnan(number(Number.PRIMARY_V)), found.voltage, number(Number.PRIMARY_V)),
        "stated_nf": found.contact.stated_nf,
        "stated_ma": np.fmax(*found.contact.driven.stated),
        "pole_nf": found.contact.pole_nf,
        "between_nf": number(Number.INTERWINDING_NF),
        "driven": np.fmax(*found.contact.driven.nominal),
        "unfelt": q.rule("separation_contact_unfelt"),
        "l1_v": value[Reading.L1_EARTH_VOLTAGE],
        "l2_v": value[Reading.L2_EARTH_VOLTAGE],
        "insulation": insulation.nominal,
        "winding": value[Reading.WINDING_INSULATION],
        "plate_v": number(Number.SECONDARY_V),
        "most_contact": q.rule("separation_contact_most"),
        "insulation_least": insulation.least,
        "class_i": found.class_i,
        "volt_metres": found.voltage * number(Number.WIRING_M),
        "most_volt_metres": q.rule("separation_voltage_length"),
        "most_length": q.rule("separation_wiring_length"),
        "dielectric_v": number(Number.DIELECTRIC_V),
        "dielectric_asked": number(Number.DIELECTRIC_ASKED_V),
        "stored_uf": number(Number.STORED_UF),
        "stored_v": number(Number.STORED_V),
        "stored_j": found.stored_j,
        "discharge_ohm": number(Number.DISCHARGE_OHM),
        "discharged_v": q.rule("separation_discharged"),
    }


def _insulated(found: Insulated, residual_ma: Array, operating: Array) -> dict[str, Array]:
    return {
        "first_ma": found.first_fault_ma.nominal,
        "first_least": found.first_fault_ma.least,
        "first_greatest": found.first_fault_ma.greatest,
        "u_second": found.second_v,
        "apart_a": np.where(np.isnan(residual_ma), operating, residual_ma / 1000.0),
    }
