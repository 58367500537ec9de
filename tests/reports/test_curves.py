"""Drawings read back: marks where the tables have their points, regions where the bands promise, all of it in words."""

import json
import math
import re
from collections.abc import Iterator
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from faultloop import assess
from faultloop.assessment.texts import LANGUAGES
from faultloop.exchange.mapping import overcurrent_device, residual_device
from faultloop.exchange.requests import AssessmentRequest
from faultloop.protection.band import Band
from faultloop.protection.catalogue import catalogue, guaranteed, listed_devices
from faultloop.protection.designations import ResidualDevice, parse_device
from faultloop.protection.residual import residual_table
from faultloop.reports.curves import Device, Judged, assessment_drawing, device_drawing
from faultloop.reports.figure import Figure, Region
from faultloop.reports.svg import svg_bytes
from faultloop.rules.loader import resolve, shipped
from tests.assessment.bodies import Body
from tests.reports.drawn import SVG, Drawn, inside

PROVENANCE = {"engine": "1", "rules": "a rule set", "devices_digest": "0" * 64}
FOLDER = Path(__file__).parents[2] / "fixtures" / "outlets"
OUTLETS = [o for name in ("ordinary", "dangerous") for o in json.loads((FOLDER / f"{name}.json").read_text("utf-8"))]


def devices() -> list[Device]:
    """Every device held here."""
    rated = residual_table().rated_residual_operating_currents_ma
    residual = [ResidualDevice(ma, delay=delay) for ma in rated for delay in ("general", "selective")]  # type: ignore[arg-type]
    return [*listed_devices(), *residual]


def of_device(designation: str, rules: str = "iec-60364", language: str = "en") -> Drawn:
    """Drawing of a device."""
    loaded = resolve(rules)
    assert loaded is not None
    return Drawn(device_drawing(parse_device(designation), loaded, PROVENANCE, language))


def drawing(request: Body, answer: Body | None = None) -> bytes:
    """Drawing of a point as if it were stored."""
    body = AssessmentRequest.model_validate(request)
    rules = resolve(body.rules)
    assert rules is not None
    device = None if body.overcurrent_device is None else overcurrent_device(body.overcurrent_device)
    told = answer or assess(request)
    return assessment_drawing(Judged("0", body.point.label, device, residual_device(body), rules, told, "en"))


def point(**more: Any) -> Body:
    """A B16 socket circuit."""
    return {
        "point": {"label": "Bench 1"},
        "supply": {"earthing": "TN-S", "nominal_voltage_to_earth_v": 230},
        "circuit": {"role": "final", "feeds": "socket-outlets"},
        "overcurrent_device": {"kind": "miniature-circuit-breaker", "characteristic": "B", "rated_current_a": 16},
        "readings": {"earth_fault_loop_impedance_ohm": {"value": 1.0, "method": "high-current"}},
        **more,
    }


def test_a_breaker_is_marked_where_its_standard_tests_it() -> None:
    # IEC 60898-1 for B32: 1.13 and 1.45 In in an hour, 2.55 In in 1 to 60 s, 3 and 5 In in 0.1 s.
    drawn = of_device("B32")
    (band,) = drawn.all("g", "band")
    for filled, expected in (
        (True, [(46.4, 3600), (81.6, 60), (160, 0.1)]),
        (False, [(36.16, 3600), (81.6, 1), (96, 0.1)]),
    ):
        assert np.allclose(drawn.marks(band, filled), expected, rtol=2e-3)


@pytest.mark.parametrize("rules", sorted(shipped()))
def test_every_device_is_marked_at_its_points(rules: str) -> None:
    for device in devices():
        drawn = Drawn(device_drawing(device, shipped()[rules], PROVENANCE))
        band, scale = guaranteed(device, shipped()[rules].rules)
        (group,) = drawn.all("g", "band")
        for filled, steps in ((True, band.slow), (False, band.fast)):
            expected = [(current * scale, time) for current, time in steps]
            assert np.allclose(drawn.marks(group, filled), expected, rtol=4e-3) or not expected, device


