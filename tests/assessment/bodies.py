"""Request bodies in few words, and ways to look into an answer."""

from typing import Any

from faultloop import assess

Body = dict[str, Any]
RESIDUAL_30 = {"residual_type": "A", "rated_residual_operating_current_ma": 30}
SELECTIVE_100 = {
    "residual_type": "A",
    "rated_residual_operating_current_ma": 100,
    "delay": "selective",
}
WORST_FIRST = ("fail", "undetermined", "marginal", "pass-with-conditions", "pass")


def rank(verdict: str) -> int:
    """Place of a verdict, 0 the worst."""
    return WORST_FIRST.index(verdict)


def breaker(designation: str, **more: Any) -> Body:
    """A miniature circuit-breaker such as B32."""
    return {
        "kind": "miniature-circuit-breaker",
        "characteristic": designation[0],
        "rated_current_a": float(designation[1:]),
        **more,
    }


def fuse(rated_current_a: float, fuse_system: str = "iec-60269") -> Body:
    """A gG fuse-link."""
    return {
        "kind": "fuse",
        "fuse_system": fuse_system,
        "utilisation_category": "gG",
        "rated_current_a": rated_current_a,
    }


def copper(area_mm2: float, insulation: str = "pvc", material: str = "copper") -> Body:
    """A conductor."""
    return {"material": material, "insulation": insulation, "area_mm2": area_mm2}


def live(value: float, **more: Any) -> Body:
    """A reading by a high-current method."""
    return {"value": value, "method": "high-current", **more}


def no_trip(value: float, **more: Any) -> Body:
    """A reading by a no-trip method."""
    return {"value": value, "method": "no-trip", **more}


def readings(
    *,
    zs: Any = None,
    ze: Any = None,
    dead: Any = None,
    z_ln: Any = None,
    protective: Any = None,
    electrode: Any = None,
    times: Body | None = None,
) -> Body:
    """Readings by their symbols; what is left out was not taken."""
    named = {
        "earth_fault_loop_impedance_ohm": zs,
        "external_earth_fault_loop_impedance_ohm": ze,
        "line_plus_protective_resistance_ohm": dead,
        "line_neutral_loop_impedance_ohm": z_ln,
        "protective_conductor_resistance_ohm": protective,
        "earth_electrode_resistance_ohm": electrode,
        "residual_operating_time_ms": times,
    }
    return {name: value for name, value in named.items() if value is not None}


def request(
    read: Body,
    *,
    device: Body | str | None = "B32",
    residual: Body | None = None,
    upstream: list[Body] | None = None,
    earthing: str | None = "TN-C-S",
    voltage: float | None = 230,
    rules: str = "bs-7671",
    policy: Body | None = None,
    board: Body | None = None,
    **circuit: Any,
) -> Body:
    """A final circuit feeding fixed equipment, unless told otherwise: then loop and device alone decide."""
    supply = {"earthing": earthing, "nominal_voltage_to_earth_v": voltage}
    body: Body = {
        "point": {"label": "point under test"},
        "supply": {name: value for name, value in supply.items() if value is not None},
        "circuit": {"role": "final", "feeds": "fixed-equipment", **circuit},
        "readings": read,
        "rules": rules,
    }
    if device is not None:
        body["overcurrent_device"] = breaker(device) if isinstance(device, str) else device
    optional = {
        "residual_current_device": residual,
        "upstream_residual_current_devices": upstream,
        "policy": policy,
        "board": board,
    }
    return {**body, **{name: value for name, value in optional.items() if value is not None}}


def judged(read: Body, **more: Any) -> Body:
    """The answer for such a request."""
    return assess(request(read, **more))


def finding(answer: Body, check: str) -> Body:
    """One finding of an answer."""
    found: Body = next(f for f in answer["findings"] if f["check"] == check)
    return found


def verdict_of(answer: Body, check: str) -> str:
    """Verdict of one finding, or the list in which the check stands instead."""
    for found in answer["findings"]:
        if found["check"] == check:
            return str(found["verdict"])
    if any(entry["subject"] == check for entry in answer["not_examined"]):
        return "not-examined"
    assert any(entry["check"] == check for entry in answer["not_applicable"]), f"{check} is not mentioned"
    return "not-applicable"


def fault_protection(answer: Body) -> str:
    """Verdict of the member of fault protection that counts."""
    members = [f for f in answer["findings"] if f.get("group") == "fault-protection"]
    deciding = [f for f in members if f["counts"]]
    assert len(deciding) == 1, "exactly one member of the group decides"
    return str(deciding[0]["verdict"])


def names(answer: Body, listing: str, key: str) -> set[str]:
    """Names in one of an answer's lists."""
    return {entry[key] for entry in answer[listing]}


def conditions(answer: Body) -> set[str]:
    """Conditions on which the verdict rests."""
    return names(answer, "conditions", "condition")


def cautions(answer: Body) -> set[str]:
    """Cautions that the answer carries."""
    return names(answer, "cautions", "caution")


def assumptions(answer: Body) -> set[str]:
    """What the answer says it assumed."""
    return names(answer, "assumptions", "assumption")


def said(value: Any) -> list[str]:
    """Every string in an answer."""
    if isinstance(value, str):
        return [value]
    if isinstance(value, dict):
        return [text for inner in value.values() for text in said(inner)]
    if isinstance(value, list):
        return [text for inner in value for text in said(inner)]
    return []
