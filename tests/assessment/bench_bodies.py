"""Bodies of benches for tests: the fixtures, small ones by hand, and drawn ones."""

import copy
import json
from pathlib import Path
from typing import Any

from hypothesis import strategies as st

FOLDER = Path(__file__).parents[2] / "fixtures" / "benches"
Body = dict[str, Any]


def fixture(name: str) -> Body:
    """A fixture with what is said about it."""
    found: Body = json.loads((FOLDER / f"{name}.json").read_text(encoding="utf-8"))
    return found


def clip_case() -> Body:
    """The bench of the worked case."""
    return copy.deepcopy(fixture("clip_on_a_floating_bench")["request"])


def small(**changes: Any) -> Body:
    """One item under test on a separated supply, an earthed oscilloscope on the wall; every value stated."""
    body: Body = {
        "label": "Bench",
        "supplies": [
            {"id": "wall", "kind": "earthed", "nominal_voltage_to_earth_v": 230, "earth_fault_loop_impedance_ohm": 0.5},
            {
                "id": "iso",
                "kind": "separated",
                "nominal_voltage_between_lines_v": 230,
                "transformer": {
                    "rated_power_va": 500,
                    "short_circuit_voltage_percent": 5,
                    "interwinding_capacitance_nf": 0.0,
                },
                "cable_capacitance_to_earth_nf": 0.5,
                "bonding": "none",
                "fed_from": "wall",
            },
        ],
        "items": [
            {"id": "set", "fed_by": "iso", "protection_class": "I", "role": "under-test", "filter_capacitance_nf": 4.7},
            {
                "id": "scope",
                "fed_by": "wall",
                "protection_class": "I",
                "role": "instrument",
                "filter_capacitance_nf": 2.2,
                "signal_ground": {"kind": "earthed"},
            },
        ],
    }
    return copy.deepcopy({**body, **changes})


CLIP: Body = {"id": "clip", "kind": "probe-clip", "from": "scope.signal_ground", "to": "set.L2"}
amounts = st.one_of(
    st.none(),
    st.floats(0.0, 20.0).map(lambda value: round(value, 3)),
    st.tuples(st.floats(0.0, 5.0), st.floats(5.0, 20.0)).map(
        lambda ends: {"least": round(ends[0], 3), "greatest": round(ends[1], 3)}
    ),
)


def _without_nothing(told: Body) -> Body:
    return {name: value for name, value in told.items() if value is not None}


@st.composite
def supplies(draw: st.DrawFn) -> list[Body]:
    """A wall, one or two separated supplies, perhaps a battery."""
    found: list[Body] = [{"id": "wall", "kind": "earthed", "nominal_voltage_to_earth_v": 230}]
    for at in range(draw(st.integers(1, 2))):
        found.append(
            _without_nothing(
                {
                    "id": f"iso{at}",
                    "kind": "separated",
                    "nominal_voltage_between_lines_v": draw(st.sampled_from([115, 230])),
                    "bonding": draw(st.sampled_from(["none", "non-earthed", "earthed"])),
                    "transformer": _without_nothing(
                        {
                            "rated_power_va": draw(st.sampled_from([None, 100, 1000])),
                            "interwinding_capacitance_nf": draw(amounts),
                            "screen": draw(st.booleans()),
                        }
                    ),
                    "cable_capacitance_to_earth_nf": draw(amounts),
                    "fed_from": draw(st.sampled_from([None, "wall"])),
                }
            )
        )
    if draw(st.booleans()):
        found.append({"id": "cell", "kind": "battery"})
    return found


@st.composite
def bodies(draw: st.DrawFn, *, planned: bool | None = None) -> Body:
    """A bench of a few items and links, any of it left unknown."""
    fed = draw(supplies())
    items = []
    for at in range(draw(st.integers(1, 4))):
        feed = draw(st.sampled_from([supply["id"] for supply in fed]))
        ground = draw(st.sampled_from([None, "earthed", "floating", "resistance"]))
        live = draw(st.sampled_from([None, None, "none", "L1", "L2"]))
        items.append(
            _without_nothing(
                {
                    "id": f"item{at}",
                    "fed_by": feed,
                    "protection_class": draw(st.sampled_from(["II", "III"] if feed == "cell" else ["I", "II"])),
                    "role": draw(st.sampled_from([None, "under-test", "instrument"])),
                    "filter_capacitance_nf": draw(amounts),
                    "signal_ground": None if ground is None else {"kind": ground},
                    "live_chassis": live,
                }
            )
        )
    names = ["earth", *(f"{item['id']}.case" for item in items), *(f"{item['id']}.L2" for item in items)]
    names += [f"{item['id']}.signal_ground" for item in items if "signal_ground" in item]
    kinds = st.sampled_from(["probe-clip", "usb", "screen", "antistatic-mat", "bonding-lead", "other"])
    feeds = {item["id"]: item["fed_by"] for item in items}

    def meant(name: str) -> str:
        part, _, end = name.partition(".")
        return f"{feeds[part]}.L2" if end == "L2" else name

    def link(name: str) -> Body | None:
        one, other = draw(st.sampled_from(names)), draw(st.sampled_from(names))
        told = {"id": name, "kind": draw(kinds), "from": one, "to": other, "resistance_ohm": draw(amounts)}
        return None if meant(one) == meant(other) else _without_nothing(told)

    body: Body = {"label": "Bench", "supplies": fed, "items": items}
    body["links"] = [made for at in range(draw(st.integers(0, 3))) if (made := link(f"link{at}")) is not None]
    if planned if planned is not None else draw(st.booleans()):
        body["planned_link"] = link("planned") or {"id": "planned", "kind": "usb", "from": "earth", "to": "item0.case"}
    return _not_too_open(body)


def _not_too_open(body: Body) -> Body:
    """State the resistances that are one too many to be left open."""
    grounds = [item["signal_ground"] for item in body["items"] if item.get("signal_ground") == {"kind": "resistance"}]
    links = [link for link in (*body["links"], body.get("planned_link")) if link is not None]
    for told in [*grounds, *links][4:]:
        told["resistance_ohm"] = 1e5
    return body