@pytest.mark.parametrize("designation", ["B32", "gG 63", "BS 88-2 gG 32", "30 mA", "300 mA S"])
def test_edges_step_down_through_their_marks(designation: str) -> None:
    drawn = of_device(designation)
    (band,) = drawn.all("g", "band")
    for kind, filled in (("greatest-time", True), ("least-time", False)):
        circles = [c for c in drawn.all("circle") if c in list(band) and (c.get("fill") != "#ffffff") == filled]
        edges = drawn.all("path", kind)
        assert len(edges) == int(bool(circles))
        corners = drawn.outline(edges[0]) if edges else []
        assert {(float(c.get("cx", "")), float(c.get("cy", ""))) for c in circles} <= set(corners)
        for (x1, y1), (x2, y2) in pairwise(corners):
            assert (x2 >= x1, y2 >= y1, x1 == x2 or y1 == y2) == (True, True, True)


def grid_of_places(drawn: Drawn) -> Iterator[tuple[float, float]]:
    """Places all over the plot, off the round values on which edges lie."""
    left, top, right, bottom = drawn.frame
    for across in np.linspace(left + 1.37, right - 1.37, 41):
        for down in np.linspace(top + 1.73, bottom - 1.73, 31):
            yield float(across), float(down)


@pytest.mark.parametrize("designation", ["B6", "C32", "D63", "gG 2", "gG 63", "BS 88-2 gG 32", "30 mA", "300 mA S"])
def test_what_is_filled_is_what_the_band_leaves_open(designation: str) -> None:
    """Between least and greatest time, from the first current at which the standard says anything of operating."""
    drawn, device = of_device(designation), parse_device(designation)
    rules = resolve("iec-60364")
    assert rules is not None
    if isinstance(device, ResidualDevice):
        table, row, scale = catalogue().residual, catalogue().residual_rows[device.delay], device.rated_ma / 1000
        band = catalogue().residual_bands[device.delay]
    else:
        table, row, scale = catalogue().overcurrent, catalogue().rows[rules.rules.key, device], 1.0
        band = catalogue().bands[rules.rules.key, device]
    first = (band.fast or band.slow)[0][0]
    (region,) = drawn.all("path", "region")
    corners, seen = drawn.outline(region), set()
    for place in grid_of_places(drawn):
        current, time = drawn.x.value(place[0]) / scale, drawn.y.value(place[1])
        rows, currents = np.array([row]), np.array([current])
        least, greatest = table.least_time(rows, currents)[0], table.greatest_time(rows, currents)[0]
        expected = bool(current > first and least <= time <= greatest)
        seen.add(expected)
        near = min(abs(math.log(current / i)) for i, _ in (*band.slow, *band.fast)) < 0.02
        near |= min(abs(math.log(time / t)) for _, t in (*band.slow, *band.fast)) < 0.02
        assert near or inside(place, corners) == expected, (current, time)
    assert seen == {True, False}


@pytest.mark.parametrize("designation", ["B32", "BS 88-2 gG 100", "6 mA", "1000 mA S"])
def test_axes_are_whole_decades_with_their_grid_and_labels(designation: str) -> None:
    drawn = of_device(designation)
    left, top, right, bottom = drawn.frame
    for scale, ends in ((drawn.x, (left, right)), (drawn.y, (bottom, top))):
        logs = [math.log10(scale.value(end)) for end in ends]
        assert np.allclose(logs, np.round(logs), atol=1e-3)
        assert logs[1] - logs[0] > 1.9
    lines = drawn.all("g", "grid")[0].findall(f"{SVG}path")
    decades = round(math.log10(drawn.x.value(right) / drawn.x.value(left)))
    decades += round(math.log10(drawn.y.value(top) / drawn.y.value(bottom)))
    assert sum(line.get("d", "").count("M") for line in lines) == 9 * decades + 2
    units = {(text.text or "").split("\u00a0")[1] for text in (*drawn.x_ticks, *drawn.y_ticks)}
    assert units <= {"mA", "A", "kA", "ms", "s"}


def test_labels_neither_touch_each_other_nor_leave_the_sheet() -> None:
    drawings = [of_device(d) for d in ("B6", "D125", "gG 1250", "BS 88-2 gG 32", "6 mA", "1000 mA S") if held(d)]
    drawings += [Drawn(drawing({**outlet["request"], "point": {"label": "W" * 200}})) for outlet in OUTLETS]
    for drawn in drawings:
        across = [(float(t.get("x", "")), 0.6 * 11 * len(t.text or "")) for t in drawn.x_ticks]
        assert all(a + wa / 2 < b - wb / 2 for (a, wa), (b, wb) in pairwise(across))
        down = [float(t.get("y", "")) for t in drawn.y_ticks]
        assert all(lower - upper > 11 for lower, upper in pairwise(down))
        _, _, width, height = (float(n) for n in drawn.root.get("viewBox", "").split())
        for text in drawn.all("text"):
            if text.get("transform") is None and text.get("text-anchor") is None:
                size, bold = float(text.get("font-size", "12")), text.get("font-weight") == "bold"
                # Advance widths of DejaVu Sans, the widest of the fonts named: W and the widest small letter.
                wide, small = (1.103, 0.72) if bold else (0.989, 0.635)
                needed = size * sum(wide if c in "WmM@%" else small for c in text.text or "" if c not in " iltfj.,")
                assert float(text.get("x", "")) + needed < width
                assert size < float(text.get("y", "")) < height


