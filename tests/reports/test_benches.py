"""Drawings of benches read back: marks, numbers and words stand where the answer has them."""

import re
from typing import Any
from xml.etree.ElementTree import Element, fromstring

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from faultloop.assessment.texts import LANGUAGES
from faultloop.exchange.bench_faults import validated
from faultloop.exchange.bench_render import solved_answer
from faultloop.reports.benches import bench_drawing
from faultloop.reports.lettering import width
from tests.assessment.bench_bodies import CLIP, Body, bodies, clip_case, fixture, small

SVG = "{http://www.w3.org/2000/svg}"


def drawn(body: Body, language: str = "en") -> tuple[Element, Body]:
    """The parsed drawing, and the answer that it shows."""
    solved, answer = solved_answer(validated(body), language)
    return fromstring(bench_drawing(solved.bench, answer, language)), answer


def marked(root: Element, tag: str, kind: str) -> list[Element]:
    return [element for element in root.iter(SVG + tag) if element.get("class") == kind]


def texts(root: Element) -> list[str]:
    return [(text.text or "").replace("\u00a0", " ") for text in root.iter(SVG + "text")]


def test_every_item_has_its_card_and_the_planned_link_is_dashed() -> None:
    root, answer = drawn(clip_case())
    assert len(marked(root, "rect", "item")) == len(clip_case()["items"])
    (planned,) = marked(root, "g", "planned-link")
    assert [path.get("stroke-dasharray") for path in planned.iter(SVG + "path")][-1]
    assert len(marked(root, "circle", "link-end")) == 2
    assert "115 V → 230 V" in texts(root)
    assert "115 V → 0 V" in texts(root)
    assert answer["planned_link"]["text"][:40] in " ".join(texts(root))


def test_a_tied_node_is_filled_and_a_floating_one_open() -> None:
    fills = []
    for body in (small(), small(planned_link=CLIP)):
        root, _ = drawn(body)
        tied, floating = (marked(root, "circle", f"node {word}") for word in ("tied", "floating"))
        assert {mark.get("fill") for mark in tied} == {"#111111"}
        assert {mark.get("fill") for mark in floating} == {"#ffffff"}
        fills.append((len(tied), len(floating), len(marked(root, "circle", "dangerous"))))
    # Both poles become tied, and one of them stands at the whole voltage then.
    assert fills[1][0] - fills[0][0] == 2
    assert fills[1][2] - fills[0][2] == 1


def test_contacts_stand_on_the_scale_where_their_currents_are() -> None:
    root, answer = drawn(clip_case())
    ticks = {text.text: float(text.get("x", "")) for text in root.iter(SVG + "text") if text.get("class") == "tick"}
    low, high = ticks["0.01\u00a0mA"], ticks["1\u00a0A"]
    contact = next(c for c in answer["contacts"] if c["from"] == "isolating.L1" and c["to"] == "earth")
    for field, kind in (("as_found", "as-found"), ("with_planned_link", "with-planned-link")):
        places = [float(mark.get("cx", "")) for mark in marked(root, "circle", kind)]
        decades = [5.0 * (place - low) / (high - low) - 2.0 for place in places]
        found = [10.0**decade for decade in decades]
        expected = contact[field]["current_ma"]["greatest"]
        assert any(value == pytest.approx(expected, rel=2e-3) for value in found)


@pytest.mark.parametrize("language", LANGUAGES)
@pytest.mark.parametrize("name", ["clip_on_a_floating_bench", "radio_with_live_chassis"])
def test_a_screen_reader_is_told_what_is_drawn(language: str, name: str) -> None:
    root, answer = drawn(fixture(name)["request"], language)
    assert root.get("role") == "img"
    title, described = root.find(SVG + "title"), root.find(SVG + "desc")
    assert title is not None
    assert described is not None
    assert root.get("aria-labelledby") == f"{title.get('id')} {described.get('id')}"
    said = described.text or ""
    assert answer["planned_link"]["text"] in said
    for node in answer["nodes"]:
        assert f"{node['node']}, " in said
        assert node["with_planned_link"]["path"] in said


