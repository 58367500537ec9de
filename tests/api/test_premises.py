"""The invented premises over HTTP, on both databases: batches, rows, the list of work, separated supplies, German."""

import json
from typing import Any

import httpx
import pytest
from fastapi import FastAPI
from sqlalchemy import Engine

from faultloop import assess
from tests.api.client import served
from tests.exchange.premises import FOLDER, NAMES, Body, at, body, differences, numbers, premises

CSV = {"Content-Type": "text/csv"}
ORDER = ("stop-use", "urgent", "planned", "note", "none")
SUPPLIES: Body = json.loads((FOLDER / "repair-shop" / "supplies.json").read_text(encoding="utf-8"))["benches"]
NETWORKS: Body = json.loads((FOLDER / "repair-shop" / "bench-networks.json").read_text(encoding="utf-8"))["benches"]
ISLAND = (FOLDER / "teaching-laboratory" / "island.json").read_bytes()


@pytest.fixture
def url(engine: Engine) -> str:
    """A migrated database of either kind."""
    return engine.url.render_as_string(hide_password=False)


async def sent(client: httpx.AsyncClient, name: str) -> tuple[str, Body]:
    """Where the file of a premises is kept, and the answer."""
    made = await client.post("/v1/batches", content=premises(name).file.read_bytes(), headers=CSV)
    assert made.status_code == 200
    told: Body = made.json()
    return made.headers["Location"], told


@pytest.mark.parametrize("name", NAMES)
def test_the_file_is_judged_as_by_hand_and_each_row_as_its_point_alone(url: str, name: str) -> None:
    place = premises(name)
    numbered = {point: number for number, point in enumerate(place.rows, 2)}

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        where, told = await sent(client, name)
        counts = told["counts"]
        assert counts == place.expected["counts"]
        assert counts["rows"] == counts["results"] + counts["held"] + counts["refused"] == len(place.rows)
        for point, expected in place.judged.items():
            row = (await client.get(f"{where}/rows/{numbered[point]}")).json()
            assert (row["status"], row["identical"], row["raw"]) == ("judged", True, place.rows[point])
            assert differences(row["assessment"], expected) == [], point
        for point, row in place.rows.items():
            if place.expected["rows"][point].get("status") == "held":
                continue
            alone, kept = body(row), (await client.get(f"{where}/rows/{numbered[point]}")).json()["assessment"]
            preview = (await client.post("/v1/assessments/preview", json=alone)).json()
            assert preview == assess(alone)
            for part in ("verdict", "urgency", "findings", "quantities", "conditions", "not_examined", "cautions"):
                assert kept[part] == preview[part], (point, part)

    served(url, work)


@pytest.mark.parametrize("name", NAMES)
def test_what_is_held_is_asked_about_by_its_column(url: str, name: str) -> None:
    place = premises(name)
    expected = {point: row for point, row in place.expected["rows"].items() if row.get("status") == "held"}

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        _, told = await sent(client, name)
        held = {row["point_id"]: row for row in told["held"]}
        assert held.keys() == expected.keys()
        for point, row in expected.items():
            assert held[point]["urgency"] == row["urgency"]
            questions = [(question["column"], question["raw"]) for question in held[point]["questions"]]
            assert questions == [(row["column"], place.rows[point][row["column"]])]

    served(url, work)


@pytest.mark.parametrize("name", NAMES)
def test_the_list_of_work_runs_from_the_most_to_the_least_dangerous(url: str, name: str) -> None:
    place = premises(name)

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        where, _told = await sent(client, name)
        view = (await client.get(f"{where}/workshop")).json()
        listed = {part: [item["point_id"] for item in view[part]] for part in ("stop_use", "fix")}
        assert set(listed["stop_use"]) == set(place.expected["stop_use"])
        assert set(listed["fix"]) == set(place.expected["fix"])
        assert all(item["urgency"] == "stop-use" for item in view["stop_use"])
        ranks = [ORDER.index(item["urgency"]) for item in view["fix"]]
        assert ranks == sorted(ranks)
        # A failure that is shown comes before a question that may hide one.
        unshown = [item["verdict"] != "fail" for item in view["stop_use"]]
        assert unshown == sorted(unshown)
        page = (await client.get(f"{where}/workshop", headers={"Accept": "text/html"})).text
        places = [page.index(place.rows[point]["label"].replace("'", "&#39;")) for point in listed["stop_use"]]
        assert places == sorted(places)

    served(url, work)