def held(designation: str) -> bool:
    """Whether a device of this name is held here."""
    return designation in {device.designation for device in devices()}


@pytest.mark.parametrize("language", LANGUAGES)
def test_a_screen_reader_is_told_what_is_drawn(language: str) -> None:
    drawn = of_device("B32", "bs-7671", language)
    named = (drawn.root.get("aria-labelledby") or "").split()
    title, desc = drawn.all("title")[0], drawn.all("desc")[0]
    assert (drawn.root.get("role"), named) == ("img", [title.get("id"), desc.get("id")])
    assert drawn.root.get("lang") == language
    assert "B32" in (title.text or "")
    for told in ("46.4 A", "81.6 A", "160 A", "36.16 A", "96 A", "3600 s", "60 s", "100 ms", "BS 7671:2018"):
        assert told in drawn.description, told


def test_everything_drawn_is_told_apart_without_colour() -> None:
    request = point(residual_current_device={"rated_residual_operating_current_ma": 30})
    drawn = Drawn(drawing(request))
    patterns = {p.get("id"): p.get("patternTransform") for p in drawn.all("pattern")}
    assert len(set(patterns.values())) == len(patterns) == 3
    fills = [path.get("fill", "")[5:-1] for path in drawn.all("path", "region")]
    assert set(fills) <= set(patterns)
    dashes = [path.get("stroke-dasharray") for path in drawn.all("path", "greatest-time")]
    assert len({*dashes, drawn.all("line", "deadline")[0].get("stroke-dasharray")}) == 3


def test_the_same_figure_gives_the_same_bytes() -> None:
    assert drawing(point()) == drawing(point())
    ids = {of_device(d).all("title")[0].get("id") for d in ("B32", "B16", "gG 32", "30 mA")}
    assert len(ids) == 4


def test_an_assessment_shows_its_current_its_time_and_its_verdict() -> None:
    request = point(residual_current_device={"rated_residual_operating_current_ma": 30})
    answer, drawn = assess(request), Drawn(drawing(request))
    current = answer["quantities"]["prospective_earth_fault_current_a"]
    (box,) = (e for e in drawn.all("g", "fault-current")[0] if e.tag == f"{SVG}rect")
    left = float(box.get("x", ""))
    ends = [drawn.x.value(left), drawn.x.value(left + float(box.get("width", "")))]
    assert np.allclose(ends, [current["least"], current["greatest"]], rtol=4e-3)
    (line,) = drawn.all("line", "deadline")
    # IEC 60364-4-41, Table 41.1: 0.4 s for a final circuit at 230 V.
    assert drawn.y.value(float(line.get("y1", ""))) == pytest.approx(0.4, rel=4e-3)
    assert len(drawn.all("g", "band")) == 2
    told = drawn.description
    assert f"Verdict: {answer['verdict']}" in told
    for words in ("B16", "30 mA", f"{current['least']:.4g} A", f"{current['greatest']:.4g} A", "400 ms"):
        assert words in told


def test_what_is_not_known_is_said_and_not_drawn() -> None:
    drawn = Drawn(drawing({"point": {"label": "Bench 2"}}))
    assert drawn.all("g", "band") == drawn.all("g", "fault-current") == drawn.all("line", "deadline") == []
    for words in ("No overcurrent device", "current is not known", "disconnection time is not known"):
        assert any(words in line for line in drawn.texts()), words
        assert words in drawn.description


def test_an_open_end_is_drawn_to_the_edge_without_a_border() -> None:
    reading = {"earth_fault_loop_impedance_ohm": {"value": 0.3, "method": "no-trip"}}
    request = point(readings=reading)
    assert assess(request)["quantities"]["prospective_earth_fault_current_a"]["open"] == "greatest"
    drawn = Drawn(drawing(request))
    (group,) = drawn.all("g", "fault-current")
    box = group.findall(f"{SVG}rect")[0]
    assert float(box.get("x", "")) + float(box.get("width", "")) == pytest.approx(drawn.frame[2])
    assert len(group.findall(f"{SVG}line")) == 1
    assert "no greatest value is known" in drawn.description


