"""Hostile bodies: what a tired hand, a broken export or an attacker sends.  Each has a name, and none may pass."""

import copy
import json
from typing import Any

from faultloop.exchange.examples import EXAMPLE_REQUEST

Body = dict[str, Any]
LOOP = ("readings", "earth_fault_loop_impedance_ohm")
RAW = "application/json"


def put(path: tuple[str | int, ...], value: Any, base: Body = EXAMPLE_REQUEST) -> Body:
    """The example with one value put in its place."""
    body = copy.deepcopy(base)
    here: Any = body
    for part in path[:-1]:
        if isinstance(here, dict):
            here = here.setdefault(part, {})
        else:
            here = here[part]
    here[path[-1]] = value
    return body


def without(*path: str) -> Body:
    """The example with one field taken out."""
    body = copy.deepcopy(EXAMPLE_REQUEST)
    here = body
    for part in path[:-1]:
        here = here[part]
    del here[path[-1]]
    return body


def _wrong_numbers() -> dict[str, Body]:
    """Numbers written as people and instruments write them, which JSON numbers are not."""
    words = [
        "0,72",
        "0.72",
        "0.72 ohm",
        "720m",
        ">2000",
        "<0.05",
        "OL",
        "---",
        "",
        "n/a",
        "NaN",
        "1e400",
        "0x1f",
        "٠٫٧",
    ]
    words += ["1 420", "½", "0.72\u0000", " ", "null", "1_000", "0.7.2", "−0.7"]
    values: list[Any] = [*words, True, False, None, [], [0.72], {}, {"value": None}, {"value": "0.72"}, -0.1, -1e9, 1e9]
    named = {f"loop {value!r}": put(LOOP, value) for value in values if value is not None}
    named["loop null"] = put(LOOP, None)
    return named


def _every_reading() -> dict[str, Body]:
    """Every reading as text, negative, as a list, and with a misspelt part."""
    names = [
        "external_earth_fault_loop_impedance_ohm", "line_neutral_loop_impedance_ohm",
        "line_line_loop_impedance_ohm", "line_plus_protective_resistance_ohm", "protective_conductor_resistance_ohm",
        "earth_electrode_resistance_ohm", "insulation_resistance_megohm", "residual_operating_current_ma",
        "standing_leakage_ma", "voltage_v", "voltage_neutral_to_earth_v",
    ]  # fmt: skip
    bad: list[Any] = ["0,5", -0.5, [0.5], {"value": 0.5, "bounds": "above"}, {"value": 0.5, "bound": "over"}, True]
    return {f"{name} {value!r}": put(("readings", name), value) for name in names for value in bad}


def _misspelt() -> dict[str, Body]:
    """A misspelt field in every object."""
    places: list[tuple[str, ...]] = [
        ("raedings",), ("Supply",), ("rule",), ("point", "lable"), ("supply", "nominal_voltage_v"),
        ("supply", "Earthing"), ("circuit", "rated_current"), ("circuit", "rol"), ("readings", "zs"),
        ("readings", "earth_fault_loop_impedance_mohm"), ("readings", "earth_fault_loop_impedance"),
        ("overcurrent_device", "rating_a"), ("residual_current_device", "idn_ma"),
        ("readings", "residual_operating_time_ms", "1x"), ("readings", "residual_operating_time_ms", "10"),
        ("readings", "residual_operating_time_s"), ("policy", "temprature"), ("board", "zln"),
        ("readings", "earth_fault_loop_impedance_ohm", "unit"),
    ]  # fmt: skip
    return {f"field {'.'.join(path)}": put(path, 0.5) for path in places}


