"""The checks, in the order in which they are reported; a check is a file, and this list is explicit."""

from faultloop.assessment.checks import (
    additional_protection,
    barrier_failed_path,
    earth_electrode,
    line_neutral_disconnection,
    overcurrent_disconnection,
    residual_disconnection,
)
from faultloop.assessment.judged import Check

CHECKS: tuple[Check, ...] = (
    overcurrent_disconnection.CHECK,
    residual_disconnection.CHECK,
    barrier_failed_path.CHECK,
    earth_electrode.CHECK,
    additional_protection.CHECK,
    line_neutral_disconnection.CHECK,
)