def test_a_device_without_a_standard_time_is_said() -> None:
    device = {"rated_residual_operating_current_ma": 300, "delay": "time-delayed"}
    drawn = Drawn(drawing(point(residual_current_device=device)))
    assert len(drawn.all("g", "band")) == 1
    assert "For 300 mA time-delayed no standard gives times" in drawn.description


def test_changed_data_are_said() -> None:
    answer = assess(point())
    same = Drawn(drawing(point(), answer))
    other = Drawn(drawing(point(), {**answer, "provenance": {**answer["provenance"], "devices_digest": "f" * 64}}))
    assert "have changed since the verdict" not in same.description
    assert "have changed since the verdict" in other.description


@pytest.mark.parametrize("outlet", [pytest.param(o, id=o["title"]) for o in OUTLETS])
def test_every_outlet_can_be_drawn_within_its_frame(outlet: Body) -> None:
    drawn = Drawn(drawing(outlet["request"]))
    left, top, right, bottom = drawn.frame
    for path in (*drawn.all("path", "region"), *drawn.all("path", "greatest-time"), *drawn.all("path", "least-time")):
        for x, y in drawn.outline(path):
            assert left - 0.01 <= x <= right + 0.01
            assert top - 0.01 <= y <= bottom + 0.01


ANSWER = assess(point())
# What a request may carry as a label: anything but NUL and half of a pair.
labels = st.text(st.characters(exclude_categories=["Cs"], exclude_characters="\x00"), min_size=1, max_size=200)


@settings(max_examples=200, deadline=None, derandomize=True)
@given(labels)
@example("<script>alert(1)</script> & \"'\x01\x1b\ufffe\u202e")
def test_any_label_is_escaped_and_gives_a_drawing(label: str) -> None:
    drawn = Drawn(drawing(point(point={"label": label}), ANSWER))
    writable = re.sub("[\x01-\x08\x0b\x0c\x0e-\x1f\ufffe\uffff]", "\ufffd", label)
    told = drawn.all("title")[0].text or ""
    assert told.split() == writable.split()
    assert {e.tag.removeprefix(SVG) for e in drawn.root.iter()} <= {
        "svg", "title", "desc", "defs", "pattern", "rect", "line", "g", "path", "circle", "text"
    }  # fmt: skip


ends = st.none() | st.just(0.0) | st.floats(min_value=1e-6, max_value=1e9)


@settings(max_examples=200, deadline=None, derandomize=True)
@given(ends, ends, st.none() | st.floats(min_value=1e-3, max_value=1e4))
def test_any_current_and_time_can_be_drawn(one: float | None, two: float | None, time: float | None) -> None:
    known = sorted(end for end in (one, two) if end is not None)
    least, greatest = (known[0], known[1]) if len(known) == 2 else (one, two)
    quantities: Body = {"prospective_earth_fault_current_a": {"least": least, "greatest": greatest}}
    if time is not None:
        quantities["required_disconnection_time_s"] = time
    drawn = Drawn(drawing(point(), {**ANSWER, "quantities": quantities}))
    left, _, right, _ = drawn.frame
    for group in drawn.all("g", "fault-current"):
        box = group.findall(f"{SVG}rect")[0]
        x, width = float(box.get("x", "")), float(box.get("width", ""))
        assert left <= x
        assert x + width <= right + 1.6
        assert width > 0
    assert len(drawn.all("g", "fault-current")) == int(one is not None or two is not None)
    assert len(drawn.all("line", "deadline")) == int(time is not None)


@pytest.mark.parametrize("fast", [(), ((40.0, 0.1),)])
def test_a_band_of_one_point_is_one_step(fast: tuple[tuple[float, float], ...]) -> None:
    region = Region(False, Band(((100.0, 0.4),), fast), 1.0, "one", "slow", "fast")
    drawn = Drawn(svg_bytes(Figure("key", "en", "One point", "", "Current", "Time", [region])))
    (band,) = drawn.all("g", "band")
    assert np.allclose(drawn.marks(band, True), [(100, 0.4)], rtol=4e-3)
    assert np.allclose(drawn.marks(band, False), fast, rtol=4e-3) or not fast
    _, _, right, bottom = drawn.frame
    corners = drawn.outline(drawn.all("path", "region")[0])
    assert inside((right - 2, bottom - 2), corners)