def test_always_said_on_the_drawing() -> None:
    words = " ".join(texts(drawn(small())[0]))
    assert "touches both poles" in words
    assert "ahead of the transformer sees nothing" in words
    assert "gives no permission" in words
    assert " safe" not in words.lower()


def test_the_same_bench_gives_the_same_bytes() -> None:
    one, other = (solved_answer(validated(clip_case())) for _ in range(2))
    assert bench_drawing(one[0].bench, one[1]) == bench_drawing(other[0].bench, other[1])


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(body=bodies(), language=st.sampled_from(LANGUAGES))
def test_any_bench_can_be_drawn_within_its_sheet(body: Body, language: str) -> None:
    root, _ = drawn(body, language)
    across, down = (float(value) for value in (root.get("viewBox") or "").split()[2:])
    for element in root.iter():
        for name, most in (("x", across), ("x1", across), ("x2", across), ("cx", across), ("y", down), ("cy", down)):
            place = element.get(name)
            if place is not None and "%" not in place and element.tag != SVG + "pattern":
                assert -0.1 <= float(place) <= most + 0.1, (element.tag, element.attrib)
    for path in root.iter(SVG + "path"):
        assert not re.search("nan|inf", path.get("d", ""))


@settings(max_examples=30, deadline=None)
@given(label=st.text(min_size=1, max_size=200).filter(lambda text: text.strip() and "\x00" not in text))
def test_any_label_is_escaped_and_stays_on_its_card(label: str) -> None:
    body: Any = small()
    body["label"] = body["items"][0]["label"] = label
    root, _ = drawn(body)
    card = marked(root, "rect", "item")[0]
    right = float(card.get("x", "")) + float(card.get("width", ""))
    inside = [t for t in root.iter(SVG + "text") if t.get("font-size") == "11.5"]
    for text in inside:
        begin = float(text.get("x", ""))
        if float(card.get("x", "")) < begin < right:
            assert begin + width(text.text or "", 11.5) <= right + 1.0


def test_fifteen_items_stand_apart() -> None:
    items = [
        {"id": f"item{at}", "fed_by": "iso" if at % 2 else "wall", "protection_class": "I", "filter_capacitance_nf": 1}
        for at in range(15)
    ]
    root, _ = drawn(small(items=items))
    cards = [
        tuple(float(card.get(name, "")) for name in ("x", "y", "width", "height"))
        for card in marked(root, "rect", "item")
    ]
    assert len(cards) == 15
    for at, (x, y, across, down) in enumerate(cards):
        for x2, y2, _, _ in cards[at + 1 :]:
            assert abs(x - x2) >= across or abs(y - y2) >= down


def test_a_live_chassis_a_feed_and_an_instrument_are_drawn() -> None:
    body = small()
    body["items"][0] |= {"protection_class": "II", "signal_ground": {"kind": "floating"}, "live_chassis": "L2"}
    root, _ = drawn(body)
    assert len(marked(root, "path", "live-chassis")) == 1
    (feed,) = marked(root, "g", "feed")
    assert feed.findtext(SVG + "title") == "wall → iso"
    assert "class I, instrument" in texts(root)
    assert "class II, worked at" in texts(root)
    del body["items"][0]["live_chassis"]
    root, _ = drawn(body)
    assert len(marked(root, "path", "live-chassis-perhaps")) == 2
    body["items"][0]["live_chassis"] = "none"
    root, _ = drawn(body)
    assert not marked(root, "path", "live-chassis") + marked(root, "path", "live-chassis-perhaps")


def test_long_ids_stand_clear_of_the_currents_and_are_told_in_full() -> None:
    long = "W" * 40
    body = small()
    body["items"][0]["id"] = long
    body["links"] = [{**CLIP, "to": f"{long}.L2"}]
    body["contacts"] = [{"from": f"{long}.case", "to": "iso.L1"}]
    root, _ = drawn(body)
    shown = marked(root, "text", "contact")
    assert shown
    for text in shown:
        assert float(text.get("x", "")) + width(text.text or "", 11) <= 360 - 12 - width("230\u00a0mA", 11)
    titles = [text.findtext(SVG + "title") or "" for text in shown]
    assert any(title.startswith(f"{long}.case – ") or f"– {long}.case" in title for title in titles)
