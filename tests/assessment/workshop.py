"""Rows of the invented workshop as request bodies, for the tests that judge them."""

import csv
from pathlib import Path
from typing import Any

from faultloop.protection.designations import Breaker, parse_overcurrent, parse_residual

FILE = Path(__file__).parents[2] / "fixtures" / "workshop" / "workshop.csv"
NOT_READ = ("", "n/a", "OL", "---")
LOOPS = (
    "external_earth_fault_loop_impedance_ohm",
    "earth_fault_loop_impedance_ohm",
    "line_neutral_loop_impedance_ohm",
    "line_plus_protective_resistance_ohm",
    "earth_electrode_resistance_ohm",
)

Body = dict[str, Any]


def rows() -> list[dict[str, str]]:
    """The file's rows as text."""
    with FILE.open(newline="", encoding="utf-8") as file:
        return list(csv.DictReader(file, strict=True))


def body(row: dict[str, str]) -> Body:
    """The request of one row; a cell that holds no number is no reading."""
    circuit: Body = {"role": row["role"], "feeds": row["feeds"], "users": row["users"]}
    circuit["rated_current_a"] = float(row["rated_current_a"])
    circuit["length_m"] = float(row["length_m"])
    for name in ("line", "protective"):
        area = float(row[f"{name}_conductor_mm2"])
        circuit[f"{name}_conductor"] = {"material": "copper", "insulation": "pvc", "area_mm2": area}
    request: Body = {
        "point": {"id": row["point_id"], "label": row["label"], "location": row["location"]},
        "supply": {
            "earthing": row["earthing"],
            "nominal_voltage_to_earth_v": float(row["nominal_voltage_to_earth_v"]),
            "phases": int(row["phases"]),
        },
        "circuit": circuit,
        "overcurrent_device": _overcurrent(row),
        "readings": _readings(row),
        "rules": row["rules"],
    }
    if row["residual_current_device"]:
        device = parse_residual(row["residual_current_device"])
        request["residual_current_device"] = {
            "residual_type": device.residual_type,
            "rated_residual_operating_current_ma": device.rated_ma,
            "delay": device.delay,
        }
    return request


def _overcurrent(row: dict[str, str]) -> Body:
    device = parse_overcurrent(row["overcurrent_device"])
    shared = {
        "rated_current_a": device.rated_current_a,
        "breaking_capacity_ka": float(row["breaking_capacity_ka"]),
    }
    if isinstance(device, Breaker):
        return {"kind": "miniature-circuit-breaker", "characteristic": device.characteristic, **shared}
    return {"kind": "fuse", "fuse_system": device.fuse_system, "utilisation_category": "gG", **shared}


def _readings(row: dict[str, str]) -> Body:
    read: Body = {name: _number(row[name]) for name in LOOPS if row[name] not in NOT_READ}
    loop = "earth_fault_loop_impedance_ohm"
    if loop in read:
        read[loop] = {"method": row["reading_method"], **read[loop]}
    if row["residual_operating_time_ms"] not in NOT_READ:
        read["residual_operating_time_ms"] = {"1": float(row["residual_operating_time_ms"])}
    return read


def _number(cell: str) -> Body:
    bound = "above" if cell.startswith(">") else "exact"
    return {"value": float(cell.removeprefix(">")), "bound": bound}