@pytest.mark.parametrize("name", NAMES)
def test_german_keeps_every_number(url: str, name: str) -> None:
    place = premises(name)

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        where, _told = await sent(client, name)
        for number, point in enumerate(place.rows, 2):
            if place.expected["rows"][point].get("status") == "held":
                continue
            english, german = [
                (await client.get(f"{where}/rows/{number}", headers={"Accept-Language": language})).json()["assessment"]
                for language in ("en", "de")
            ]
            assert numbers(german) == numbers(english), point
            assert german["quantities"] == english["quantities"]
            assert (german["verdict"], german["urgency"]) == (english["verdict"], english["urgency"])
            titles = [[finding["title"] for finding in told["findings"]] for told in (english, german)]
            assert titles[0] != titles[1]

    served(url, work)


def requests_of(name: str) -> Body:
    """The rows of a premises that are judged as a list of requests."""
    place = premises(name)
    expected = place.expected["rows"]
    return {"rows": [body(row) for point, row in place.rows.items() if expected[point].get("status") != "held"]}


@pytest.mark.parametrize("name", [*NAMES, "island"])
def test_the_same_points_as_a_list_of_requests_say_what_the_file_says(url: str, name: str) -> None:
    file = "teaching-laboratory" if name == "island" else name
    content = ISLAND if name == "island" else json.dumps(requests_of(name)).encode()
    number = len(json.loads(content)["rows"])

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        _, told = await sent(client, file)
        made = await client.post("/v1/batches", content=content, headers={"Content-Type": "application/json"})
        listed = made.json()
        assert listed["counts"] == {"rows": number, "results": number, "held": 0, "refused": 0}
        by_point: dict[str, Any] = {row["point_id"]: row for row in told["results"]}
        for row in listed["results"]:
            other = by_point[row["point_id"]]
            for part in ("verdict", "urgency", "decided_by", "findings"):
                assert row.get(part) == other.get(part), row["point_id"]

    served(url, work)


@pytest.mark.parametrize("bench", SUPPLIES)
def test_each_bench_as_a_separated_supply_is_judged_as_by_hand(url: str, bench: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        told = await client.post("/v1/separated-supplies", json=SUPPLIES[bench])
        assert told.status_code == 200
        assert differences(told.json(), premises("repair-shop").expected["supplies"][bench]) == []
        german = await client.post("/v1/separated-supplies", json=SUPPLIES[bench], headers={"Accept-Language": "de"})
        assert numbers(german.json()) == numbers(told.json())

    served(url, work)


@pytest.mark.parametrize("bench", NETWORKS)
def test_each_bench_as_a_network_is_solved_as_by_hand(url: str, bench: str) -> None:
    expected = premises("repair-shop").expected["networks"][bench]

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        solved = await client.post("/v1/bench-networks", json=NETWORKS[bench])
        assert solved.status_code == 200
        told = solved.json()
        for state in ("as_found", "with_planned_link"):
            words = {**told[state], "ties": told["planned_link"]["ties"]}
            assert {word: words[word] for word in expected[state]} == expected[state]
        changes = {f"{change['change']} {change.get('subject', '')}".strip(): change for change in told["changes"]}
        assert {name: changes[name]["helps"] for name in expected["changes"]} == expected["changes"]
        for value in expected["values"]:
            assert at(told, value["at"]) == pytest.approx(value["value"], rel=value["rel_tol"]), value["at"]
        spoken = await client.post("/v1/bench-networks", json=NETWORKS[bench], headers={"Accept-Language": "de"})
        german = spoken.json()
        assert numbers(german) == numbers(told)
        assert german["planned_link"]["current_ma"] == told["planned_link"]["current_ma"]

    served(url, work)


@pytest.mark.parametrize("bench", ["bench-1", "bench-4"])
def test_a_clip_that_is_left_off_leaves_the_bench_as_it_was_found(url: str, bench: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        told = (await client.post("/v1/bench-networks", json=NETWORKS[bench])).json()
        link = NETWORKS[bench]["planned_link"]["id"]
        left = next(c for c in told["changes"] if (c["change"], c.get("subject")) == ("remove-link", link))
        names = ("verdict", "urgency", "floats", "tied", "worst_contact_current_ma")
        assert {name: left[name] for name in names} == {name: told["as_found"][name] for name in names}
        without = {name: part for name, part in NETWORKS[bench].items() if name != "planned_link"}
        bare = (await client.post("/v1/bench-networks", json=without)).json()
        assert bare["as_found"] == told["as_found"]

    served(url, work)