def _impossible() -> dict[str, Body]:
    """Devices, supplies and policies that do not exist."""
    device, residual = ("overcurrent_device",), ("residual_current_device",)
    return {
        "B1000": put((*device, "rated_current_a"), 1000),
        "B31": put((*device, "rated_current_a"), 31),
        "B0": put((*device, "rated_current_a"), 0),
        "B-16": put((*device, "rated_current_a"), -16),
        "B as text": put((*device, "rated_current_a"), "32"),
        "E32": put((*device, "characteristic"), "E"),
        "lower case b": put((*device, "characteristic"), "b"),
        "no characteristic": without("overcurrent_device", "characteristic"),
        "no kind": without("overcurrent_device", "kind"),
        "kind mcb": put((*device, "kind"), "mcb"),
        "device as text": put(device, "B32"),
        "device as list": put(device, ["B", 32]),
        "fuse gG 7": put(device, {"kind": "fuse", "fuse_system": "iec-60269", "utilisation_category": "gG", "rated_current_a": 7}),
        "fuse aM": put(device, {"kind": "fuse", "fuse_system": "iec-60269", "utilisation_category": "aM", "rated_current_a": 50}),
        "fuse unknown system": put(device, {"kind": "fuse", "fuse_system": "xx", "utilisation_category": "gG", "rated_current_a": 32}),
        "fuse with characteristic": put((*device, "kind"), "fuse"),
        "31 mA": put((*residual, "rated_residual_operating_current_ma"), 31),
        "0.03 mA": put((*residual, "rated_residual_operating_current_ma"), 0.03),
        "residual type C": put((*residual, "residual_type"), "C"),
        "residual delay quick": put((*residual, "delay"), "quick"),
        "residual as text": put(residual, "30 mA"),
        "9 upstream": put(("upstream_residual_current_devices",), [EXAMPLE_REQUEST["residual_current_device"]] * 9),
        "earthing TNS": put(("supply", "earthing"), "TNS"),
        "earthing tn-s": put(("supply", "earthing"), "tn-s"),
        "earthing list": put(("supply", "earthing"), ["TN-S", "TT"]),
        "current AC": put(("supply", "current"), "AC"),
        "voltage 0": put(("supply", "nominal_voltage_to_earth_v"), 0),
        "voltage negative": put(("supply", "nominal_voltage_to_earth_v"), -230),
        "voltage text": put(("supply", "nominal_voltage_to_earth_v"), "230 V"),
        "voltage 1e6": put(("supply", "nominal_voltage_to_earth_v"), 1e6),
        "phases 4": put(("supply", "phases"), 4),
        "phases true": put(("supply", "phases"), True),
        "poles true": put((*device, "poles"), True),
        "phases text": put(("supply", "phases"), "1"),
        "role socket": put(("circuit", "role"), "socket"),
        "feeds kettles": put(("circuit", "feeds"), "kettles"),
        "users children": put(("circuit", "users"), "children"),
        "designated yes": put(("circuit", "designated_equipment"), "yes"),
        "designated 1": put(("circuit", "designated_equipment"), 1),
        "arrangement star": put(("circuit", "arrangement"), "star"),
        "length text": put(("circuit", "length_m"), "20 m"),
        "conductor number": put(("circuit", "line_conductor"), 2.5),
        "conductor gold": put(("circuit", "line_conductor"), {"material": "gold", "insulation": "pvc", "area_mm2": 2.5}),
        "conductor without area": put(("circuit", "line_conductor"), {"material": "copper", "insulation": "pvc"}),
        "rules unknown": put(("rules",), "bs-7671:1992"),
        "rules empty": put(("rules",), ""),
        "rules null": put(("rules",), None),
        "rules path": put(("rules",), "../../etc/passwd"),
        "policy cautious": put(("policy",), {"temperature": "cautious"}),
        "policy coverage 2": put(("policy",), {"coverage": 2}),
        "policy coverage 0": put(("policy",), {"coverage": 0}),
        "policy text": put(("policy",), "split"),
        "method guess": put(LOOP, {"value": 0.5, "method": "guess"}),
        "instrument percent text": put(LOOP, {"value": 0.5, "instrument": {"percent": "5 %", "digits": 3, "resolution": 0.01}}),
        "instrument negative": put(LOOP, {"value": 0.5, "instrument": {"percent": -5, "digits": 3, "resolution": 0.01}}),
        "instrument incomplete": put(LOOP, {"value": 0.5, "instrument": {"percent": 5}}),
        "temperature 500": put(LOOP, {"value": 0.5, "conductor_temperature_c": 500}),
        "taken tomorrowish": put(LOOP, {"value": 0.5, "taken_at": "tomorrow"}),
        "taken number": put(LOOP, {"value": 0.5, "taken_at": 0}),
        "label missing": without("point", "label"),
        "label empty": put(("point", "label"), ""),
        "label number": put(("point", "label"), 3),
        "label long": put(("point", "label"), "x" * 201),
        "label NUL": put(("point", "label"), "a\u0000b"),
        "point missing": without("point"),
        "point null": put(("point",), None),
        "polarity maybe": put(("readings", "polarity"), "maybe"),
        "times list": put(("readings", "residual_operating_time_ms"), [24]),
        "times number": put(("readings", "residual_operating_time_ms"), 24),
        "time text": put(("readings", "residual_operating_time_ms"), {"1": "24 ms"}),
        "time negative": put(("readings", "residual_operating_time_ms"), {"1": -24}),
    }  # fmt: skip


