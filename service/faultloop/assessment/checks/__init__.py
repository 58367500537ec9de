"""The checks, in the order in which they are reported; a check is a file, and this list is explicit."""

from faultloop.assessment.checks import (
    additional_protection,
    barrier_failed_path,
    breaking_capacity,
    earth_electrode,
    insulation_resistance,
    line_neutral_disconnection,
    means_of_earthing,
    neutral_earth_voltage,
    overcurrent_disconnection,
    overload,
    polarity,
    protective_conductor_condition,
    protective_conductor_heating,
    readings_agree,
    residual_device_test,
    residual_disconnection,
    touch_voltage,
)
from faultloop.assessment.judged import Check

CHECKS: tuple[Check, ...] = (
    overcurrent_disconnection.CHECK,
    residual_disconnection.CHECK,
    barrier_failed_path.CHECK,
    touch_voltage.CHECK,
    protective_conductor_condition.CHECK,
    protective_conductor_heating.CHECK,
    means_of_earthing.CHECK,
    readings_agree.CHECK,
    earth_electrode.CHECK,
    additional_protection.CHECK,
    residual_device_test.CHECK,
    line_neutral_disconnection.CHECK,
    breaking_capacity.CHECK,
    overload.CHECK,
    polarity.CHECK,
    insulation_resistance.CHECK,
    neutral_earth_voltage.CHECK,
)
