"""Columns of separated and IT supplies: what a row's cells say of the items, the monitor, and yes or no."""

from collections.abc import Mapping
from typing import Any

Body = dict[str, Any]
Path = tuple[str, ...]
_TRANSFORMER = ("separated_supply", "transformer")
UNEARTHED_WORDS: dict[str, Path] = {
    "earth_contacts": ("separated_supply", "earth_contacts"),
    "winding_insulation": (*_TRANSFORMER, "winding_insulation"),
    "exposed_parts": ("it_supply", "exposed_parts"),
}
UNEARTHED_NUMBERS: dict[str, Path] = {
    "nominal_voltage_between_lines_v": ("supply", "nominal_voltage_between_lines_v"),
    "frequency_hz": ("supply", "frequency_hz"),
    "transformer_rated_power_va": (*_TRANSFORMER, "rated_power_va"),
    "transformer_primary_voltage_v": (*_TRANSFORMER, "primary_voltage_v"),
    "transformer_secondary_voltage_v": (*_TRANSFORMER, "secondary_voltage_v"),
    "transformer_short_circuit_voltage_percent": (*_TRANSFORMER, "short_circuit_voltage_percent"),
    "outlets": ("separated_supply", "outlets"),
    "wiring_length_m": ("separated_supply", "wiring_length_m"),
    "line_capacitance_to_earth_nf": ("it_supply", "line_capacitance_to_earth_nf"),
    "monitor_set_point_kohm": ("it_supply", "insulation_monitor", "set_point_kohm"),
}
# Of the items a file says how many there are, how many have exposed parts, and what is alike in all of these.
ITEMS: dict[str, Path] = dict.fromkeys(
    ("items", "class_i_items", "filter_capacitance_nf", "lead_length_m", "lead_mm2"), ("separated_supply", "items")
)
YES_OR_NO: dict[str, Path] = {
    "pole_earthed": ("separated_supply", "pole_earthed"),
    "neutral_distributed": ("it_supply", "neutral_distributed"),
}
MONITOR = "insulation_monitor"
MONITOR_WORDS: dict[str, Body] = {
    "none": {"fitted": False},
    "fitted": {"fitted": True},
    "tested": {"fitted": True, "alarm_tested": True},
}
TRUTH = {"yes": True, "no": False}
WHOLE = ("phases", "outlets", "items", "class_i_items")
OTHERS: dict[str, Path] = {**ITEMS, **YES_OR_NO, MONITOR: ("it_supply", MONITOR)}
MOST_ITEMS = 200


def items_of(cells: Mapping[str, float]) -> list[Body] | None:
    """The items of a row, alike in what the row says of them; None where it does not say how many."""
    if "items" not in cells:
        return None
    count, exposed = int(cells["items"]), cells.get("class_i_items")
    alike: Body = {}
    if "filter_capacitance_nf" in cells:
        alike["filter_capacitance_nf"] = cells["filter_capacitance_nf"]
    if "lead_length_m" in cells and "lead_mm2" in cells:
        alike["lead"] = {"length_m": cells["lead_length_m"], "area_mm2": cells["lead_mm2"]}
    if exposed is None:
        return [alike] * count
    return [{**alike, "protection_class": "I" if at < exposed else "II"} for at in range(count)]


def items_fault(cells: Mapping[str, float]) -> str | None:
    """What is wrong with the numbers of items, if anything."""
    count, exposed = cells.get("items"), cells.get("class_i_items")
    if count is None:
        return "how many items? the other columns of items say nothing without it" if cells else None
    if not count.is_integer() or count > MOST_ITEMS:
        return f"a whole number to {MOST_ITEMS} is expected"
    if exposed is not None and (not exposed.is_integer() or exposed > count):
        return "class_i_items must be a whole number and no more than items"
    return None