def _insufficient() -> dict[str, Body]:
    """Bodies that are well formed and cannot carry a pass: the answer must ask, or fail."""
    alone = {key: value for key, value in EXAMPLE_REQUEST.items() if key in ("point", "rules")}
    times = ("readings", "residual_operating_time_ms")
    return {
        "only a label": alone,
        "no earthing": without("supply", "earthing"),
        "no voltage": without("supply", "nominal_voltage_to_earth_v"),
        "no role": without("circuit", "role"),
        "no device": without("overcurrent_device"),
        "no loop": without(*LOOP),
        "no times": without(*times),
        "direct current": put(("supply", "current"), "dc"),
        "IT": put(("supply", "earthing"), "IT"),
        "TN-C": put(("supply", "earthing"), "TN-C"),
        "separated": put(("supply", "earthing"), "separated"),
        "measured voltage 241.3": put(("supply", "nominal_voltage_to_earth_v"), 241.3),
        "voltage 240": put(("supply", "nominal_voltage_to_earth_v"), 240),
        "voltage 24": put(("supply", "nominal_voltage_to_earth_v"), 24),
        "voltage 5e-324": put(("supply", "nominal_voltage_to_earth_v"), 5e-324),
        "loop 0": put(LOOP, 0),
        "loop -0.0": put(LOOP, -0.0),
        "loop 5e-324": put(LOOP, 5e-324),
        "loop 0.00072 (milli)": put(LOOP, 0.00072),
        "loop 720 (kilo)": put(LOOP, 720),
        "loop over range": put(LOOP, {"value": 2000, "bound": "above"}),
        "loop above 0.4": put(LOOP, {"value": 0.4, "bound": "above"}),
        "loop below Ze": put(LOOP, {"value": 0.05, "method": "high-current"}),
        "Ze above the loop": put(("readings", "external_earth_fault_loop_impedance_ohm"), 3.0),
        "Ze in milliohm": put(("readings", "external_earth_fault_loop_impedance_ohm"), 180),
        "R1+R2 in kilohm": put(("readings", "line_plus_protective_resistance_ohm"), 0.00055),
        "time 0": put(times, {"1": 0}),
        "time in seconds": put(times, {"1": 0.024}),
        "time above 300": put(times, {"1": {"value": 300, "bound": "above"}}),
        "time above 20": put(times, {"1": {"value": 20, "bound": "above"}}),
        "time 310": put(times, {"1": 310}),
        "time at 5 only": put(times, {"5": 24}),
        "time 1 fine and 5 late": put(times, {"1": 24, "5": 90}),
        "delayed device": put(("residual_current_device", "delay"), "time-delayed"),
        "selective device": put(("residual_current_device", "delay"), "selective"),
        "300 mA at a socket": put(("residual_current_device", "rated_residual_operating_current_ma"), 300),
        "no residual device": without("residual_current_device"),
    }  # fmt: skip


BODIES: dict[str, Body] = {
    **_wrong_numbers(), **_every_reading(), **_misspelt(), **_impossible(), **_insufficient(),
}  # fmt: skip

_EXAMPLE = json.dumps(EXAMPLE_REQUEST)
_LOOP_TEXT = '"earth_fault_loop_impedance_ohm": {"value": 0.72, "method": "no-trip"}'
assert _LOOP_TEXT in _EXAMPLE
TEXTS: dict[str, bytes] = {
    "empty": b"",
    "binary": bytes(range(256)),
    "UTF-16": _EXAMPLE.encode("utf-16"),
    "not JSON": b"Zs=0.72",
    "CSV": b"label,zs\nBench,0.72\n",
    "XML": b"<point><label>x</label></point>",
    "cut off": _EXAMPLE[:-20].encode(),
    "trailing comma": (_EXAMPLE[:-1] + ",}").encode(),
    "two bodies": (_EXAMPLE + _EXAMPLE).encode(),
    "NaN": _EXAMPLE.replace("0.72", "NaN").encode(),
    "Infinity": _EXAMPLE.replace("0.72", "Infinity").encode(),
    "-Infinity": _EXAMPLE.replace("0.72", "-Infinity").encode(),
    "1e400": _EXAMPLE.replace("0.72", "1e400").encode(),
    "a thousand digits": _EXAMPLE.replace("0.72", "9" * 1000).encode(),
    "leading zero": _EXAMPLE.replace("0.72", "00.72").encode(),
    "plus sign": _EXAMPLE.replace("0.72", "+0.72").encode(),
    "hexadecimal": _EXAMPLE.replace("0.72", "0x1F").encode(),
    "decimal comma": _EXAMPLE.replace("0.72", "0,72").encode(),
    "single quotes": _EXAMPLE.replace('"', "'").encode(),
    "comment": (_EXAMPLE[:-1] + "/* x */}").encode(),
    "lone surrogate": _EXAMPLE.replace("Bench", "\\ud800").encode(),
    "bad UTF-8": _EXAMPLE.encode().replace(b"Bench", b"\xff\xfe"),
    "doubled reading": _EXAMPLE.replace(_LOOP_TEXT, f'"earth_fault_loop_impedance_ohm": 9.9, {_LOOP_TEXT}').encode(),
    "doubled part": (_EXAMPLE[:-1] + ', "readings": {}}').encode(),
    "escaped double": _EXAMPLE.replace(
        _LOOP_TEXT, f'"earth_fault_loop_impedance\\u005fohm": 9.9, {_LOOP_TEXT}'
    ).encode(),
    "list at top": f"[{_EXAMPLE}]".encode(),
    "text at top": json.dumps(_EXAMPLE).encode(),
    "number at top": b"0.72",
    "null at top": b"null",
    "deep lists": b"[" * 50_000 + b"]" * 50_000,
    "deep objects": b'{"point":' * 20_000 + b"1" + b"}" * 20_000,
    "many fields": ("{" + ",".join(f'"f{n}": {n}' for n in range(5000)) + "}").encode(),
    "10 MB text": json.dumps(put(("point", "label"), "x" * 10_000_000)).encode(),
    "10 MB number": b'{"point": {"label": "x"}, "rules": ' + b"1" * 10_000_000 + b"}",
    "byte order mark": b"\xef\xbb\xbf" + _EXAMPLE.replace("0.72", "7.2").encode(),
}
