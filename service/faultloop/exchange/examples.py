"""One invented measured point, used in the document of the interface and answered by the engine."""

from typing import Any

EXAMPLE_REQUEST: dict[str, Any] = {
    "point": {"label": "Bench 3, socket 2", "location": "repair room"},
    "supply": {"earthing": "TN-C-S", "nominal_voltage_to_earth_v": 230, "phases": 1},
    "circuit": {"role": "final", "feeds": "socket-outlets", "rated_current_a": 32},
    "overcurrent_device": {"kind": "miniature-circuit-breaker", "characteristic": "B", "rated_current_a": 32},
    "residual_current_device": {"residual_type": "A", "rated_residual_operating_current_ma": 30},
    "readings": {
        "earth_fault_loop_impedance_ohm": {"value": 0.72, "method": "no-trip"},
        "external_earth_fault_loop_impedance_ohm": 0.18,
        "residual_operating_time_ms": {"1": 24},
    },
    "rules": "bs-7671",
}
